"""The Data page behind the screen: files looked at, kept, corrected."""
