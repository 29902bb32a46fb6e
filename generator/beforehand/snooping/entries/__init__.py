"""The warning rules, one to a file."""
