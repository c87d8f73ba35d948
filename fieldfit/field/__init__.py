"""What the crew brings: section file, logs, units, plateaus."""
