"""Bayreckon: depth readings of sprayed foam, reckoned bay by bay and reported."""

__version__ = "0.1.0"
