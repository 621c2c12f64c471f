"""The trust sheet: whether a table of constants can be trusted, and what to do about it."""
