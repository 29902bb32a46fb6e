"""Warnings: each a fact from the record, a number for what it costs, and a remedy."""
