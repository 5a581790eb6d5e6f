"""Which point to move, and how far, when the payload changes."""
