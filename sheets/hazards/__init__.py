"""From magnitudes to hazards and signal words."""
