"""scalewright."""
