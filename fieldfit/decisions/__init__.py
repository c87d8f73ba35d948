"""What to decide with it."""
