"""The page of measured speeds: readings, what a fit says of them, and what to cut next."""
