"""Distributions of the largest of several statistics, by deterministic quadrature: floor 1, plain arrays in and out."""
