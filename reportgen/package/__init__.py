"""Calculation packages: manifest, identities, sign-off, atomic writing."""
