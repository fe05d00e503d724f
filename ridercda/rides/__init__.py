"""Ride files to rides: readers, faults and repairs."""
