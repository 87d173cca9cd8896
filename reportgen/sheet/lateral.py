"""What the lateral review shows of the rotor, its supports and its whirl."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.sheet import lateral_figures as figures
from reportgen.sheet.lateral_rotor_figure import rotor_figure

if TYPE_CHECKING:
    from reportgen.assess.lateral_model import LateralAssessment
    from reportgen.sheet.blocks import Inline
    from reportgen.sheet.sheet import Sheet

_RIGHT = "right"


def _right(*titles: str) -> list[Any]:
    return [{"title": title, "align": _RIGHT} for title in titles]


def rotor(sheet: Sheet, calc: LateralAssessment) -> None:
    """Show the rotor as drawn and its mass against the drawing's."""
    figure, words = rotor_figure(sheet, calc)
    sheet.figure("rotor", figure, "The rotor to scale", words)
    mass, stated = calc.mass, sheet.case.rotor.stated_mass
    rows: list[list[Inline]] = [
        ["Mass of the rotor", {"strong": sheet.show(mass.mass, "mass")}],
        ["of it the shaft", sheet.show(mass.shaft_mass, "mass")],
        ["Centre of mass from the left end", sheet.show(mass.centre, "length")],
        ["Polar moment of inertia", sheet.show(mass.polar_inertia, "inertia")],
        ["Diametral moment, about the centre", sheet.show(mass.diametral_inertia, "inertia")],
    ]
    if stated is not None:
        gap = mass.mass / float(stated) - 1.0
        rows += [
            ["Mass stated in the drawing", sheet.show(float(stated), "mass")],
            ["Difference", sheet.show(gap, "percent", 3)],
        ]
    else:
        rows.append(["Mass stated in the drawing", "none stated; the mass is not held against it"])
    sheet.table(
        "mass",
        "Mass and inertia",
        [{"title": "", "width": 0.5}, {"title": "Value", "width": 0.5}],
        rows,
    )
    for point in calc.open_points:
        sheet.finding("Mass differs from the drawing", point)


def static(sheet: Sheet, calc: LateralAssessment) -> None:
    """Show deflection and bearing loads under gravity."""
    if calc.static is None:
        sheet.paragraph("The rotor stands upright: gravity loads no bearing and no sag is counted.")
        return
    rows: list[list[Inline]] = [
        [one.name, sheet.show(one.static, "force")] for one in calc.supports if one.static
    ]
    deflection = np.abs(calc.static.deflection)
    at = int(np.argmax(deflection))
    rows.append(
        [
            "Largest deflection, bearings rigid",
            f"{sheet.show(float(deflection[at]), 'displacement')} at "
            f"{sheet.show(float(calc.whirl.model.positions[at]), 'length')}",
        ]
    )
    sheet.table(
        "static",
        "Static loads of the bearings, and deflection by weight",
        [{"title": "", "width": 0.5}, {"title": "Value", "width": 0.5}],
        rows,
    )


def undamped(sheet: Sheet, calc: LateralAssessment) -> None:
    """Show the critical speed map and the undamped modes."""
    figure, words = figures.map_figure(sheet, calc)
    sheet.figure("speed-map", figure, "Critical speed map", words)
    figure, words = figures.modes_figure(sheet, calc)
    sheet.figure("modes", figure, "Undamped mode shapes", words)


def responses(sheet: Sheet, calc: LateralAssessment) -> None:
    """Show the unbalance cases and the response to each."""
    rows: list[list[Inline]] = []
    for one, loads in zip(sheet.case.unbalance_cases, calc.whirl.loads, strict=True):
        planes = "; ".join(
            f"{sheet.show(load.amount, 'unbalance')} at station {load.station + 1}"
            + (f", {np.degrees(load.angle):.4g}°" if load.angle else "")
            for load in loads
        )
        rule = "amounts as stated"
        if one.rule is not None:
            times = "" if one.factor is None else f", times {float(one.factor):.4g}"
            grade = "" if one.grade is None else f" G{float(one.grade) * 1e3:.3g}"
            rule = f"{one.rule}{grade}{times}"
        rows.append([one.name, rule, planes])
    sheet.table(
        "unbalance",
        "Unbalance cases",
        [
            {"title": "Case", "width": 0.2},
            {"title": "Rule", "width": 0.3},
            {"title": "Planes", "width": 0.5},
        ],
        rows,
    )
    for number, one in enumerate(sheet.case.unbalance_cases):
        figure, words = figures.response_figure(sheet, calc, number)
        sheet.figure(f"response-{number + 1}", figure, f"Response to “{one.name}”", words)


def criticals(sheet: Sheet, calc: LateralAssessment) -> None:
    """Show every critical speed with its amplification and the damped mode that it belongs to."""
    if not calc.criticals:
        low, high = calc.whirl.row[0], calc.whirl.row[-1]
        sheet.finding(
            "No critical speed",
            f"The response has no peak from {sheet.show(float(low), 'speed')} to "
            f"{sheet.show(float(high), 'speed')}.",
        )
    rows: list[list[Inline]] = []
    for one in calc.criticals:
        peak, crossing = one.found.peak, one.crossing
        rows.append(
            [
                one.id.removeprefix("critical-"),
                {"strong": sheet.show(peak.speed, "speed")},
                "–" if peak.amplification is None else f"{peak.amplification:.3g}",
                sheet.show(peak.amplitude, "displacement"),
                f"{calc.whirl.places[one.found.place].name}, "
                f"{sheet.case.unbalance_cases[one.found.case].name}",
                "none near"
                if crossing is None
                else f"{sheet.show(crossing.speed, 'speed')}, {crossing.sense}, "
                f"δ {crossing.decrement:.3g}",
            ]
        )
    sheet.table(
        "criticals",
        "Critical speeds: peaks of the response",
        [
            {"title": "No.", "width": 0.06},
            {"title": "Speed", "align": _RIGHT, "width": 0.15},
            {"title": "AF", "align": _RIGHT, "width": 0.09},
            {"title": "0-peak", "align": _RIGHT, "width": 0.14},
            {"title": "Largest at", "width": 0.26},
            {"title": "Damped mode there", "width": 0.3},
        ],
        rows,
        note="AF by half-power points; a dash where the response does not fall to 0.707 of the "
        "peak on both sides. Required and actual margins stand with the criteria.",
    )


def probes(sheet: Sheet, calc: LateralAssessment) -> None:
    """Show the amplitude at every probe at the stated speeds, the largest of all cases."""
    names = list(calc.speeds)
    rows: list[list[Inline]] = []
    for place in calc.whirl.places:
        sizes = []
        for speed in calc.speeds.values():
            at = int(np.argmin(np.abs(calc.whirl.row - speed)))
            found = max(
                float(abs(r.probe(place.station, place.angle)[at])) for r in calc.whirl.responses
            )
            sizes.append(sheet.show(found, "displacement"))
        rows.append([place.name, *sizes])
    sheet.table(
        "probes",
        "Amplitude at the probes, 0-peak, the largest of all unbalance cases",
        [
            "Probe",
            *_right(*(f"{name}, {sheet.show(calc.speeds[name], 'speed')}" for name in names)),
        ],
        rows,
    )


def shapes(sheet: Sheet, calc: LateralAssessment) -> None:
    """Show the whirl along the shaft against the clearances."""
    figure, words = figures.shapes_figure(sheet, calc)
    sheet.figure("shapes", figure, "Whirl along the shaft against clearances", words)
    if not sheet.case.clearances:
        sheet.paragraph("The case states no clearance; none is assessed.")
        return
    rows: list[list[Inline]] = []
    for place in sheet.case.clearances:
        node = calc.whirl.model.node(calc.whirl.built.station(place))
        whirl = calc.whirl.largest(node, "up to trip") or 0.0
        sag = 0.0 if calc.static is None else abs(float(calc.static.deflection[node]))
        runout = float(place.runout or 0.0)
        used = whirl + sag + runout
        verdict: Inline = sheet.show(used / float(place.clearance), "percent", 3)
        if used >= float(place.clearance):
            verdict = {"strong": "touches: the linear result is void beyond contact"}
        rows.append(
            [
                place.name,
                *(
                    sheet.show(value, "displacement")
                    for value in (whirl, sag, runout, float(place.clearance))
                ),
                verdict,
            ]
        )
    sheet.table(
        "clearances",
        "Clearances: whirl up to trip speed, sag and runout together",
        ["Place", *_right("Whirl", "Sag", "Runout", "Clearance", "Used")],
        rows,
    )


def stability(sheet: Sheet, calc: LateralAssessment) -> None:
    """Show the damped modes and their decrements."""
    figure, words = figures.campbell_figure(sheet, calc)
    sheet.figure("campbell", figure, "Damped frequencies and decrements against speed", words)
    chart, at = calc.chart, int(np.argmin(np.abs(calc.chart.speeds - calc.speeds["rated"])))
    decrements, swings = chart.decrements
    rows: list[list[Inline]] = []
    for mode in range(chart.present.shape[0]):
        if not chart.present[mode, at]:
            continue
        sense = str(chart.sense[mode, at])
        swinging = bool(swings[mode, at])
        rows.append(
            [
                str(mode + 1),
                sense,
                sheet.show(float(chart.frequencies[mode, at]), "speed") if swinging else "–",
                f"{decrements[mode, at]:.3g}" if swinging else "overdamped",
            ]
        )
    sheet.table(
        "stability",
        f"Damped modes at {sheet.show(float(chart.speeds[at]), 'speed')}",
        ["Mode", "Whirl", *_right("Frequency", "Logarithmic decrement")],
        rows,
    )


def forces(sheet: Sheet, calc: LateralAssessment) -> None:
    """Show forces on the supports and into the ground, and the stress of the shaft."""
    rows: list[list[Inline]] = [
        [
            one.name,
            "–" if one.static is None else sheet.show(one.static, "force"),
            *(sheet.show(value, "force") for value in (one.rated, one.largest, one.ground)),
        ]
        for one in calc.supports
    ]
    sheet.table(
        "forces",
        "Forces of the supports, rotating, 0-peak",
        ["Support", *_right("Static load", "At rated", "Operating range", "Into the ground")],
        rows,
        note="The largest of all unbalance cases. Into the ground: through the pedestal.",
    )
    at = int(np.argmax(calc.stress))
    sheet.paragraph(
        "The largest nominal bending stress by whirl in the operating range is ",
        {"strong": sheet.show(float(calc.stress.max()), "stress")},
        f", at {sheet.show(float(calc.whirl.model.positions[at]), 'length')} from the left end.",
    )


def validity(sheet: Sheet, calc: LateralAssessment) -> None:
    """Show how far discretisation, solves, energy and conditioning can be trusted."""
    v = calc.validity
    rows: list[list[Inline]] = [
        ["Change of the first undamped criticals, every element halved", f"{v.halving:.1e}"],
        ["Residual of the worst solve, backward error by components", f"{v.residual:.1e}"],
        ["Work of the unbalance against work dissipated, worst mismatch", f"{v.energy:.1e}"],
        ["Condition of the equations at rated speed, estimate", f"{v.condition:.1e}"],
    ]
    sheet.table(
        "validity",
        "Checks of the model and its solutions",
        [{"title": "Check", "width": 0.7}, {"title": "Found", "align": _RIGHT, "width": 0.3}],
        rows,
    )
    if v.halving > 1e-3:
        sheet.finding(
            "The mesh is coarse",
            f"Halving every element moves a critical speed by {v.halving:.2%}: use more elements.",
        )


def stations(sheet: Sheet, calc: LateralAssessment) -> None:
    """Show the mesh: place, diameters and rigid mass of every station."""
    model = calc.whirl.model
    unit = sheet.unit("diameter")
    rows: list[list[Inline]] = []
    for node in range(model.stations):
        section = model.sections[node] if node < len(model.sections) else None
        outer = "–" if section is None else sheet.show(section.outer, "diameter").split(" ")[0]
        inner = (
            "–"
            if section is None or not section.inner
            else sheet.show(section.inner, "diameter").split(" ")[0]
        )
        mass = float(model.station_mass[node])
        rows.append(
            [
                str(node + 1),
                sheet.show(float(model.positions[node]), "length"),
                outer,
                inner,
                sheet.show(mass, "mass") if mass else "–",
            ]
        )
    sheet.table(
        "stations",
        "Mesh: nodes from the left end, and the element to the right of each",
        ["Node", *_right("Position", f"Outer ({unit})", f"Inner ({unit})", "Rigid mass")],
        rows,
    )


def series(calc: LateralAssessment) -> dict[str, Any]:
    """Return the arrays behind the figures, for ``results.json``; six digits."""

    def digits(values: Any) -> list[float]:
        return [float(f"{v:.6g}") for v in np.asarray(values, float)]

    found: dict[str, Any] = {"speed": digits(calc.whirl.row)}
    for number, response in enumerate(calc.whirl.responses, 1):
        for place in calc.whirl.places:
            curve = response.probe(place.station, place.angle)
            found[f"case {number}, {place.name}"] = {
                "amplitude": digits(np.abs(curve)),
                "phase": digits(np.angle(curve)),
            }
    found["rated shape"] = {
        "position": digits(calc.whirl.model.positions),
        "whirl": digits(calc.rated_shape),
    }
    return found
