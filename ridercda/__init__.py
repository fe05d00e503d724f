"""RiderCdA: drag area and rolling resistance from ride files, and what they are worth on a course."""

__version__ = "0.1.0"
