"""Screens measurement channels for departures from the normal, or from the distribution expected of them."""

__version__ = "0.1.0"
