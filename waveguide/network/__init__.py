"""Directed legs, junctions, the mode atlas and the route search."""
