"""What a criterion accepts as a number."""

from __future__ import annotations

import math

from reportgen.errors import ModelError


def finite(name: str, value: float) -> float:
    """Return ``value`` as a float; a NaN or an infinity is refused.

    Raises
    ------
    ModelError
        If ``value`` is not a finite number.
    """
    number = float(value)
    if not math.isfinite(number):
        raise ModelError(
            f"the {name} is {number}, which is no number; hand over a finite value, "
            "or None where it is not known"
        )
    return number


def positive(name: str, value: float) -> float:
    """Return ``value`` as a finite float above zero.

    Raises
    ------
    ModelError
        If ``value`` is not finite or not above zero.
    """
    number = finite(name, value)
    if number <= 0.0:
        raise ModelError(f"the {name} is {number:g}; it must be above zero")
    return number


def not_negative(name: str, value: float) -> float:
    """Return ``value`` as a finite float that is zero or above.

    Raises
    ------
    ModelError
        If ``value`` is not finite or below zero.
    """
    number = finite(name, value)
    if number < 0.0:
        raise ModelError(f"the {name} is {number:g}; it must not be negative")
    return number


def share(name: str, value: float) -> float:
    """Return ``value`` as a finite float above 0 and at most 1.

    Raises
    ------
    ModelError
        If ``value`` lies outside (0, 1].
    """
    number = positive(name, value)
    if number > 1.0:
        raise ModelError(f"the {name} is {number:g}; a share lies between 0 and 1 (75 % is 0.75)")
    return number
