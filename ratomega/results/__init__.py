"""Results: frozen values that say everything about one run and travel as JSON without loss."""
