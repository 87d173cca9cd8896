"""Text with a unit in, SI out.

Text is read with exact decimal arithmetic, so that ``35 µm`` becomes the float nearest to
35·10⁻⁶. Angle is kept as a dimension of its own while reading: a speed in Hz takes its
factor 2π, and a speed in ``1/s`` is refused, since it does not say whether turns or radians
are meant.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from decimal import Decimal
from functools import cache, lru_cache
from typing import TYPE_CHECKING, Any

from reportgen.units.quantities import QUANTITIES, Quantity

if TYPE_CHECKING:
    import pint

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
