"""Identities that tie Z of a case to closed values, or to Z of its siblings at other parameters."""
