"""Checks of Pricewake."""
