"""What the one-mass template shows, part by part."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.sheet import one_mass_figures as figures
from reportgen.sheet.blocks import Inline

if TYPE_CHECKING:
    from reportgen.assess.one_mass import OneMassAssessment
    from reportgen.sheet.sheet import Sheet

_SHAFT_FORMULAS = {
    "simply supported": (
        r"k = \frac{3 \cdot <E> \cdot <I> \cdot <l>}{<a>^{2} \cdot <b>^{2}}",
        ("E", "I", "l", "a", "b"),
    ),
    "built in at both ends": (
        r"k = \frac{3 \cdot <E> \cdot <I> \cdot <l>^{3}}{<a>^{3} \cdot <b>^{3}}",
        ("E", "I", "l", "a", "b"),
    ),
    "built in at one end": (r"k = \frac{3 \cdot <E> \cdot <I>}{<a>^{3}}", ("E", "I", "a")),
    "overhung beyond two bearings": (
        r"k = \frac{3 \cdot <E> \cdot <I>}{<a>^{2} \cdot \left(<l> + <a>\right)}",
        ("E", "I", "l", "a"),
    ),
}


def stiffness(sheet: Sheet, calc: OneMassAssessment) -> None:
    """Show the shaft stiffness where it follows from the shaft's dimensions."""
    shaft = sheet.case.rotor.shaft
    if shaft is None:
        return
    outer, inner = float(shaft.outer_diameter), float(shaft.inner_diameter or 0.0)
    area_moment = math.pi / 64 * (outer**4 - inner**4)
    sheet.equation(
        "area-moment",
        "Second moment of area of the shaft",
        r"I = \frac{\pi}{64}\left(<d>^{4} - <d_i>^{4}\right)",
        {"d": (outer, "diameter"), "d_i": (inner, "diameter")},
        (area_moment, "area_moment"),
    )
    formula, names = _SHAFT_FORMULAS[shaft.support]
    span = float(shaft.span) if shaft.span is not None else 0.0
    position = float(shaft.position if shaft.position is not None else shaft.overhang)
    known = {
        "E": (float(shaft.modulus), "modulus"),
        "I": (area_moment, "area_moment"),
        "l": (span, "length"),
        "a": (position, "length"),
        "b": (span - position, "length"),
    }
    sheet.equation(
        "stiffness",
        f"Stiffness of the shaft at the mass, {shaft.support}",
        formula,
        {name: known[name] for name in names},
        (calc.rotor.stiffness, "stiffness"),
    )


def damping(sheet: Sheet, calc: OneMassAssessment) -> None:
    """Show the damping ratio and where it comes from."""
    given, ratio = sheet.case.rotor.damping, (calc.rotor.damping_ratio, "ratio")
    if given.logarithmic_decrement is not None:
        sheet.equation(
            "damping-ratio",
            "Damping ratio from the logarithmic decrement",
            r"\zeta = \frac{<\delta>}{\sqrt{4\,\pi^{2} + <\delta>^{2}}}",
            {r"\delta": (float(given.logarithmic_decrement), "ratio")},
            ratio,
        )
    elif given.amplification_factor is not None:
        sheet.equation(
            "damping-ratio",
            "Damping ratio from the amplification factor",
            r"\zeta = \frac{1}{2 \cdot <Q>}",
            {"Q": (float(given.amplification_factor), "ratio")},
            ratio,
        )
    elif given.coefficient is not None:
        sheet.equation(
            "damping-ratio",
            "Damping ratio from the damping coefficient",
            r"\zeta = \frac{<c>}{2\sqrt{<k> \cdot <m>}}",
            {
                "c": (float(given.coefficient), "damping"),
                "k": (calc.rotor.stiffness, "stiffness"),
                "m": (calc.rotor.mass, "mass"),
            },
            ratio,
        )
    else:
        sheet.paragraph(
            "Damping ratio as stated: ",
            {"math": r"\zeta = " + f"{calc.rotor.damping_ratio:.4g}"},
            ".",
        )


def critical_speed(sheet: Sheet, calc: OneMassAssessment) -> None:
    """Show the speed and the height of the response peak, or say that there is none."""
    found = calc["critical-speed"]
    if found.value is None:
        sheet.finding("No critical speed", found.note)
        return
    zeta = {r"\zeta": (calc.rotor.damping_ratio, "ratio")}
    if calc.plain:
        sheet.equation(
            "critical-speed",
            "Critical speed: the speed of the largest steady amplitude",
            r"\Omega_c = \frac{<\omega_n>}{\sqrt{1 - 2 \cdot <\zeta>^{2}}}",
            {r"\omega_n": (calc.rotor.natural_frequency, "speed"), **zeta},
            found,
        )
        sheet.equation(
            "amplitude-peak",
            "Steady amplitude at the critical speed, 0-peak",
            r"|z|_c = \frac{<e>}{2 \cdot <\zeta>\,\sqrt{1 - <\zeta>^{2}}}",
            {"e": (calc.rotor.eccentricity, "eccentricity"), **zeta},
            calc["amplitude-peak"],
        )
        return
    sheet.table(
        "critical-speed",
        "Critical speed with the supports and the bow of the case",
        ["Result", {"title": "Value", "align": "right"}],
        [
            ["Speed of the largest steady amplitude", sheet.show(found.value, "speed")],
            [
                "Steady amplitude there, 0-peak",
                sheet.show(calc["amplitude-peak"].value, "displacement"),
            ],
        ],
    )


def amplification(sheet: Sheet, calc: OneMassAssessment) -> None:
    """Show the amplification factor from the half-power points, or why there is none."""
    if calc["critical-speed"].value is None:
        return
    found = calc["amplification-factor"]
    if found.value is None:
        sheet.finding("No amplification factor", found.note)
        return
    half = calc.half_power
    assert None not in (half.critical_speed, half.lower, half.upper)  # a factor has all three
    sheet.equation(
        "amplification-factor",
        "Amplification factor: the peak's speed over the width at 0.707 of its height",
        r"\mathit{AF} = \frac{<N_c>}{<N_2> - <N_1>}",
        {
            "N_c": (half.critical_speed or 0.0, "speed"),
            "N_2": (half.upper or 0.0, "speed"),
            "N_1": (half.lower or 0.0, "speed"),
        },
        found,
    )


def supports_and_internal_damping(sheet: Sheet, calc: OneMassAssessment) -> None:
    """Show what flexible supports, internal damping and a bow add, where the case has them."""
    rotor = calc.rotor
    if rotor.support is not None:
        sheet.paragraph(
            "The supports are flexible and the same in both directions: stiffness ",
            sheet.show(rotor.support.stiffness, "stiffness"),
            ", damping ",
            sheet.show(rotor.support.damping, "damping"),
            ", mass ",
            sheet.show(rotor.support.mass, "mass"),
            " (Kirk and Gunter 1972). All results above and below include them.",
        )
    if rotor.bow:
        sheet.paragraph(
            "The shaft has a residual bow of ",
            sheet.show(rotor.bow, "displacement"),
            " at ",
            sheet.show(rotor.bow_angle, "angle"),
            " from the unbalance; the response is the sum of both (Nicholas, Gunter and "
            "Allaire 1976).",
        )
    if "instability-onset" not in calc:
        return
    found = calc["instability-onset"]
    if found.value is None:
        sheet.finding("Onset of instability not assessed", found.note)
        return
    sheet.equation(
        "instability-onset",
        "Speed above which internal damping drives forward whirl",
        r"\Omega_s = <\omega_n>\left(1 + \frac{<c_e>}{<c_i>}\right)",
        {
            r"\omega_n": (rotor.natural_frequency, "speed"),
            "c_e": (rotor.damping, "damping"),
            "c_i": (rotor.internal_damping, "damping"),
        },
        found,
    )


def eccentricity(sheet: Sheet, calc: OneMassAssessment) -> None:
    """Show the mass eccentricity from the unbalance that the case states."""
    given, result = sheet.case.unbalance, (calc.rotor.eccentricity, "eccentricity")
    if given.eccentricity is not None:
        sheet.paragraph(
            "Mass eccentricity as stated: ",
            {"strong": sheet.show(calc.rotor.eccentricity, "eccentricity")},
            ".",
        )
    elif given.amount is not None:
        sheet.equation(
            "eccentricity",
            "Mass eccentricity from the stated unbalance",
            r"e = \frac{<U>}{<m>}",
            {"U": (float(given.amount), "unbalance"), "m": (calc.rotor.mass, "mass")},
            result,
        )
    else:
        sheet.equation(
            "eccentricity",
            "Mass eccentricity from the balance quality grade",
            r"e = \frac{<G>}{<\Omega>}",
            {
                "G": (float(given.grade), "velocity"),
                r"\Omega": (calc.grade_speed, "speed"),
            },
            result,
            note="The grade is the speed of the mass centre around the axis.",
        )


def rated_amplitude(sheet: Sheet, calc: OneMassAssessment) -> None:
    """Show the amplitude at rated speed, as a formula where the closed form applies."""
    rotor = calc.rotor
    if not calc.plain:
        sheet.paragraph(
            "With the supports or the bow of the case the amplitude is the magnitude of the "
            "complex sum; it is listed in ",
            {"ref": "speeds"},
            ".",
        )
        return
    r = calc.speeds["rated"] / rotor.natural_frequency
    sheet.equation(
        "speed-ratio",
        "Ratio of rated speed to natural frequency",
        r"r = \frac{<\Omega>}{<\omega_n>}",
        {
            r"\Omega": (calc.speeds["rated"], "speed"),
            r"\omega_n": (rotor.natural_frequency, "speed"),
        },
        (r, "ratio"),
    )
    sheet.equation(
        "amplitude-rated",
        "Amplitude at rated speed, 0-peak",
        r"|z| = <e>\,\frac{<r>^{2}}{\sqrt{\left(1-<r>^{2}\right)^{2}"
        r" + \left(2 \cdot <\zeta> \cdot <r>\right)^{2}}}",
        {
            "e": (rotor.eccentricity, "eccentricity"),
            "r": (r, "ratio"),
            r"\zeta": (rotor.damping_ratio, "ratio"),
        },
        calc["amplitude-rated"],
    )


def speeds_table(sheet: Sheet, calc: OneMassAssessment) -> None:
    """Show amplitude, phase and ground force at each stated speed."""
    rows: list[list[Inline]] = []
    for name, speed in calc.speeds.items():
        at = calc.at_speed(speed)
        rows.append(
            [
                name,
                sheet.show(speed, "speed"),
                sheet.show(speed / calc.rotor.natural_frequency, "ratio", 3),
                sheet.show(at.amplitude, "displacement"),
                sheet.show(2 * at.amplitude, "displacement"),
                sheet.show(at.lag, "angle", 3),
                sheet.show(at.ground_force, "force"),
            ]
        )
    sheet.table(
        "speeds",
        "Steady whirl at the stated speeds",
        [
            "Speed",
            *(
                {"title": title, "align": "right"}
                for title in (
                    "Value",
                    [{"math": r"\Omega/\omega_n"}],
                    "0-peak",
                    "Peak-to-peak",
                    "Phase lag",
                    "Force to ground, 0-peak",
                )
            ),
        ],
        rows,
    )


def response(sheet: Sheet, calc: OneMassAssessment) -> None:
    """Show amplitude and phase against speed with the ranges and the critical marked."""
    figure, words = figures.response_figure(sheet, calc)
    sheet.figure("response", figure, "Steady unbalance response of the rotor", words)


def forces(sheet: Sheet, calc: OneMassAssessment) -> None:
    """Show the rotating force into the ground, the sag and the static load."""
    rotor, at = calc.rotor, calc.at_speed(calc.speeds["rated"])
    if calc.plain:
        sheet.equation(
            "ground-force",
            "Rotating force through shaft and damper into the ground at rated speed, 0-peak",
            r"F_g = <|z|>\,\sqrt{<k>^{2} + \left(<c> \cdot <\Omega>\right)^{2}}",
            {
                "|z|": (at.amplitude, "displacement"),
                "k": (rotor.stiffness, "stiffness"),
                "c": (rotor.damping, "damping"),
                r"\Omega": (calc.speeds["rated"], "speed"),
            },
            calc["ground-force"],
        )
    else:
        sheet.table(
            "ground-force",
            "Rotating force into the ground at rated speed",
            ["Result", {"title": "Value, 0-peak", "align": "right"}],
            [["Force into the ground", sheet.show(at.ground_force, "force")]],
        )
    if not calc.horizontal:
        sheet.paragraph("The rotor is vertical: there is no sag under its weight.")
        _stress(sheet, calc)
        return
    sheet.equation(
        "sag",
        "Static sag at the mass under its weight",
        r"s = \frac{<m> \cdot g}{<k>}",
        {"m": (rotor.mass, "mass"), "k": (rotor.stiffness, "stiffness")}
        if rotor.support is None
        else None,
        calc["sag"],
        note="with g = 9.80665 m/s²"
        + (
            ""
            if rotor.support is None
            else "; the stiffness is that of shaft and supports in series"
        ),
    )
    _stress(sheet, calc)


def _stress(sheet: Sheet, calc: OneMassAssessment) -> None:
    found = calc.stress
    if found is None:
        sheet.paragraph("The case gives no shaft dimensions: bending stress is not assessed.")
        return
    sheet.equation(
        "section-modulus",
        "Section modulus of the shaft",
        r"W = \frac{\pi\left(<d>^{4} - <d_i>^{4}\right)}{32 \cdot <d>}",
        {"d": (found.outer, "diameter"), "d_i": (found.inner, "diameter")},
        (found.moment / found.stress, "section_modulus"),
    )
    sheet.equation(
        "bending-moment",
        "Largest bending moment at rated speed, weight and whirl added",
        r"M = <l_M>\left(<W_g> + <F_s>\right)",
        {
            "l_M": (found.arm, "length"),
            "W_g": (found.weight, "force"),
            "F_s": (found.whirl, "force"),
        },
        (found.moment, "torque"),
        note="l_M is the largest moment for a force of one at the mass, by the beam of the case; "
        "W_g the weight, none for a vertical rotor; F_s the elastic force of the whirl",
    )
    sheet.equation(
        "bending-stress",
        "Nominal bending stress of the shaft at rated speed, without notch factor",
        r"\sigma = \frac{<M>}{<W>}",
        {
            "M": (found.moment, "torque"),
            "W": (found.moment / found.stress, "section_modulus"),
        },
        calc["bending-stress"],
    )


def series(calc: OneMassAssessment) -> dict[str, Any]:
    """Return the arrays behind the figures, in SI, for ``results.json``."""
    out: dict[str, Any] = {
        "response": {
            "speed": _digits(calc.curve_speed),
            "amplitude": _digits(np.abs(calc.curve)),
            "lag": _digits(calc.curve_lag),
            "units": {"speed": "rad/s", "amplitude": "m", "lag": "rad"},
        }
    }
    for one in calc.passages:
        out[one.id] = {
            "time": _digits(one.time),
            "speed": _digits(one.speed),
            "amplitude": _digits(np.abs(one.displacement)),
            "units": {"time": "s", "speed": "rad/s", "amplitude": "m"},
        }
    return out


def _digits(values: Any) -> list[float]:
    """Keep nine significant digits, so that round-off of another processor seldom shows."""
    return [float(f"{v:.9g}") for v in np.asarray(values, float)]
