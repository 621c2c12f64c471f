"""The report as plain data: what it says, and how each number was computed."""
