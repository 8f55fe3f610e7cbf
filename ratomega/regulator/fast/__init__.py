"""The sum for two and three colours from residues modulo many primes; ``sums.py`` is the way in."""
