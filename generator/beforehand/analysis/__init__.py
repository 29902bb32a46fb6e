"""One analysis, in a straight line from spec and data to the record."""
