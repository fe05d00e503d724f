"""The day strip: the whole day on one time axis."""
