"""One report model, written out as JSON and terminal tables."""
