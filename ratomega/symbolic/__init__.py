"""Free parameters: coefficients as exact rational functions, from the pole recursion or interpolated between limits."""
