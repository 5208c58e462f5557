"""What a route does to a signal: dispersion, junctions, waveforms, arrivals."""
