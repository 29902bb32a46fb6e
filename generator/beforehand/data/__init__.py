"""Data files: read strictly, checked, derived, excluded, handed to tests as clean samples."""
