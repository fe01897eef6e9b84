"""Reading of release files."""
