"""Figures and reports: what leaves the program for someone else's desk."""
