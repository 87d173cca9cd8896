"""Tolerance studies over cases."""
