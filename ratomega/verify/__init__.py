"""Numbers that were found in other ways, against the exact limits."""
