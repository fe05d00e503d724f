"""Physics as pure functions on SI arrays: air, wind, resistance, track lean, geodesy, critical power."""
