"""The passages of a case through its critical speed, calculated and judged as a whole."""

from __future__ import annotations

from typing import TYPE_CHECKING, TypeVar

from reportgen.assess import one_mass_second as second
from reportgen.assess.cautions import CAUTIONS, NOT_ASSESSED, Caution
from reportgen.assess.model import Finding, SecondComputation
from reportgen.assess.one_mass_judge import largest_amplitude
from reportgen.assess.transient_findings import run_findings, sudden_findings
from reportgen.assess.transient_judge import Judging, Steady
from reportgen.assess.transient_model import TransientAssessment, in_rpm
from reportgen.assess.transient_one_mass import find_run
from reportgen.assess.transient_side import OneMassSide
from reportgen.assess.transient_station_side import station_side, steady_of
from reportgen.assess.transient_station_whole import (
    StationFacts,
    station_criticals,
    station_sudden,
)
from reportgen.assess.transient_stations import find_station_run
from reportgen.assess.transient_sudden import find_sudden
from reportgen.errors import ModelError
from reportgen.rotor import onemass

if TYPE_CHECKING:
    from collections.abc import Callable

    from reportgen.assess.transient_model import SuddenRun, TransientRun
    from reportgen.assess.transient_stations import Reduction
    from reportgen.case.passage import PassageCase, PassageProgramme

T = TypeVar("T")

PASSAGE_CAUTIONS = (
    Caution(
        "Contact",
        "Where peak, sag, runout and bow together reach a clearance the shaft touches. A rub heats "
        "and bends the shaft and can drive backward whirl; the linear result is void beyond "
        "contact, and says nothing of what the machine then does.",
    ),
    Caution(
        "Stall at the critical speed",
        "A drive that only just passes can hang at the critical speed with another load, voltage, "
        "temperature or unbalance, with the largest amplitude and the drive near its full torque. "
        "A trip on time and amplitude is to be set by those responsible for the machine.",
    ),
)


def assess(case: PassageCase) -> TransientAssessment:
    """Calculate the passages of a case and judge them against the limits that it states.

    Raises
    ------
    ModelError
        If the methods do not cover the case's values, or a passage would take too long.
    """
    return _stations(case) if case.rotor is None else _one_mass(case)


def _one_mass(case: PassageCase) -> TransientAssessment:
    side = OneMassSide.of(case)
    runs = tuple(
        _run(lambda given, n: find_run(side, given, n), case, index)
        for index in range(len(case.passages))
    )
    sudden: SuddenRun | None = None
    if case.sudden_unbalance is not None:
        sudden = find_sudden(side, case.sudden_unbalance)
    findings = (
        *_critical(side),
        *(finding for run in runs for finding in run_findings(run)),
        *sudden_findings(sudden),
    )
    steady = _steady(side, case.speeds.stated())
    return _whole(
        case,
        "one mass",
        findings,
        steady,
        runs,
        sudden,
        side,
        ("second and higher bending modes, gyroscopic effect, speed-dependent supports",),
    )


def _stations(case: PassageCase) -> TransientAssessment:
    assert case.stations is not None
    side = station_side(case)
    found: list[tuple[TransientRun, Reduction]] = [
        _run(lambda given, n: find_station_run(side, given, n), case, index)
        for index in range(len(case.passages))
    ]
    runs = tuple(run for run, _ in found)
    sudden: SuddenRun | None = None
    if case.sudden_unbalance is not None:
        on = case.sudden_unbalance.on
        part = next(p for _, p in case.stations.parts() if getattr(p, "name", None) == on)
        sudden = station_sudden(side, case.sudden_unbalance, side.built.station(part))
    ends = [passage.speeds() for passage in case.passages]
    findings = (
        *station_criticals(side, min(e[0] for e in ends), max(e[1] for e in ends)),
        *(finding for run in runs for finding in run_findings(run)),
        *sudden_findings(sudden),
    )
    return _whole(
        case,
        "stations",
        findings,
        steady_of(side, case),
        runs,
        sudden,
        StationFacts(side, tuple(reduction for _, reduction in found)),
        (
            "swings of the speed within a turn: the whirl's torque is carried into the speed turn "
            "by turn",
        )
        if any(run.drive is not None for run in runs)
        else (),
    )


def _whole(
    case: PassageCase,
    model: str,
    findings: tuple[Finding, ...],
    steady: Steady,
    runs: tuple[TransientRun, ...],
    sudden: SuddenRun | None,
    facts: object,
    not_assessed: tuple[str, ...],
) -> TransientAssessment:
    judging = Judging(case, steady, runs, sudden, {finding.id: finding for finding in findings})
    return TransientAssessment(
        findings=findings,
        judged=judging.all(),
        cautions=(*CAUTIONS[:1], *PASSAGE_CAUTIONS, *CAUTIONS[1:]),
        not_assessed=(*not_assessed, *NOT_ASSESSED),
        model=model,
        speeds=case.speeds.stated(),
        critical=findings[0].value,
        runs=runs,
        sudden=sudden,
        limit=None if case.limit is None else float(case.limit.amplitude),
        asked=asked(case),
        horizontal=case.machine.orientation == "horizontal",
        facts=facts,
    )


def _run(find: Callable[[PassageProgramme, int], T], case: PassageCase, index: int) -> T:
    given = case.passages[index]
    try:
        return find(given, index)
    except ModelError as error:
        raise ModelError(f"passages[{index + 1}] {given.name!r}: {in_rpm(str(error))}") from error


def asked(case: PassageCase) -> str:
    """Return what the calculation is asked to find, in a sentence."""
    names = [passage.name for passage in case.passages]
    listed = names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"
    sudden = "" if case.sudden_unbalance is None else f" and after {case.sudden_unbalance.name}"
    return (
        f"Find what the shaft does on the way through its critical speed during {listed}{sudden}, "
        "and judge it against the limits stated."
    )


def _critical(side: OneMassSide) -> tuple[Finding, ...]:
    """Return the speed to be passed, and how far the steady whirl there would go."""
    rotor = side.rotor
    peak = onemass.resonance_peak(rotor)
    method = "closed form" if rotor.support is None and not rotor.bow else "refined search"
    if peak.speed is None or peak.amplitude is None:
        return (
            Finding(
                id="critical-speed",
                title="Critical speed (peak of the steady response)",
                symbol=r"\Omega_c",
                value=None,
                quantity="speed",
                method="not available",
                where="critical-speed",
                note=peak.reason,
            ),
        )
    undamped = rotor.damping_ratio == 0.0
    searched = None if undamped else second.searched_peak(rotor, peak.speed)
    return (
        Finding(
            id="critical-speed",
            title="Critical speed (peak of the steady response)",
            symbol=r"\Omega_c",
            value=float(peak.speed),
            quantity="speed",
            method=method,
            where="critical-speed",
            second=None
            if searched is None
            else SecondComputation(
                "search over two-plane matrix solutions",
                searched[0],
                1e-5,
                "a peak is flat: √ of round-off",
            ),
        ),
        Finding(
            id="steady-peak",
            title="Amplitude of steady running at the critical speed",
            symbol=r"|z|_c",
            value=None if undamped else float(peak.amplitude),
            quantity="displacement",
            measure="0-peak",
            method=method,
            where="critical-speed",
            note="without damping it grows for as long as the speed stays" if undamped else "",
            headline=False,
            second=None
            if searched is None
            else SecondComputation(
                "search over two-plane matrix solutions",
                searched[1],
                1e-8,
                "search to 1e-9 of the speed",
            ),
        ),
    )


def _steady(side: OneMassSide, speeds: dict[str, float]) -> Steady:
    rotor, peak = side.rotor, onemass.resonance_peak(side.rotor)
    rated = speeds["rated"]
    operating = (speeds.get("minimum", rated), speeds.get("maximum continuous", rated))
    factor = onemass.amplification_factor(rotor).factor
    return Steady(
        criticals=[] if peak.speed is None else [(peak.speed, factor)],
        # the closed form knows all critical speeds of one mass: no range is left unsearched
        searched=(0.0, 1e9),
        operating_range=operating,
        trip=speeds.get("trip"),
        rated=abs(complex(onemass.response(rotor, rated))),
        operating=largest_amplitude(rotor, operating, peak),
        unbalance=rotor.mass * rotor.eccentricity,
        mass=rotor.mass,
        grade_speed=side.grade_speed,
    )
