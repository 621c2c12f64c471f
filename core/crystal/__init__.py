"""The crystal and the part: unit cell, directions, axes conventions, orientations."""
