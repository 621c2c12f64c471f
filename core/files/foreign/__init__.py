"""Understanding tables as people write them: cells, shapes, units, guesses."""
