"""The race route: import, cleaning, simulation and power plans."""
