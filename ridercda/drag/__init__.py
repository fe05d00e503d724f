"""From a prepared day to CdA per setup and Crr per tyre set."""
