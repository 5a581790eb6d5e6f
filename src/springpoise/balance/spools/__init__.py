"""Wrapping cams that make an ordinary spring balance an arm."""
