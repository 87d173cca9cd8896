"""SI in, the reader's units out, with the figures that a page should have."""

from __future__ import annotations

import math
from typing import Any

from reportgen.units.quantities import QUANTITIES, System


def unit_of(quantity: str, system: System) -> str:
    """Return the unit of the printed page, empty for a pure number."""
    return QUANTITIES[quantity].reader(system).name


def to_reader(value: Any, quantity: str, system: System) -> Any:
    """Return SI values in the unit of the printed page; arrays keep their shape."""
    unit = QUANTITIES[quantity].reader(system)
    return (value - unit.zero) / unit.size if unit.zero else value / unit.size


def to_si(value: Any, quantity: str, system: System) -> Any:
    """Return values in the unit of the printed page in SI; arrays keep their shape."""
    unit = QUANTITIES[quantity].reader(system)
    return value * unit.size + unit.zero


def show(value_si: float, quantity: str, system: System, digits: int = 4) -> str:
    """Return a value with its unit as text, such as ``1480 r/min`` or ``1.90×10⁶ N/m``.

    Parameters
    ----------
    value_si
        Value in SI.
    quantity
        Key of :data:`QUANTITIES`.
    system
        Units of the reader.
    digits
        Significant figures. A value that is exact with fewer is printed shorter; a whole
        number is printed whole.

    Raises
    ------
    ValueError
        If the value is not finite: a report never prints one.
    """
    mantissa, power = _figures(to_reader(value_si, quantity, system), quantity, digits)
    number = mantissa.replace("-", "−")
    if power:
        number += "×10" + str(power).translate(str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹"))
    if quantity == "grade":
        return f"G {number}"
    unit = unit_of(quantity, system)
    if unit == "°":
        return f"{number}°"
    return f"{number} {unit}" if unit else number


def show_latex(value_si: float, quantity: str, system: System, digits: int = 4) -> str:
    r"""Return a value with its unit as LaTeX, such as ``1.90\times 10^{6}\ \text{N/m}``.

    Parameters and errors are those of :func:`show`.
    """
    number, power = _figures(to_reader(value_si, quantity, system), quantity, digits)
    if power:
        number += rf"\times 10^{{{power}}}"
    if quantity == "grade":
        return rf"\mathrm{{G}}\ {number}"
    unit = unit_of(quantity, system)
    return number + (latex_unit(unit) if unit == "°" else rf"\ {latex_unit(unit)}" if unit else "")


def latex_unit(unit: str) -> str:
    r"""Return a unit as printed in LaTeX, such as ``\text{kg·m²}``.

    Text, not ``\mathrm``: MathML then holds the unit as one token, which a screen reader
    reads whole and no layout spreads apart.
    """
    if unit == "°":
        return r"^{\circ}"
    return r"\%" if unit == "%" else rf"\text{{{unit}}}"


def _figures(value: float, quantity: str, digits: int) -> tuple[str, int]:
    """Return mantissa as text and power of ten, 0 where the number is written out."""
    value = float(value)
    if not math.isfinite(value):
        raise ValueError(f"{value} cannot be printed as {QUANTITIES[quantity].words}")
    if value == 0.0:
        return "0", 0
    short = float(f"{value:.12g}")  # conversion leaves noise in the last places of a given
    size = math.floor(math.log10(abs(float(f"{value:.{digits - 1}e}"))))
    # a speed is read off as it stands, however high
    written_out = 6 if short.is_integer() or quantity == "speed" else 5
    if -3 <= size < written_out:
        exact = f"{short:.12g}" if short.is_integer() else repr(short)
        rounded = f"{value:.{max(digits - 1 - size, 0)}f}"
        return (exact if short.is_integer() or len(exact) < len(rounded) else rounded), 0
    places = digits - 1
    exact = repr(float(f"{short / 10.0**size:.12g}"))
    decimals = max(len(exact.partition(".")[2]), 2)  # 1.90×10⁶, not 1.9×10⁶
    return f"{value / 10.0**size:.{min(places, decimals)}f}", size
