"""Results to a report with its data beside it."""
