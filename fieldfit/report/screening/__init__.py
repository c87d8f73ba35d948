"""What screening a log found, before any fit: checks, page, summary and record."""
