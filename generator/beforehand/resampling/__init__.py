"""Chance that repeats itself: streams of draws that belong to a seed and a name."""
