"""Private parts of `scalewright.corrections`."""
