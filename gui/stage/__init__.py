"""The two three-dimensional panes."""
