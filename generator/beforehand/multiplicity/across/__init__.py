"""Schemes: what the families of a study share, and which family is tested when."""
