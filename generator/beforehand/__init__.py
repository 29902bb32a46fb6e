"""Run an analysis spec written before the data into a report that a sceptical reader can check."""
