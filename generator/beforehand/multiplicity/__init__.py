"""Multiplicity: procedures within a family, schemes across families, and the one place that decides."""
