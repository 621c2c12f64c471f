"""Invented specimens of one invented scenario; see the README in this folder."""
