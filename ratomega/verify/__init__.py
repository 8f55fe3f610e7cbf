"""Someone's numbers against the exact limits: a table, a verdict for every row, and a diagnosis from all rows."""
