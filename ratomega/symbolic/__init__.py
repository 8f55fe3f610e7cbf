"""Free parameters: coefficients as exact rational functions, by interpolation between exact limits."""
