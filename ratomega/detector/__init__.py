"""The detector: singular configurations, the guilty factors, the clusters in which the poles cancel."""
