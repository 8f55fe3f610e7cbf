"""Benchmarks: one file a question, one command, ratios measured in one run."""
