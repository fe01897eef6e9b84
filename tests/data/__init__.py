"""Example release files of an invented economy, and the programs that make them."""
