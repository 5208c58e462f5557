"""Arrival times and amplitudes of sea-level signals along coasts and the equator."""
