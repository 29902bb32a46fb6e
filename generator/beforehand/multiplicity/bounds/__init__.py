"""Bounds that hold for all choices at once, so that a choice may be made after looking."""
