"""The memo from files to estimate, keyed by content."""
