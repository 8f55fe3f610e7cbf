"""A case: a theory, a background with its path, and a bound on the charge."""
