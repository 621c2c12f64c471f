"""Elastic constants from measured wave speeds: the fit, its honesty, and what to cut next."""
