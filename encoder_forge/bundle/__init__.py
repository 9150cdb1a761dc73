"""Everything about one encoder, written to disk in one atomic step, and read back."""
