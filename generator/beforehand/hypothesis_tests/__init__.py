"""Statistical tests: one file for each, all of one shape."""
