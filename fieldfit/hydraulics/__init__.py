"""The physics a pipe obeys, on arrays in SI units."""
