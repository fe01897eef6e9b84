"""The commands, one module each; `app.cli` gathers them."""
