"""The Outlook page behind the screen: what is implied, how it did before, what was stated."""
