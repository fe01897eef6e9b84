"""The Lag page behind the screen: what the exploration was worth, in numbers and words."""
