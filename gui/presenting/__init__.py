"""From state and results to view data: pure functions, no widgets, one module a region."""
