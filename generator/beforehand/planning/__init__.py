"""Before the data, or without their results: drafting a spec, checking it against its data."""
