"""Depth and stratification, packaged or the user's own."""
