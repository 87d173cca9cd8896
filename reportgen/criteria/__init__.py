"""Limits by published source: pure functions."""
