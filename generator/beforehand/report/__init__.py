"""The report: words and figures from the record alone."""
