"""Strength calculation of hydraulic log splitters and machines loaded like them."""

__version__ = "0.1.0"
