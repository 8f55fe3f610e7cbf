"""Young diagrams and tuples of them: pure combinatorics, no numbers of the theory."""
