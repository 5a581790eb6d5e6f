"""Exact balance of chains of several joints, and the same chains with real springs."""
