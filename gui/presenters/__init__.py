"""Who keeps which part of the window in step with the bench."""
