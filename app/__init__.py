"""The dashboard and the command: files in, pages, exports."""
