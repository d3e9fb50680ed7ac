"""Timing circuits that keep their interval, from the parts already in your drawers."""

__version__ = "0.1.0"
