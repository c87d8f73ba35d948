"""What people read: record, figures, page, summary."""
