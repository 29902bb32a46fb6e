"""The results of record and the run folder."""
