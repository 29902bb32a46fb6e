"""The multiplicity procedures, one to a file."""
