"""The headless verbs behind the command line: what they compute and how they print it."""
