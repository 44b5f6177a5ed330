"""Measurement uncertainty: what is uncertain, and how it reaches the result."""
