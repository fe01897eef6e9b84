"""Checks of the numbers, one file a module."""
