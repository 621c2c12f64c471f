"""The pictures of the README: `python -m tests.pictures` draws them anew."""
