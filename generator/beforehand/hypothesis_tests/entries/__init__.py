"""The statistical tests, one to a file."""
