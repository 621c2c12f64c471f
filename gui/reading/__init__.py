"""The numbers at the pin, extremes, cutting error and aggregates."""
