"""Wind over the guide and the sea level it drives."""
