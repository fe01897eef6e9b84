"""The brief: chosen views with words between them, as one file to send and a folder to check."""
