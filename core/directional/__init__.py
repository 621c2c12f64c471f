"""Everything that depends on a direction: moduli, waves, extremes, surfaces."""
