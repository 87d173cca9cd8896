"""What the template of passages shows of a rotor by stations: the model and its reduction."""

from __future__ import annotations

from typing import TYPE_CHECKING, cast

from reportgen.rotor import stations as mechanics

if TYPE_CHECKING:
    from reportgen.assess.transient_model import TransientAssessment
    from reportgen.assess.transient_station_whole import StationFacts
    from reportgen.sheet.blocks import Inline
    from reportgen.sheet.sheet import Sheet


def method(sheet: Sheet, calc: TransientAssessment) -> None:
    """Show how the rotor by stations is carried through its passages."""
    sheet.paragraph(
        "The shaft is divided into beam elements with the mass and tilting inertia of what sits on "
        "it (Timoshenko beams, gyroscopic effect), on supports with their full matrices of "
        "stiffness and damping. For the passages its motion is written in its own lowest modes, "
        "the same number in each plane, and the shapes that it takes under a force at each support "
        "(residual flexibility; MacNeal 1971), with everything that depends on speed kept:"
    )
    sheet.equation(
        "motion",
        "Motion of modes and shapes while the speed changes",
        r"M\,\ddot{\eta} + \left[C(\Omega) + \Omega\,G\right]\dot{\eta}"
        r" + \left[K(\Omega) + \Omega\,H\right]\eta = \mathrm{Re}\left\{\left[u\left("
        r"\dot{\theta}^{2} - \mathrm{i}\,\ddot{\theta}\right) + k_b\right]"
        r"\mathrm{e}^{\mathrm{i}\theta}\right\}",
        note="η the modal coordinates, G gyroscopic, H of internal damping, u the unbalance and "
        "k_b the bow, both projected on the modes, θ the angle of the shaft, Ω its rate.",
    )
    sheet.paragraph(
        "Each short step is exact for the speed in its middle (midpoint Magnus rule; Hochbruck and "
        "Ostermann 2010); the angle is carried exactly. Amplitudes are those of each half turn, "
        "placed between steps by a parabola. Along a probe they are those of its axis, at a "
        "clearance those of the orbit."
    )
    if any(run.drive is not None for run in calc.runs):
        sheet.paragraph(
            "Where torques drive the run, its speed follows from drive, load, inertia and the "
            "torque that the whirl draws: its work in each turn over 2π, taken from the motion of "
            "the round before until the run no longer changes. A drive that exceeds load and "
            "steady whirl at every speed passes however slowly."
        )


def further_criticals(sheet: Sheet, calc: TransientAssessment) -> list[list[Inline]]:
    """Return a row for every other peak of the steady response that was found."""
    side = cast("StationFacts", calc.facts).side
    met = calc["critical-speed"].value or 0.0
    others = [c for c in side.criticals if abs(c.speed - met) > 0.01 * met]
    top = sheet.show(float(side.row[-1]), "speed")
    if not others:
        return [["Further peaks of the steady response", f"none up to {top}"]]
    return [
        [
            "Further peak of the steady response",
            sheet.show(c.speed, "speed")
            + (
                ""
                if c.amplification is None
                else f", amplification factor {sheet.show(c.amplification, 'ratio', 3)}"
            ),
        ]
        for c in others
    ]


def rotor(sheet: Sheet, calc: TransientAssessment) -> None:
    """Show what the rotor weighs, how it stands, and how many modes its passages keep."""
    facts = cast("StationFacts", calc.facts)
    side = facts.side
    mass = mechanics.mass_properties(side.model)
    rows: list[list[Inline]] = [
        ["Mass of the rotor", sheet.show(mass.mass, "mass")],
        ["Its centre from the left end", sheet.show(mass.centre, "length")],
        ["Polar moment of inertia", sheet.show(mass.polar_inertia, "inertia")],
        ["Elements of the shaft", str(side.model.stations - 1)],
        [
            "Unbalance, amounts of all planes added",
            sheet.show(sum(part.amount for part in side.unbalance), "unbalance"),
        ],
    ]
    for bearing, load in zip(side.built.rotor.bearings, side.static_loads, strict=True):
        if load is not None:
            rows.append([f"Static load, {bearing.name}", sheet.show(load, "force")])
    sheet.table(
        "rotor",
        "The rotor",
        [{"title": "", "width": 0.5}, {"title": "Value", "width": 0.5}],
        rows,
    )
    sheet.table(
        "reduction",
        "Modes that the passages keep",
        [
            "Passage",
            *(
                {"title": title, "align": "right"}
                for title in (
                    "Modes in each plane",
                    "Steady whirl missed by",
                    "One mode more changes the peak by",
                )
            ),
        ],
        [
            [
                run.name,
                str(one.pairs),
                sheet.show(one.missed, "percent", 2),
                sheet.show(one.changed, "percent", 2),
            ]
            for run, one in zip(calc.runs, facts.reductions, strict=True)
        ],
        note="The shape under a force at each support comes on top of the modes. Missed: largest "
        "difference between the reduced and the whole rotor's steady whirl at the watched places "
        "over the run's speeds, as a share of the largest amplitude. "
        + (
            "The case states the number of modes."
            if side.forced_pairs is not None
            else "Modes are added until it is below 0.1 %."
        ),
    )
