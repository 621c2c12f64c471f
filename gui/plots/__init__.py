"""Section, hemisphere, sweep and colour bar."""
