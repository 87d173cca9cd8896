"""What the template of passages shows of programmes, amplitudes, contact, forces."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.sheet import transient_figures as figures
from reportgen.sheet import transient_map_figures as maps
from reportgen.sheet.blocks import Inline

if TYPE_CHECKING:
    from reportgen.assess.transient_model import Contact, TransientAssessment, TransientRun
    from reportgen.sheet.sheet import Sheet

VOID = "the shaft touches: the linear result is void beyond contact"

_KINDS = {
    "ramp": "constant acceleration",
    "table": "speed against time, as tabulated",
    "drive": "drive torque against load torque",
    "coast down": "drag torque alone",
}


def lead(sheet: Sheet, calc: TransientAssessment) -> list[Inline]:
    """Return what the conclusion begins with: stalls, runs that pass nothing, contact."""
    parts: list[Inline] = []
    for run in calc.runs:
        link: Inline = {"ref": f"{run.id}-result", "text": run.name}
        if run.stalled:
            speed = sheet.show(_hangs(run), "speed")
            parts += [link, f" stalls at the critical speed and hangs at {speed}. "]
        elif not run.crossed:
            parts += [link, f" is no passage: {run.reason}. "]
        touching = [c.name for c in run.contacts if c.touches]
        if touching:
            parts += [
                f"During {run.name} the shaft touches at {', '.join(touching)}: ",
                {"ref": "contact", "text": "the linear result is void beyond contact"},
                ". ",
            ]
    if calc.sudden is not None and any(c.touches for c in calc.sudden.contacts):
        names = ", ".join(c.name for c in calc.sudden.contacts if c.touches)
        parts += [
            f"After {calc.sudden.name} the shaft touches at {names}: ",
            {"ref": "contact", "text": "the linear result is void beyond contact"},
            ". ",
        ]
    return parts


def _hangs(run: TransientRun) -> float | None:
    return run.hang_speed if run.hang_state is None else run.hang_state.speed


def programmes(sheet: Sheet, calc: TransientAssessment) -> None:
    """Show how the speed goes in every passage, as a table and a figure."""
    rows: list[list[Inline]] = []
    for run in calc.runs:
        rows.append(
            [
                run.name,
                _KINDS[run.kind],
                f"{sheet.show(float(run.speed[0]), 'speed')} to "
                f"{sheet.show(float(run.speed[-1]), 'speed')}",
                sheet.show(float(run.time[-1] - run.time[0]), "time"),
                f"{run.turns:,.0f}",
                sheet.show(run.acceleration, "acceleration_speed"),
                _passes(run),
            ]
        )
    sheet.table(
        "programmes",
        "The passages of the case",
        [
            "Passage",
            "Speed by",
            {"title": "Speeds", "align": "right"},
            {"title": "Time", "align": "right"},
            {"title": "Turns", "align": "right"},
            {"title": "Acceleration at the critical", "align": "right"},
            "Passes the critical",
        ],
        rows,
    )
    figure, words = figures.programmes_figure(sheet, calc)
    sheet.figure("programmes-figure", figure, "Speed against time", words)


def _passes(run: TransientRun) -> Inline:
    if run.crossed:
        return "yes"
    return {"strong": "no, it stalls" if run.stalled else "no"}


def amplitudes(sheet: Sheet, calc: TransientAssessment) -> None:
    """Show the largest amplitude of every passage, and its envelope."""
    for run in calc.runs:
        _notices(sheet, run)
        _result(sheet, calc, run)
        figure, words = figures.envelope_figure(sheet, calc, run)
        sheet.figure(
            f"{run.id}-envelope",
            figure,
            f"{run.name}: amplitude against time and against speed, the steady curve behind it",
            words,
        )


def _notices(sheet: Sheet, run: TransientRun) -> None:
    if run.stalled:
        sheet.finding(
            f"{run.name}: the rotor stalls at the critical speed",
            f"The whirl takes what the drive has to spare. The speed hangs at "
            f"{sheet.show(_hangs(run), 'speed')}, "
            f"{sheet.show((_hangs(run) or 0.0) / (run.critical or 1.0), 'percent')} of the "
            f"critical speed {sheet.show(run.critical, 'speed')}, with "
            f"{sheet.show(_hang_amplitude(run), 'displacement')} 0-peak for as long as the drive "
            "is on. It is no passage, and no peak of a passage is reported.",
        )
    elif not run.crossed:
        sheet.finding(f"{run.name} is no passage", f"{run.reason[:1].upper()}{run.reason[1:]}.")
    elif run.reason:
        sheet.paragraph(f"{run.name}: {run.reason}.")


def _hang_amplitude(run: TransientRun) -> float:
    return run.highest.peak if run.hang_state is None else run.hang_state.amplitude


def _result(sheet: Sheet, calc: TransientAssessment, run: TransientRun) -> None:
    several = len(run.watched) > 1
    columns: list[Any] = ["Place"] if several else [""]
    columns += [
        {"title": title, "align": "right"}
        for title in ("Largest, 0-peak", "At speed", "At time", "Of the steady peak")
    ]
    if calc.limit is not None:
        columns.append({"title": "Time above the limit", "align": "right"})
    rows: list[list[Inline]] = []
    for place in run.watched:
        finite = place.steady[np.isfinite(place.steady)]
        share = place.peak / float(finite.max()) if run.crossed and finite.size else None
        row: list[Inline] = [
            place.name or ("Peak of the passage" if run.crossed else "Largest amplitude"),
            {"strong": sheet.show(place.peak, "displacement")},
            sheet.show(place.peak_speed, "speed"),
            sheet.show(place.peak_time, "time"),
            sheet.show(share, "percent", 3),
        ]
        if calc.limit is not None:
            row.append(sheet.show(place.above, "time"))
        rows.append(row)
    note = "Time counts from the start of the passage."
    if calc.limit is not None:
        note += f" Limit of amplitude: {sheet.show(calc.limit, 'displacement')} 0-peak."
    if not run.crossed:
        note += " The run is no passage: the largest amplitude is not the peak of one."
    sheet.table(f"{run.id}-result", f"{run.name}: largest amplitude", columns, rows, note=note)


def records(sheet: Sheet, calc: TransientAssessment) -> None:
    """Show the spectra of every record, and the orbits around the largest amplitude."""
    for run in calc.runs:
        if run.waterfall is None:
            sheet.paragraph(f"{run.name}: the record is too short or too long for spectra.")
            continue
        figure, words = figures.waterfall_figure(sheet, run)
        sheet.paragraph(words)
        sheet.figure(
            f"{run.id}-waterfall",
            figure,
            f"{run.name}: spectra of the motion in x, one above the other in order of time",
            words,
        )
    figure, words = figures.orbits_figure(sheet, calc)
    if figure is not None:
        sheet.figure("orbits", figure, "Orbits around the largest amplitude", words)


def peak_maps(sheet: Sheet, calc: TransientAssessment) -> None:
    """Show the peak against acceleration and damping, with each passage's place on it."""
    shown = False
    for run in calc.runs:
        if run.map is None:
            continue
        shown = True
        figure, words = maps.map_figure(sheet, run)
        sheet.paragraph(words)
        sheet.figure(
            f"{run.id}-map", figure, f"{run.name}: peak of the passage against acceleration", words
        )
        _least(sheet, run)
    if not shown:
        sheet.paragraph(
            "No map is drawn: no run of the case is a passage with damping that the map covers."
        )


def _least(sheet: Sheet, run: TransientRun) -> None:
    assert run.map is not None
    room, least = run.map.room, run.map.least
    if room is None or least is None:
        return
    left = sheet.show(room, "displacement")
    if least.acceleration:
        sheet.paragraph(
            f"{run.name}: the closest clearance leaves {left} for the whirl, within the share that "
            "may be used. The peak stays within it from an acceleration of ",
            {"strong": sheet.show(abs(least.acceleration), "acceleration_speed")},
            " on; the run has ",
            sheet.show(run.map.at, "acceleration_speed"),
            ".",
        )
    elif least.exists:
        sheet.paragraph(
            f"{run.name}: the closest clearance leaves {left} for the whirl, within the share that "
            "may be used. Any acceleration keeps the peak within it, down to steady running at "
            "the critical speed."
        )
    else:
        from reportgen.assess.transient_model import in_rpm

        sheet.finding(
            f"{run.name}: no acceleration keeps within the closest clearance",
            f"It leaves {left} for the whirl, within the share that may be used: "
            f"{in_rpm(least.reason)}.",
        )


def contact(sheet: Sheet, calc: TransientAssessment) -> None:
    """Show what whirl, sag, runout and bow leave of every close clearance."""
    rows: list[list[Inline]] = []
    touching = False
    for run in calc.runs:
        for one in run.contacts:
            touching = touching or one.touches
            rows.append(_contact_row(sheet, run.name, one, run.crossed))
    if calc.sudden is not None:
        for one in calc.sudden.contacts:
            touching = touching or one.touches
            rows.append(_contact_row(sheet, calc.sudden.name, one, crossed=True))
    if not rows:
        sheet.paragraph("The case states no close clearance; contact is not assessed.")
        return
    if touching:
        sheet.caution(
            "Contact",
            "At one place or more the linear result reaches the clearance: the shaft touches. The "
            "amplitudes of that run are void beyond contact; they are not what the machine does.",
        )
    sheet.table(
        "contact",
        "Whirl, sag, runout and bow against each close clearance, as radii",
        [
            "During",
            "At",
            *(
                {"title": title, "align": "right"}
                for title in ("Peak", "Sag", "Runout", "Bow", "Together", "Clearance", "Used")
            ),
            "In words",
        ],
        rows,
        note="Added as lengths, as if all pointed one way. The peak holds a bow of the shaft "
        "already where none is listed.",
    )


def _contact_row(sheet: Sheet, during: str, one: Contact, crossed: bool) -> list[Inline]:
    if one.touches:
        words: Inline = {"strong": VOID}
    elif crossed:
        words = "does not touch"
    else:
        words = "does not touch in this run, which is no passage"
    return [
        during,
        one.name,
        *(
            sheet.show(length, "displacement")
            for length in (one.peak, one.sag, one.runout, one.bow, one.used)
        ),
        sheet.show(one.clearance, "clearance"),
        sheet.show(one.used / one.clearance, "percent", 3),
        words,
    ]


def forces(sheet: Sheet, calc: TransientAssessment) -> None:
    """Show the largest rotating force of every passage at each support."""
    rows: list[list[Inline]] = []
    for run in calc.runs:
        for one in run.forces:
            ratio = one.value / one.static if one.static else None
            rows.append(
                [
                    run.name,
                    one.name,
                    {"strong": sheet.show(one.value, "force")},
                    sheet.show(one.speed, "speed"),
                    sheet.show(one.time, "time"),
                    sheet.show(one.static, "force"),
                    sheet.show(ratio, "percent", 3),
                ]
            )
    if not rows:
        sheet.paragraph("No record of the runs is short enough for their forces.")
        return
    sheet.table(
        "forces",
        "Largest rotating force during each run, 0-peak",
        [
            "During",
            "Force",
            *(
                {"title": title, "align": "right"}
                for title in ("Largest", "At speed", "At time", "Static load", "Of static")
            ),
        ],
        rows,
        note="The weight is not in it. A force above the static load can lift a horizontal shaft "
        "off its bearing, which the linear result does not know.",
    )


def sudden(sheet: Sheet, calc: TransientAssessment) -> None:
    """Show what an unbalance that appears at speed does, where the case has one."""
    found = calc.sudden
    if found is None:
        sheet.paragraph("The case states no sudden unbalance.")
        return
    rows: list[list[Inline]] = [
        ["Speed, held", sheet.show(found.speed, "speed")],
        ["Unbalance that appears", sheet.show(found.amount, "unbalance")],
        ["Steady amplitude before", sheet.show(found.before, "displacement")],
        ["Steady amplitude after", sheet.show(found.after, "displacement")],
        [
            "Largest amplitude, 0-peak",
            [
                {"strong": sheet.show(found.peak, "displacement")},
                f", {sheet.show(found.peak_time, 'time', 3)} after it appears",
            ],
        ],
    ]
    if found.place:
        rows.insert(0, ["Largest at", found.place])
    if found.force is not None:
        rows.append([f"Largest force, {found.force.name}", sheet.show(found.force.value, "force")])
    if any(c.touches for c in found.contacts):
        rows.append(["Contact", {"strong": VOID}])
    sheet.table(
        "sudden-result",
        f"{found.name}: whirl after the unbalance appears",
        [{"title": "", "width": 0.42}, {"title": "Value", "width": 0.58}],
        rows,
        note="The lost mass, and the change of speed that it brings, are left out.",
    )
    figure, words = figures.sudden_figure(sheet, found)
    sheet.figure("sudden-figure", figure, f"{found.name}: amplitude against time", words)


def series(calc: TransientAssessment) -> dict[str, Any]:
    """Return the arrays behind the figures, in SI, for ``results.json``."""
    out: dict[str, Any] = {}
    for run in calc.runs:
        out[run.id] = {
            "programme": {"time": _digits(run.time), "speed": _digits(run.speed)},
            "amplitude": [
                {
                    "place": place.name,
                    "time": _digits(place.time),
                    "amplitude": _digits(place.amplitude),
                }
                for place in run.watched
            ],
            "units": {"time": "s", "speed": "rad/s", "amplitude": "m"},
        }
        if run.map is not None:
            out[run.id]["map"] = {
                "acceleration": _digits(run.map.acceleration),
                "damping": list(run.map.damping),
                "peak": [_digits(curve) for curve in run.map.curves],
                "units": {"acceleration": "rad/s²", "damping": "1", "peak": "m"},
            }
    return out


def _digits(values: Any) -> list[float]:
    """Keep seven significant digits: integrations of other processors agree in them."""
    return [float(f"{v:.7g}") for v in np.asarray(values, float)]
