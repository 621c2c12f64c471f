"""Icons and other files that are not code."""
