"""Timings: `python -m tests.benchmarks` prints them. Nothing here fails a test run."""
