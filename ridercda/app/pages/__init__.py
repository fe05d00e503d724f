"""The pages, in the order of work."""
