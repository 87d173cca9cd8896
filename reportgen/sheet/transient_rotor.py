"""What the template of passages shows of the rotor itself and of its steady whirl."""

from __future__ import annotations

from typing import TYPE_CHECKING, cast

from reportgen.sheet import one_mass, transient_stations

if TYPE_CHECKING:
    from reportgen.assess.one_mass import OneMassAssessment
    from reportgen.assess.transient_model import TransientAssessment
    from reportgen.assess.transient_side import OneMassSide
    from reportgen.sheet.blocks import Inline
    from reportgen.sheet.sheet import Sheet


def rotor(sheet: Sheet, calc: TransientAssessment) -> None:
    """Show the rotor from the givens: stiffness, frequency, damping, eccentricity."""
    if calc.model == "stations":
        transient_stations.rotor(sheet, calc)
        return
    side = cast("OneMassSide", calc.facts)
    like = cast("OneMassAssessment", side)  # the same rotor and grade speed, by the same names
    one_mass.stiffness(sheet, like)
    sheet.equation(
        "natural-frequency",
        "Undamped natural frequency",
        r"\omega_n = \sqrt{\frac{<k>}{<m>}}",
        {"k": (side.rotor.stiffness, "stiffness"), "m": (side.rotor.mass, "mass")},
        (float(side.rotor.natural_frequency), "speed"),
    )
    one_mass.damping(sheet, like)
    one_mass.eccentricity(sheet, like)
    if side.rotor.support is not None or side.rotor.bow:
        sheet.paragraph("Flexible supports and bow of the case are in all results.")


def critical_speed(sheet: Sheet, calc: TransientAssessment) -> None:
    """Show the speed that is to be passed, and what steady running there would do."""
    found = calc["critical-speed"]
    if found.value is None:
        sheet.finding("No critical speed", found.note)
        return
    peak = calc["steady-peak"]
    rows: list[list[Inline]] = [
        ["Speed of the largest steady amplitude", {"strong": sheet.show(found.value, "speed")}],
        [
            "Steady amplitude there, 0-peak",
            sheet.show(peak.value, "displacement") if peak.value is not None else peak.note,
        ],
    ]
    rows += [
        [
            f"{name.capitalize()} speed, share of the critical speed",
            f"{sheet.show(speed, 'speed')}, {sheet.show(speed / found.value, 'percent', 3)}",
        ]
        for name, speed in calc.speeds.items()
    ]
    if calc.model == "stations":
        rows += transient_stations.further_criticals(sheet, calc)
    sheet.table(
        "critical-speed",
        "The critical speed to be passed",
        [{"title": "", "width": 0.5}, {"title": "Value", "width": 0.5}],
        rows,
    )


def method(sheet: Sheet, calc: TransientAssessment) -> None:
    """Show the equations that the passages of this case are calculated by."""
    if calc.model == "stations":
        transient_stations.method(sheet, calc)
        return
    sheet.paragraph(
        "The shaft's centre is at z = x + iy from the line of bearings, x horizontal, y upward, "
        "the rotor turning counter-clockwise as seen, by the angle θ. The mass centre lies at e "
        "from the shaft's centre; a bow b turns with the shaft."
    )
    sheet.equation(
        "motion",
        "Motion of the mass while the speed changes (Föppl 1895, Jeffcott 1919)",
        r"m\,\ddot{z} + c\,\dot{z} + k\left(z - b\,\mathrm{e}^{\mathrm{i}\theta}\right)"
        r" = m\,e\left(\dot{\theta}^{2} - \mathrm{i}\,\ddot{\theta}\right)"
        r"\mathrm{e}^{\mathrm{i}\theta}",
    )
    kinds = {run.kind for run in calc.runs}
    if kinds & {"ramp", "table"}:
        sheet.paragraph(
            "Where the speed is prescribed in pieces of constant acceleration, the equation is "
            "solved exactly: the answer to a force whose phase is quadratic in time is an error "
            "function of complex argument, evaluated through the Faddeeva function (NIST Digital "
            "Library of Mathematical Functions, section 7.2). The state is carried over from "
            "piece to piece. No time step is involved."
        )
    if kinds & {"drive", "coast down"}:
        sheet.equation(
            "coupling",
            "Speed under drive and load torque, on rigid supports: the whirl draws torque",
            r"J\,\ddot{\theta} = T_d(\dot{\theta}) - T_l(\dot{\theta})"
            r" + \mathrm{Im}\left\{\left(e\,F + k\,w\,\bar{b}\right)"
            r"\mathrm{e}^{-\mathrm{i}\theta}\right\},\quad F = k\,w + c\,\dot{z},"
            r"\quad w = z - b\,\mathrm{e}^{\mathrm{i}\theta}",
            note="J is the inertia of all that turns, about the mass centre.",
        )
        sheet.paragraph(
            "Both equations are integrated together, in the frame that turns with the shaft, by a "
            "Runge-Kutta method of order 8 with 10⁻⁹ allowed a step. A speed that gains nothing "
            "over two windows, each long against the decay of the whirl, is a stall."
        )
