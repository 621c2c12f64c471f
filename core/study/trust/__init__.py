"""Whether a table can be trusted: symmetry, plausibility, what the data support."""
