"""Questions asked of a crystal: what a cutting error costs."""
