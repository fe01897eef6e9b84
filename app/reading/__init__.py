"""The Reading page behind the screen: one print, in numbers, words and files."""
