"""From shoreline and depth to the coast that a wave follows, and its cross-shelf sections."""
