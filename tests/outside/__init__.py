"""Checks against values and data that come from outside the project."""
