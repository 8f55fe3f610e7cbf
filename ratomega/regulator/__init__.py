"""The regulator: limits taken exactly, cluster by cluster."""
