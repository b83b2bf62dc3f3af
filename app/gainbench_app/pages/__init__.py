"""Pages that take the place of the middle and right columns."""
