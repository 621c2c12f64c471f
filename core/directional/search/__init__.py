"""Searches over directions: extremes, and where two sheets meet."""
