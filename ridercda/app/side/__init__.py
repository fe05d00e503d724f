"""The side of the window: setups, and the details of what is picked."""
