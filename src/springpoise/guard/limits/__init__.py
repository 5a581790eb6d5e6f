"""Limits that a mechanism file states, judged."""
