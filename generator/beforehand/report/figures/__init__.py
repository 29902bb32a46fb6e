"""The figures, one to a file; each draws only the numbers that the record holds for it."""
