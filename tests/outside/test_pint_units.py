"""The reader's units against pint's own registry.

Source: pint (general-purpose library of units), its default registry. Values computed by
it here. Angle has no dimension there, so that a turn and a radian need care: ``Hz`` is
written as ``turn/s`` for it.

Obtained: computed by a general-purpose library.
"""

import pint
import pytest

from reportgen.units import QUANTITIES, parse_quantity, to_reader

REGISTRY = pint.UnitRegistry()
SI = {"1": "", "m⁴": "m**4"}
AS_PINT = {"r/min": "turn/min", "(r/min)/s": "turn/min/s", "Hz": "turn/s", "°": "degree"}
AS_PINT |= {"%": "percent", "": "", "Mpsi": "megapsi", "°C": "degC", "°F": "degF"}
AS_PINT |= {"lb": "pound", "oz·in": "ounce*inch", "hp": "horsepower", "mil": "thou"}


def in_pint(unit: str) -> str:
    return AS_PINT.get(unit, unit.replace("·", "*"))


@pytest.mark.parametrize("system", ["si", "us"])
@pytest.mark.parametrize("name", sorted(QUANTITIES))
def test_every_printed_unit_has_the_size_that_pint_gives_it(name: str, system: str) -> None:
    quantity = QUANTITIES[name]
    unit = quantity.reader(system)
    for number in (1.0, 1234.5):
        si = REGISTRY.Quantity(number, in_pint(unit.name)).to(in_pint(quantity.si_unit)).magnitude
        assert to_reader(si, name, system) == pytest.approx(number, rel=1e-13)


@pytest.mark.parametrize(
    ("name", "ours", "theirs"),
    [
        ("mass", "t", "metric_ton"),
        ("mass", "oz", "ounce"),
        ("length", "ft", "foot"),
        ("length", "thou", "thou"),
        ("force", "kip", "kip"),
        ("force", "kgf", "kgf"),
        ("torque", "lbf ft", "force_pound*foot"),
        ("pressure", "mbar", "mbar"),
        ("modulus", "ksi", "ksi"),
        ("viscosity", "cP", "centipoise"),
        ("power", "hp", "horsepower"),
        ("energy", "MJ", "MJ"),
        ("speed", "Hz", "turn/s"),
        ("frequency", "cpm", "turn/min"),
        ("angle", "mrad", "mrad"),
        ("density", "g/cm^3", "g/cm**3"),
        ("area_moment", "in^4", "inch**4"),
        ("inertia", "lb in^2", "pound*inch**2"),
        ("damping", "lbf s/in", "force_pound*second/inch"),
        ("stiffness", "kN/mm", "kN/mm"),
        ("time", "h", "hour"),
    ],
)
def test_a_read_unit_has_the_size_that_pint_gives_it(name: str, ours: str, theirs: str) -> None:
    si = REGISTRY.Quantity(7.25, theirs).to(in_pint(QUANTITIES[name].si_unit)).magnitude
    assert parse_quantity(f"7.25 {ours}", name).si == pytest.approx(si, rel=1e-13)
