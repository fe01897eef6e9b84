"""Set-up shared by every check; as part of a package it also puts the checkout on the path."""

from hypothesis import settings

# The same examples in every run, and no clock: a busy machine must not turn a check red.
settings.register_profile("pricewake", deadline=None, derandomize=True)
settings.load_profile("pricewake")
