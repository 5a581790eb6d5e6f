"""The text of a mechanism file to objects and back."""
