"""The version of the program, the same as in `pyproject.toml`."""

VERSION = "0.1.0"
