"""What the one-mass template shows of passages through the critical speed."""

from __future__ import annotations

from typing import TYPE_CHECKING

from reportgen.sheet import one_mass_figures as figures
from reportgen.sheet.blocks import Inline

if TYPE_CHECKING:
    from reportgen.assess.one_mass import OneMassAssessment
    from reportgen.assess.one_mass_passage import PassageFindings
    from reportgen.sheet.sheet import Sheet


def passages(sheet: Sheet, calc: OneMassAssessment) -> None:
    """Show every stated passage: table, envelope and orbit."""
    if not sheet.case.passages:
        sheet.paragraph("The case states no passage; none is assessed.")
        return
    for one in calc.passages:
        _passage(sheet, calc, one)


def _passage(sheet: Sheet, calc: OneMassAssessment, one: PassageFindings) -> None:
    programme, peak = one.programme, one.peak
    crossed = "yes" if peak.crossed else f"no: {peak.reason}"
    rows: list[list[Inline]] = [
        [
            "Speed programme",
            f"{sheet.show(programme.start_speed, 'speed')} to "
            f"{sheet.show(programme.end_speed, 'speed')} at "
            f"{sheet.show(programme.acceleration, 'acceleration_speed')}",
        ],
        ["Duration", sheet.show(float(one.time[-1]), "time")],
        ["Passes the critical", crossed],
        ["Largest amplitude, 0-peak", {"strong": sheet.show(peak.amplitude, "displacement")}],
        [
            "Reached at",
            f"{sheet.show(peak.speed, 'speed')}, {sheet.show(peak.time, 'time')} after the start",
        ],
    ]
    if peak.crossed and peak.steady_peak:
        share = peak.amplitude / peak.steady_peak
        rows.append(
            [
                "Share of the steady peak",
                f"{sheet.show(share, 'percent', 3)} of "
                f"{sheet.show(peak.steady_peak, 'displacement')}",
            ]
        )
    rows += [
        ["Static sag", sheet.show(one.sag, "displacement")],
        ["Runout", sheet.show(one.runout, "displacement")],
        ["Amplitude, sag and runout together", sheet.show(one.closest, "displacement")],
    ]
    if one.clearance is not None:
        rows.append(["Radial clearance", sheet.show(one.clearance, "clearance")])
        if one.closest >= one.clearance:
            rows.append(
                [
                    "Contact",
                    {
                        "strong": "The shaft touches. Beyond contact the linear result is void: "
                        "the amplitude above is not what the machine would do."
                    },
                ]
            )
    sheet.table(
        f"{one.id}-peak",
        f"{one.name}: result of the passage",
        [{"title": "", "width": 0.36}, {"title": "Value", "width": 0.64}],
        rows,
    )
    figure, words = figures.passage_figure(sheet, calc, one)
    sheet.figure(
        f"{one.id}-envelope", figure, f"{one.name}: amplitude against time and speed", words
    )
    figure, words = figures.orbit_figure(sheet, one)
    sheet.figure(
        f"{one.id}-orbit", figure, f"{one.name}: orbit around the largest amplitude", words
    )
