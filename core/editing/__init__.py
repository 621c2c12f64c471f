"""What a user may change: pure functions from text and a value to a new value."""
