"""What can be inferred of the wall from the readings, and how surely."""
