"""Quantities: reading text, the traps of units, printing by rule."""

import math
import re
import subprocess
import sys

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.units import (
    QUANTITIES,
    UnitError,
    latex_unit,
    parse_quantity,
    show,
    show_latex,
    to_reader,
    to_si,
    unit_of,
)

RPM = 2 * math.pi / 60


@pytest.mark.parametrize(
    ("text", "quantity", "si"),
    [
        ("62 kg", "mass", 62.0),
        ("35 µm", "displacement", 35e-6),
        ("35 μm", "displacement", 35e-6),  # Greek mu beside the micro sign
        ("35 um", "displacement", 35e-6),
        ("3.1 mil", "displacement", 3.1 * 25.4e-6),
        ("1450 rpm", "speed", 1450 * RPM),
        ("1450 RPM", "speed", 1450 * RPM),
        ("1450 r/min", "speed", 1450 * RPM),
        ("1450 rev/min", "speed", 1450 * RPM),
        ("25 Hz", "speed", 25 * 2 * math.pi),
        ("25 Hz", "frequency", 25 * 2 * math.pi),
        ("157 rad/s", "speed", 157.0),
        ("−12 rpm/s", "acceleration_speed", -12 * RPM),
        ("-12 (r/min)/s", "acceleration_speed", -12 * RPM),
        ("12 N s/m", "damping", 12.0),
        ("12 N·s/m", "damping", 12.0),
        ("12 Ns/m", "damping", 12.0),
        ("900 g mm", "unbalance", 900e-6),
        ("900 gmm", "unbalance", 900e-6),
        ("1 oz-in", "unbalance", 0.028349523125 * 0.0254),
        ("2 kg m^2", "inertia", 2.0),
        ("2 kg·m²", "inertia", 2.0),
        ("2 kgm2", "inertia", 2.0),
        ("G6.3", "grade", 6.3e-3),
        ("G 6.3", "grade", 6.3e-3),
        ("6.3 mm/s", "grade", 6.3e-3),
        ("20 %", "percent", 0.2),
        ("0.03", "ratio", 0.03),
        ("3 %", "ratio", 0.03),
        ("45 deg", "angle", math.pi / 4),
        ("45°", "angle", math.pi / 4),
        ("212 °F", "temperature", 373.15),
        ("-40 °C", "temperature", 233.15),
    ],
)
def test_text_becomes_the_nearest_float_in_si(text: str, quantity: str, si: float) -> None:
    parsed = parse_quantity(text, quantity)
    assert parsed.si == pytest.approx(si, rel=4e-16, abs=0)
    assert parsed.unit == QUANTITIES[quantity].si_unit


@pytest.mark.parametrize(
    ("text", "quantity", "words"),
    [
        ("62", "mass", "no unit.*62 kg"),
        ("20", "percent", "no unit.*20 %"),
        ("62 furlong", "mass", "'furlong' is not a unit known"),
        ("62 Mm", "length", "not a unit known"),
        ("62 mm", "mass", "not that of a mass.*kg"),
        ("5000 lb/in", "stiffness", "lb is a mass: write lbf/in"),
        ("3 in-lb", "torque", "write in-lbf"),
        ("157 1/s", "speed", "turns or radians.*Hz, rpm or rad/s"),
        ("157 s^-1", "speed", "turns or radians"),
        ("3 1/s", "frequency", "turns or radians"),
        ("1,450 rpm", "speed", "comma.*ambiguous"),
        ("nan kg", "mass", "not a finite number"),
        (".inf kg", "mass", "not a finite number"),
        ("-Infinity kg", "mass", "not a finite number"),
        ("1e999 kg", "mass", "outside the range"),
        ("1e-999 kg", "mass", "outside the range"),
        ("1.9×10^6 N/m", "stiffness", "1.9e6"),
        ("3/8 in", "length", "fraction"),
        ("1 1/2 in", "length", "fraction"),
        ("62 ± 1 kg", "mass", "tolerance:"),
        ("10**10**10 m", "length", "not a unit"),
        ("1 m**9**9**9", "length", "not a unit"),
        ("1 m^99", "length", "not a unit"),
        ("__import__('os') m", "length", "does not start with a number"),
        ("1 __import__('os')", "length", "not a unit"),
        ("5 N m", "rotational_stiffness", "N m/rad"),
        ("5 rad", "ratio", "not that of a pure number"),
        ("", "mass", "empty"),
        ("kg", "mass", "does not start with a number"),
        ("G6.3", "speed", "does not start with a number"),
    ],
)
def test_a_slip_is_refused_with_what_would_do(text: str, quantity: str, words: str) -> None:
    with pytest.raises(UnitError) as caught:
        parse_quantity(text, quantity)
    assert re.search(words, str(caught.value))
    assert caught.value.found
    assert caught.value.remedy


@settings(deadline=None, max_examples=200)
@given(
    st.text(max_size=100)
    | st.from_regex(r"[0-9.eE+-]{1,8} ?[a-zA-Zµ°%()*/^ 0-9·-]{0,40}", fullmatch=True),
    st.sampled_from(sorted(QUANTITIES)),
)
def test_any_text_gives_a_finite_value_or_a_unit_error(text: str, quantity: str) -> None:
    try:
        parsed = parse_quantity(text, quantity)
    except UnitError:
        return
    assert math.isfinite(parsed.si)


def test_a_huge_text_is_refused_without_being_read() -> None:
    with pytest.raises(UnitError, match="1000000 characters"):
        parse_quantity("9" * 1_000_000, "mass")


@pytest.mark.parametrize("quantity", sorted(QUANTITIES))
@pytest.mark.parametrize("system", ["si", "us"])
def test_a_printed_value_reads_back_as_itself(quantity: str, system: str) -> None:
    value = 12.5 * QUANTITIES[quantity].reader(system).size
    value += QUANTITIES[quantity].reader(system).zero
    printed = show(value, quantity, system)
    assert "12.5" in printed
    assert parse_quantity(printed, quantity).si == pytest.approx(value, rel=1e-12)


@pytest.mark.parametrize("quantity", sorted(QUANTITIES))
def test_every_unit_that_an_error_offers_is_read(quantity: str) -> None:
    for example in QUANTITIES[quantity].examples:
        text = example if example[0].isdigit() or example == "G6.3" else f"1 {example}"
        assert parse_quantity(text, quantity).si > 0


@pytest.mark.parametrize(
    ("value", "quantity", "system", "printed"),
    [
        (1480 * RPM, "speed", "si", "1480 r/min"),
        (12345.678 * RPM, "speed", "si", "12346 r/min"),
        (119987.6 * RPM, "speed", "si", "119988 r/min"),
        (1.9e6, "stiffness", "si", "1.90×10⁶ N/m"),
        (250123.4, "stiffness", "si", "2.501×10⁵ N/m"),
        (1.2344e-4, "stiffness", "si", "1.234×10⁻⁴ N/m"),
        (123.456, "force", "si", "123.5 N"),
        (-123.456, "force", "si", "−123.5 N"),
        (0.40003e-3, "clearance", "si", "0.4000 mm"),
        (0.4e-3, "clearance", "si", "0.4 mm"),
        (0.4e-3, "clearance", "us", "15.75 mil"),
        (999.96, "force", "si", "1000 N"),
        (0.2, "percent", "si", "20 %"),
        (0.03, "ratio", "us", "0.03"),
        (6.3e-3, "grade", "us", "G 6.3"),
        (math.pi / 4, "angle", "si", "45°"),
        (0.0, "force", "si", "0 N"),
        (-0.0, "force", "si", "0 N"),
        (373.15, "temperature", "us", "212 °F"),
    ],
)
def test_printing_by_rule(value: float, quantity: str, system: str, printed: str) -> None:
    assert show(value, quantity, system) == printed


@settings(deadline=None, max_examples=300)
@given(
    st.floats(min_value=1e-30, max_value=1e30) | st.floats(min_value=-1e30, max_value=-1e-30),
    st.integers(min_value=2, max_value=8),
)
def test_the_printed_number_is_the_value_to_its_figures(value: float, digits: int) -> None:
    text = show(value, "ratio", "si", digits).replace("−", "-")
    mantissa, _, power = text.partition("×10")
    exponent = power.translate(str.maketrans("⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "-0123456789"))
    read = float(f"{mantissa}e{exponent or 0}")
    assert read == pytest.approx(value, rel=0.5001 * 10.0 ** (1 - digits))
    assert len(mantissa.replace(".", "").lstrip("-0")) <= max(digits, 6)


def test_latex_holds_the_unit_as_one_text() -> None:
    assert show_latex(1.9e6, "stiffness", "si") == r"1.90\times 10^{6}\ \text{N/m}"
    assert show_latex(math.pi / 4, "angle", "si") == r"45^{\circ}"
    assert show_latex(0.2, "percent", "si") == r"20\ \%"
    assert show_latex(6.3e-3, "grade", "si") == r"\mathrm{G}\ 6.3"
    assert latex_unit("kg·m²") == r"\text{kg·m²}"


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_what_is_not_finite_is_never_printed(value: float) -> None:
    with pytest.raises(ValueError, match="cannot be printed"):
        show(value, "mass", "si")


def test_arrays_go_both_ways() -> None:
    values = np.array([[0.0, 1e-3], [2.5e-2, -1.0]])
    for system in ("si", "us"):
        for quantity in QUANTITIES:
            back = to_si(to_reader(values, quantity, system), quantity, system)
            np.testing.assert_allclose(back, values, rtol=1e-14, atol=1e-13)
    assert unit_of("displacement", "us") == "mil"


def test_reading_needs_neither_the_unit_library_before_use_nor_numpy() -> None:
    code = "import sys, reportgen.units; print(sorted({'numpy','pint'} & set(sys.modules)))"
    out = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert out.stdout.strip() == "[]"
