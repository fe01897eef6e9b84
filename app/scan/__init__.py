"""Every pair in the files: which there are, how they are searched, and what came of it."""
