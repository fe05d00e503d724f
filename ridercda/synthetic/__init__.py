"""Invented test days from a seed: venue, wind, rider, sensors, faults. Shares no code with the estimator."""
