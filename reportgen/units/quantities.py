"""The kinds of quantity, and the units that a page is printed in."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

System = Literal["si", "us"]

_INCH = 0.0254  # exact, international yard and pound agreement 1959
_POUND = 0.45359237  # exact, same agreement
_LBF = _POUND * 9.80665  # exact standard gravity, CGPM 1901
_PSI = _LBF / _INCH**2
_RPM = 2 * math.pi / 60
_DEGREE = math.pi / 180


@dataclass(frozen=True)
class ReaderUnit:
    """A unit of the printed page: its name, its size in SI, the SI value of its zero."""

    name: str
    size: float
    zero: float = 0.0


@dataclass(frozen=True)
class Quantity:
    """One kind of quantity.

    Parameters
    ----------
    words
        What it is called in messages.
    si_unit
        SI unit as printed; ``1`` for a pure number.
    si, us
        Units of the printed page in the two systems.
    examples
        Units that an error message offers.
    """

    words: str
    si_unit: str
    si: ReaderUnit
    us: ReaderUnit
    examples: tuple[str, ...]

    def reader(self, system: System) -> ReaderUnit:
        """Return the unit of the printed page."""
        return self.si if system == "si" else self.us


_M, _MM, _UM = ReaderUnit("m", 1.0), ReaderUnit("mm", 1e-3), ReaderUnit("µm", 1e-6)
_IN, _MIL = ReaderUnit("in", _INCH), ReaderUnit("mil", 1e-3 * _INCH)
_LENGTHS = ("mm", "m", "µm", "in", "mil")


def _same(words: str, si_unit: str, reader: ReaderUnit, *examples: str) -> Quantity:
    return Quantity(words, si_unit, reader, reader, examples or (reader.name,))


def _quantity(words: str, si: tuple[str, float], us: tuple[str, float], *examples: str) -> Quantity:
    """Return a quantity whose SI unit is printed as it is."""
    return Quantity(words, si[0], ReaderUnit(*si), ReaderUnit(*us), examples)


QUANTITIES: dict[str, Quantity] = {
    "mass": _quantity("a mass", ("kg", 1.0), ("lb", _POUND), "kg", "g", "t", "lb", "oz"),
    "length": Quantity("a length", "m", _MM, _IN, _LENGTHS),
    "diameter": Quantity("a diameter", "m", _MM, _IN, _LENGTHS),
    "position": Quantity("a position", "m", _MM, _IN, _LENGTHS),
    "displacement": Quantity("a displacement", "m", _UM, _MIL, ("µm", "mm", "mil")),
    "clearance": Quantity("a clearance", "m", _MM, _MIL, ("mm", "µm", "mil")),
    "eccentricity": Quantity("an eccentricity", "m", _UM, _MIL, ("µm", "mm", "mil")),
    "stiffness": _quantity(
        "a stiffness", ("N/m", 1.0), ("lbf/in", _LBF / _INCH), "N/m", "N/mm", "lbf/in"
    ),
    "damping": _quantity(
        "a damping coefficient",
        ("N·s/m", 1.0),
        ("lbf·s/in", _LBF / _INCH),
        "N s/m",
        "N s/mm",
        "lbf s/in",
    ),
    "rotational_stiffness": _quantity(
        "a rotational stiffness",
        ("N·m/rad", 1.0),
        ("lbf·in/rad", _LBF * _INCH),
        "N m/rad",
        "lbf in/rad",
    ),
    "rotational_damping": _quantity(
        "a rotational damping coefficient",
        ("N·m·s/rad", 1.0),
        ("lbf·in·s/rad", _LBF * _INCH),
        "N m s/rad",
        "lbf in s/rad",
    ),
    "speed": _same("a speed of rotation", "rad/s", ReaderUnit("r/min", _RPM), "rpm", "rad/s", "Hz"),
    "frequency": _same(
        "a frequency", "rad/s", ReaderUnit("Hz", 2 * math.pi), "Hz", "rpm", "cpm", "rad/s"
    ),
    "acceleration_speed": _same(
        "an angular acceleration",
        "rad/s²",
        ReaderUnit("(r/min)/s", _RPM),
        "rpm/s",
        "rad/s^2",
        "Hz/s",
    ),
    "acceleration": _quantity(
        "an acceleration", ("m/s²", 1.0), ("in/s²", _INCH), "m/s^2", "in/s^2"
    ),
    "angle": _same("an angle", "rad", ReaderUnit("°", _DEGREE), "deg", "rad"),
    "unbalance": Quantity(
        "an unbalance",
        "kg·m",
        ReaderUnit("g·mm", 1e-6),
        ReaderUnit("oz·in", _POUND / 16 * _INCH),
        ("g mm", "kg m", "oz in"),
    ),
    "force": _quantity("a force", ("N", 1.0), ("lbf", _LBF), "N", "kN", "lbf"),
    "torque": _quantity(
        "a torque", ("N·m", 1.0), ("lbf·in", _LBF * _INCH), "N m", "kN m", "lbf in", "lbf ft"
    ),
    "stress": Quantity(
        "a stress", "Pa", ReaderUnit("MPa", 1e6), ReaderUnit("ksi", 1e3 * _PSI), ("MPa", "ksi")
    ),
    "modulus": Quantity(
        "a modulus of elasticity",
        "Pa",
        ReaderUnit("GPa", 1e9),
        ReaderUnit("Mpsi", 1e6 * _PSI),
        ("GPa", "MPa", "Mpsi", "ksi"),
    ),
    "pressure": Quantity(
        "a pressure", "Pa", ReaderUnit("bar", 1e5), ReaderUnit("psi", _PSI), ("bar", "kPa", "psi")
    ),
    "density": _quantity(
        "a density", ("kg/m³", 1.0), ("lb/in³", _POUND / _INCH**3), "kg/m^3", "g/cm^3", "lb/in^3"
    ),
    "inertia": _quantity(
        "a moment of inertia", ("kg·m²", 1.0), ("lb·in²", _POUND * _INCH**2), "kg m^2", "lb in^2"
    ),
    "area_moment": Quantity(
        "a second moment of area",
        "m⁴",
        ReaderUnit("mm⁴", 1e-12),
        ReaderUnit("in⁴", _INCH**4),
        ("mm^4", "cm^4", "in^4"),
    ),
    "section_modulus": Quantity(
        "a section modulus",
        "m³",
        ReaderUnit("mm³", 1e-9),
        ReaderUnit("in³", _INCH**3),
        ("mm^3", "cm^3", "in^3"),
    ),
    "velocity": Quantity(
        "a velocity", "m/s", ReaderUnit("mm/s", 1e-3), ReaderUnit("in/s", _INCH), ("mm/s", "in/s")
    ),
    "time": _same("a time", "s", ReaderUnit("s", 1.0), "s", "ms", "min"),
    "ratio": _same("a pure number", "1", ReaderUnit("", 1.0), "0.03", "3 %"),
    "percent": _same("a percentage", "1", ReaderUnit("%", 0.01), "%"),
    "power": Quantity(
        "a power",
        "W",
        ReaderUnit("kW", 1e3),
        ReaderUnit("hp", 550 * 12 * _INCH * _LBF),
        ("kW", "W", "hp"),
    ),
    "energy": _quantity("an energy", ("J", 1.0), ("lbf·in", _LBF * _INCH), "J", "kJ", "lbf in"),
    "viscosity": _same("a dynamic viscosity", "Pa·s", ReaderUnit("mPa·s", 1e-3), "Pa s", "cP"),
    "temperature": Quantity(
        "a temperature",
        "K",
        ReaderUnit("°C", 1.0, 273.15),
        ReaderUnit("°F", 5 / 9, 273.15 - 160 / 9),
        ("°C", "°F", "K"),
    ),
    "grade": _same("a balance quality grade", "m/s", ReaderUnit("mm/s", 1e-3), "G6.3", "6.3 mm/s"),
}
"""Every kind of quantity that a case may give and a report may print."""
