"""Knell: a reproducible survey of how deformed, non-rotating black holes ring."""

__version__ = "0.1.0"
