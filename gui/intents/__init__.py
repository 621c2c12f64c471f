"""What the user does, turned into named steps on the bench."""
