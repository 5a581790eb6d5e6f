"""The best geometry in a box for any mechanism."""
