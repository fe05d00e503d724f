"""Setups against courses: time saved, rank, chance, break-even."""
