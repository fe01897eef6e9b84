"""The Breadth page behind the screen: components, in numbers, words and files."""
