"""Invented test days from a seed; shares no code with the estimator."""
