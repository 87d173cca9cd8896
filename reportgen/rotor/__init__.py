"""Mechanics of rotors in lateral vibration: pure functions and frozen dataclasses over SI."""
