"""Range checks of the one-mass mechanics: each refusal says what was found and what would do."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import ModelError


def finite(name: str, value: float, unit: str = "") -> float:
    """Return the value as a float, or refuse what is not one finite number."""
    try:
        number = float(value)
    except (TypeError, ValueError):
        raise ModelError(f"{name} is {value!r}; it must be one real number{_of(unit)}") from None
    if not math.isfinite(number):
        raise ModelError(f"{name} is {number}; it must be a finite number{_of(unit)}")
    return number


def positive(name: str, value: float, unit: str = "") -> float:
    """Return the value, or refuse what is not finite and above zero."""
    number = finite(name, value, unit)
    if number <= 0.0:
        raise ModelError(f"{name} is {number:g}{_unit(unit)}; it must be greater than 0")
    return number


def not_negative(name: str, value: float, unit: str = "") -> float:
    """Return the value, or refuse what is not finite and at least zero."""
    number = finite(name, value, unit)
    if number < 0.0:
        raise ModelError(f"{name} is {number:g}{_unit(unit)}; it must not be negative")
    return number


def speeds(value: ArrayLike, name: str = "speed") -> NDArray[np.float64]:
    """Return speeds of rotation as an array, or refuse negative and non-finite ones."""
    try:
        array = np.asarray(value, dtype=np.float64)
    except (TypeError, ValueError):
        raise ModelError(f"{name} is not an array of real numbers in rad/s") from None
    if array.size and not np.all(np.isfinite(array)):
        raise ModelError(f"{name} holds a value that is not finite; give finite speeds in rad/s")
    if array.size and float(array.min()) < 0.0:
        raise ModelError(
            f"{name} holds {float(array.min()):g} rad/s; speeds are counted positive in the "
            "sense of rotation"
        )
    return array


def _unit(unit: str) -> str:
    return f" {unit}" if unit else ""


def _of(unit: str) -> str:
    return f" of {unit}" if unit else ""


def rigid(is_rigid: bool, what: str) -> None:
    """Refuse a rotor on flexible supports where the method has none."""
    if not is_rigid:
        raise ModelError(f"{what} is given for rigid supports only; leave the support out")
