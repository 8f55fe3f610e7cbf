"""The desk: what a person sees."""
