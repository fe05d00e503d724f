"""Proposing and cutting runs and laps, and where along the venue each record lies."""
