"""Run the command with ``python -m app``."""

from app.cli import main

main()
