"""Quantities at the border: text with a unit in, SI inside, the reader's units out.

Inside the project every number is SI (m, kg, s, N, rad). This module is the only place
that knows other units. Text is read with exact decimal arithmetic, so that ``35 µm``
becomes the float nearest to 35·10⁻⁶. Angle is kept as a dimension of its own while
reading: a speed in Hz takes its factor 2π, and a speed in ``1/s`` is refused, since it
does not say whether turns or radians are meant.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from decimal import Decimal
from functools import cache, lru_cache
from typing import TYPE_CHECKING, Any, Literal

if TYPE_CHECKING:
    import pint

System = Literal["si", "us"]

_INCH = 0.0254  # exact, international yard and pound agreement 1959
_POUND = 0.45359237  # exact, same agreement
_LBF = _POUND * 9.80665  # exact standard gravity, CGPM 1901
_PSI = _LBF / _INCH**2
_RPM = 2 * math.pi / 60
_DEGREE = math.pi / 180
_MAX_TEXT = 80
_PER_SECOND = "1/s may mean turns or radians: write Hz, rpm or rad/s"


class UnitError(ValueError):
    """A text is not the quantity that is asked for; says what was found and what would do."""

    def __init__(self, found: str, remedy: str) -> None:
        super().__init__(f"{found}; {remedy}")
        self.found = found
        self.remedy = remedy


@dataclass(frozen=True)
class Parsed:
    """A quantity read from text.

    Parameters
    ----------
    si
        Value in the SI unit.
    unit
        The SI unit, as printed.
    given_unit
        The unit as it stood in the text.
    """

    si: float
    unit: str
    given_unit: str


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

_PINT_SI = {
    "rad/s²": "rad/s**2",
    "m/s²": "m/s**2",
    "kg/m³": "kg/m**3",
    "kg·m²": "kg*m**2",
    "m⁴": "m**4",
    "1": "",
}

# Units are listed whole, without prefixes to combine, so that a slip such as "Mm" is refused.
_DEFINITIONS = """
metre = [length] = m = _ = meter
kilogram = [mass] = kg
second = [time] = s
radian = [angle] = rad
kelvin = [temperature]; offset: 0 = K
millimetre = 1e-3 metre = mm
centimetre = 1e-2 metre = cm
micrometre = 1e-6 metre = µm = um = micron = micrometer
nanometre = 1e-9 metre = nm
kilometre = 1e3 metre = km
inch = 0.0254 metre = in
foot = 12 inch = ft
mil = 1e-3 inch = _ = thou
gram = 1e-3 kilogram = g
milligram = 1e-6 kilogram = mg
tonne = 1e3 kilogram = t
pound = 0.45359237 kilogram = lb = _ = lbm
ounce = 0.0625 pound = oz
millisecond = 1e-3 second = ms
microsecond = 1e-6 second = µs = us
minute = 60 second = min
hour = 60 minute = h
newton = kilogram * metre / second ** 2 = N
millinewton = 1e-3 newton = mN
kilonewton = 1e3 newton = kN
meganewton = 1e6 newton = MN
pound_force = 9.80665 metre / second ** 2 * pound = lbf
kip = 1e3 pound_force = _ = klbf
kilogram_force = 9.80665 newton = kgf
pascal = newton / metre ** 2 = Pa
millipascal = 1e-3 pascal = mPa
kilopascal = 1e3 pascal = kPa
megapascal = 1e6 pascal = MPa
gigapascal = 1e9 pascal = GPa
bar = 1e5 pascal
millibar = 1e2 pascal = mbar
psi = pound_force / inch ** 2
ksi = 1e3 psi
Mpsi = 1e6 psi
joule = newton * metre = J
kilojoule = 1e3 joule = kJ
megajoule = 1e6 joule = MJ
watt = joule / second = W
kilowatt = 1e3 watt = kW
megawatt = 1e6 watt = MW
horsepower = 550 foot * pound_force / second = hp
poise = 0.1 pascal * second = P
centipoise = 0.01 poise = cP
degree = 0.01745329251994329576923690768488613 radian = deg
milliradian = 1e-3 radian = mrad
revolution = 6.283185307179586476925286766559 radian = rev = _ = turn = cycle
hertz = revolution / second = Hz
kilohertz = 1e3 hertz = kHz
rpm = revolution / minute
cpm = revolution / minute
percent = 0.01
degree_Celsius = kelvin; offset: 273.15 = degC
degree_Fahrenheit = 5 / 9 * kelvin; offset: 255.3722222222222222222222222 = degF
"""

_SPELLINGS = (
    (re.compile(r"[μµ]"), "µ"),
    (re.compile(r"°\s*C\b"), "degC"),
    (re.compile(r"°\s*F\b"), "degF"),
    (re.compile(r"°"), "deg"),
    (re.compile(r"%"), "percent"),
    (re.compile(r"\b(RPM|r\s*/\s*min|rev\s*/\s*min)\b"), "rpm"),
    (re.compile(r"\br\s*/\s*s\b"), "rev/s"),
    (re.compile(r"\b(N|kN|MN|lbf|g|kg|Pa|mPa)(mm|m|s)(?![A-Za-z])"), r"\1*\2"),  # Nm, Ns, gmm
    (re.compile(r"\bin\."), "in"),
    (re.compile(r"²"), "^2"),
    (re.compile(r"³"), "^3"),
    (re.compile(r"⁴"), "^4"),
    (re.compile(r"\*\*"), "^"),
    (re.compile(r"(?<=[A-Za-z])(?=[2-4](?![0-9]))"), "^"),
    (re.compile(r"[·⋅∙×]"), "*"),
    (re.compile(r"(?<=[A-Za-z])-(?=[A-Za-z])"), "*"),
    (re.compile(r"\s*([*/])\s*"), r"\1"),
    (re.compile(r"\s+"), "*"),
)
# A unit is names with small whole powers, joined by * and /, at most one pair of brackets
# deep: nothing else reaches the unit library, so no text can make it evaluate for long.
_TERM = r"[A-Za-zµ_]+(?:\^-?[1-4])?"
_CHAIN = rf"{_TERM}(?:[*/]{_TERM})*"
_UNIT = re.compile(rf"(?:{_CHAIN}|\({_CHAIN}\))(?:[*/](?:{_CHAIN}|\({_CHAIN}\)))*")
_NUMBER = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]{1,4})?")
_COMMA = re.compile(r"[0-9],[0-9]")
_POWER = re.compile(r"\s*[x×*·]\s*10\s*(\^|\*\*|[⁰¹²³⁴-⁹⁻])")
_NOT_FINITE = re.compile(r"[+-]?\.?(nan|inf(inity)?)\b", re.IGNORECASE)
_GRADE = re.compile(r"[gG]\s?([0-9]+(?:\.[0-9]+)?)")


def parse_quantity(text: str, quantity: str) -> Parsed:
    """Read a number with its unit.

    Parameters
    ----------
    text
        Such as ``62 kg``, ``3.1 mil``, ``1450 rpm``, ``1.9e6 N/m``, ``G6.3``, ``20 %``.
    quantity
        Key of :data:`QUANTITIES`.

    Returns
    -------
    Parsed
        Value in SI with the unit as it was given.

    Raises
    ------
    UnitError
        If the number cannot be read or is not finite, or the unit is missing, unknown or
        of another kind.
    """
    kind = QUANTITIES[quantity]
    if len(text) > _MAX_TEXT:
        raise UnitError(f"found a text of {len(text)} characters", _remedy(kind))
    cleaned = re.sub(r"[\s\u00a0\u2007\u2009\u202f]+", " ", text.replace("\u2212", "-")).strip()
    if quantity == "grade" and (grade := _GRADE.fullmatch(cleaned)):
        return Parsed(float(Decimal(grade[1]) / 1000), kind.si_unit, "mm/s")
    number, unit = _split(cleaned, text, kind)
    if not unit:
        if quantity == "ratio":
            return Parsed(_finite(Decimal(number), text), kind.si_unit, "")
        raise UnitError(f"{text!r} has no unit", _remedy(kind, number))
    size, zero = _unit(unit, quantity)
    return Parsed(_finite(Decimal(number) * size + zero, text), kind.si_unit, unit)


def _split(cleaned: str, text: str, kind: Quantity) -> tuple[str, str]:
    """Return number and unit as texts."""
    if not cleaned:
        raise UnitError("found an empty text", _remedy(kind))
    if _NOT_FINITE.match(cleaned):
        raise UnitError(f"{text!r} is not a finite number", _remedy(kind))
    if _COMMA.search(cleaned):
        raise UnitError(
            f"the comma in {text!r} is ambiguous",
            "write nothing between thousands and a point before decimals, such as 1450 or 1.45",
        )
    number = _NUMBER.match(cleaned)
    if number is None:
        raise UnitError(f"{text!r} does not start with a number", _remedy(kind))
    rest = cleaned[number.end() :]
    if _POWER.match(rest):
        raise UnitError(f"{text!r} cannot be read", "write powers of ten as in 1.9e6")
    if re.match(r"\s*(±|\+/-|\+-)", rest):
        raise UnitError(f"{text!r} holds a tolerance", "give it as a field of its own, tolerance:")
    if re.match(r"\s*1?\s*/\s*s\b", rest):
        raise UnitError(f"{text!r} does not say what is counted", _PER_SECOND)
    if re.match(r"\s*([0-9]+\s*)?/\s*[0-9]", rest):
        raise UnitError(f"{text!r} holds a fraction", "write it as a decimal number")
    if re.match(r"\s*[0-9.+-]", rest):
        raise UnitError(f"{text!r} holds more than one number", _remedy(kind))
    return number[0], rest.strip()


def _finite(value: Decimal, text: str) -> float:
    result = float(value)
    if not math.isfinite(result) or (result == 0.0 and value != 0):
        raise UnitError(f"{text!r} is outside the range of numbers", "check the power of ten")
    return result


def _remedy(kind: Quantity, number: str = "") -> str:
    if kind.si_unit == "1" and not kind.si.name:
        return f"write {kind.words}, such as {kind.examples[0]}"
    if number and len(number) < 12 and kind.words != QUANTITIES["grade"].words:
        return f"write it with its unit, such as {number} {kind.examples[0]}"
    return f"write {kind.words} with its unit, one of {', '.join(kind.examples)}"


@cache
def _registry() -> pint.UnitRegistry[Any]:
    """Return the units that are read; angle is a dimension here, unlike in SI."""
    import pint

    registry: pint.UnitRegistry[Any] = pint.UnitRegistry(
        _DEFINITIONS.strip().splitlines(), non_int_type=Decimal, cache_folder=None
    )
    return registry


@lru_cache(maxsize=1024)
def _unit(unit: str, quantity: str) -> tuple[Decimal, Decimal]:
    """Return the unit's size in SI and the SI value of its zero."""
    import pint

    kind = QUANTITIES[quantity]
    spelled = unit
    for pattern, replacement in _SPELLINGS:
        spelled = pattern.sub(replacement, spelled)
    if not _UNIT.fullmatch(spelled):
        raise UnitError(f"{unit!r} is not a unit", _remedy(kind))
    registry = _registry()
    wanted = registry.parse_units(_PINT_SI.get(kind.si_unit, kind.si_unit.replace("·", "*")))
    try:
        found = registry.parse_units(spelled.replace("^", "**"))
        if quantity == "temperature":
            zero = registry.Quantity(Decimal(0), found).to(wanted).magnitude
            return registry.Quantity(Decimal(1), found).to(wanted).magnitude - zero, zero
        size = registry.Quantity(Decimal(1), found).to(wanted).magnitude
    except pint.UndefinedUnitError:
        raise UnitError(f"{unit!r} is not a unit known here", _remedy(kind)) from None
    except (pint.DimensionalityError, pint.OffsetUnitCalculusError):
        raise UnitError(
            f"the unit {unit!r} is not that of {kind.words}", _hint(unit, quantity)
        ) from None
    return size, Decimal(0)


def _hint(unit: str, quantity: str) -> str:
    """Return what would do, knowing the usual slips."""
    kind = QUANTITIES[quantity]
    if kind.si_unit.startswith("rad/s") and re.fullmatch(r"s\s*(\^|\*\*)?\s*-[12]", unit):
        return _PER_SECOND
    if re.search(r"\b(lb|lbm)\b", unit):
        forced = re.sub(r"\b(lb|lbm)\b", "lbf", unit)
        try:
            _unit(forced, quantity)
        except UnitError:
            pass
        else:
            return f"lb is a mass: write {forced} for a force in pounds"
    return _remedy(kind)


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
