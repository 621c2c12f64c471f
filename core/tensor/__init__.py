"""Fourth-rank tensors as 6x6 matrices: notation, stability, symmetry classes, averages."""
