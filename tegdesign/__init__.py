"""Thermoelectric generator module design: from a heat source to a sized, rated and documented module."""

__version__ = "0.1.0"
