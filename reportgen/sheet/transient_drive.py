"""What the template of passages shows of torques: drive margin, stall, energies."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from reportgen.sheet import transient_map_figures as figures
from reportgen.sheet.blocks import Inline

if TYPE_CHECKING:
    from reportgen.assess.transient_model import TransientAssessment, TransientRun
    from reportgen.sheet.sheet import Sheet


def drive(sheet: Sheet, calc: TransientAssessment) -> None:
    """Show torques, least torque and energies of every run under torque."""
    driven = [run for run in calc.runs if run.drive is not None]
    if not driven:
        sheet.paragraph(
            "No passage of the case is run by torques: the speed is prescribed, and what drive it "
            "takes is not assessed."
        )
        return
    for run in driven:
        figure, words = figures.torque_figure(sheet, run)
        sheet.figure(f"{run.id}-torque", figure, f"{run.name}: torques against speed", words)
        if run.kind == "drive":
            _margin(sheet, run)
    _energies(sheet, [run for run in driven if run.audit is not None])


def _margin(sheet: Sheet, run: TransientRun) -> None:
    assert run.drive is not None
    margin = run.drive.margin
    if margin is None:
        _without_margin(sheet, run)
        return
    at = run.critical or 0.0
    drive_at = _at(run, run.drive.drive, at)
    rows: list[list[Inline]] = [
        ["Drive torque at the critical speed", sheet.show(drive_at, "torque")],
        ["Load torque there", sheet.show(_at(run, run.drive.load, at), "torque")],
        [
            "Torque that steady whirl draws there",
            sheet.show(_at(run, run.drive.whirl, at), "torque"),
        ],
        [
            "Least share of the drive torque that passes",
            {"strong": sheet.show(margin.least_factor, "percent")},
        ],
        [
            "Largest share found to stall",
            sheet.show(margin.stalls_at, "percent") if margin.stall is not None else "–",
        ],
        ["Share that carries the load alone", sheet.show(margin.load_factor, "percent")],
        [
            "Share that passes however slowly",
            sheet.show(margin.quasi_static_factor, "percent"),
        ],
        ["Drive torque above the least", {"strong": sheet.show(margin.margin, "percent", 3)}],
        ["In words", _words(sheet, run)],
    ]
    sheet.table(
        f"{run.id}-margin",
        f"{run.name}: drive margin",
        [{"title": "", "width": 0.42}, {"title": "Value", "width": 0.58}],
        rows,
        note="Shares are of the drive torque as stated, at every speed alike.",
    )


def _without_margin(sheet: Sheet, run: TransientRun) -> None:
    """Say what is known of the least torque where no runs have bracketed it."""
    assert run.drive is not None
    quasi = run.drive.quasi_static
    if quasi is None:
        sheet.paragraph(
            f"{run.name}: the least torque that passes is not assessed; the run does not lead "
            "through a critical speed with damping."
        )
        return
    at = run.critical or 0.0
    rows: list[list[Inline]] = [
        ["Drive torque at the critical speed", sheet.show(_at(run, run.drive.drive, at), "torque")],
        ["Load torque there", sheet.show(_at(run, run.drive.load, at), "torque")],
        [
            "Torque that steady whirl draws there",
            sheet.show(_at(run, run.drive.whirl, at), "torque"),
        ],
        [
            "Share of the drive torque that passes however slowly",
            {"strong": sheet.show(quasi, "percent")},
        ],
        [
            "In words",
            "The drive exceeds load and steady whirl at every speed: it passes."
            if quasi < 1.0
            else {"strong": "Load and steady whirl exceed the drive at some speed: it may stall."},
        ],
    ]
    sheet.table(
        f"{run.id}-margin",
        f"{run.name}: drive margin",
        [{"title": "", "width": 0.5}, {"title": "Value", "width": 0.5}],
        rows,
        note="The least torque that passes is no more than that share.",
    )


def _words(sheet: Sheet, run: TransientRun) -> Inline:
    assert run.drive is not None
    assert run.drive.margin is not None
    margin = run.drive.margin
    if run.stalled:
        state = run.hang_state
        speed = run.hang_speed if state is None else state.speed
        return {
            "strong": f"The drive does not pass the critical speed: the rotor hangs at "
            f"{sheet.show(speed, 'speed')}. It would take "
            f"{sheet.show(margin.least_factor, 'ratio', 3)} times the torque."
        }
    if margin.stall is None:
        return "The load alone decides: a drive that just carries it passes the critical speed."
    stalled = margin.stall
    speed = stalled.hang_speed if stalled.hang_state is None else stalled.hang_state.speed
    return (
        f"The drive passes. With {sheet.show(margin.stalls_at, 'percent', 3)} of its torque the "
        f"rotor would hang at {sheet.show(speed, 'speed')}."
    )


def _at(run: TransientRun, values: np.ndarray | None, speed: float) -> float:
    assert run.drive is not None
    return 0.0 if values is None else float(np.interp(speed, run.drive.speed, values))


def _small(share: float) -> str:
    """Return a share of rounding size as a power of ten that it stays below."""
    power = max(math.ceil(math.log10(share)), -15) if share > 0.0 else -15
    return f"below 10{str(power).translate(str.maketrans('-0123456789', '⁻⁰¹²³⁴⁵⁶⁷⁸⁹'))}"


def _energies(sheet: Sheet, runs: list[TransientRun]) -> None:
    """Show where the energy of each run went, and what is left over of the balance."""
    rows: list[list[Inline]] = []
    for run in runs:
        audit = run.audit
        assert audit is not None
        rows.append(
            [
                run.name,
                *(
                    sheet.show(energy, "energy")
                    for energy in (
                        audit.drive,
                        audit.load,
                        audit.dissipated,
                        audit.stored_start,
                        audit.stored_end,
                    )
                ),
                _small(audit.mismatch),
            ]
        )
    if not rows:
        return
    sheet.table(
        "energy",
        "Energy audit of each run under torque",
        [
            "During",
            *(
                {"title": title, "align": "right"}
                for title in (
                    "Work of the drive",
                    "Taken by load and drag",
                    "Taken by the whirl's damping",
                    "Stored at the start",
                    "Stored at the end",
                    "Left over, share of the largest",
                )
            ),
        ],
        rows,
        note="Work of the drive = change of what is stored + load and drag + damping. Each part is "
        "integrated on its own; what is left over is the error of the integration.",
    )
