"""Questions a user asks of a run, and their answers: value, unit, sampling error."""
