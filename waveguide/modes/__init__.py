"""Vertical and coastal-trapped modes."""
