"""Quantities at the border: text with a unit in, SI inside, the reader's units out.

Inside the project every number is SI (m, kg, s, N, rad). This package is the only place
that knows other units.
"""

from reportgen.units.printing import latex_unit, show, show_latex, to_reader, to_si, unit_of
from reportgen.units.quantities import QUANTITIES, Quantity, ReaderUnit, System
from reportgen.units.reading import Parsed, UnitError, parse_quantity

__all__ = [
    "QUANTITIES",
    "Parsed",
    "Quantity",
    "ReaderUnit",
    "System",
    "UnitError",
    "latex_unit",
    "parse_quantity",
    "show",
    "show_latex",
    "to_reader",
    "to_si",
    "unit_of",
]
