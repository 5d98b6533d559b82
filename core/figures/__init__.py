"""The one door to every computed thing."""
