"""The ways to balance one arm, side by side."""
