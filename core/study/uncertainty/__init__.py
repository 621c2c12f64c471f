"""How the uncertainty of the constants reaches every number."""
