"""Lateral-vibration calculation reports for rotating machines."""

__version__ = "0.1.0"
