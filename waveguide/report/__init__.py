"""Showing arrivals: a table, a JSON document, files and a map.

Only what is asked for is imported: the map and its library not before a map is drawn.
"""
