"""The lateral review of a rotor by stations: calculated and judged as a whole."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from reportgen.assess import lateral_second as second
from reportgen.assess.cautions import NOT_ASSESSED
from reportgen.assess.lateral_judge import Judging
from reportgen.assess.lateral_model import (
    CriticalFindings,
    LateralAssessment,
    SupportFindings,
    Validity,
)
from reportgen.assess.lateral_whirl import Whirl
from reportgen.assess.model import Finding, Judged, SecondComputation
from reportgen.assess.stated_limits import margin_rule
from reportgen.rotor import stations as mechanics

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.case.lateral import LateralCase

    Floats = NDArray[np.float64]

_MAP_POINTS = 17
_CHART_SPEEDS = 25
_MODES = 8
_NEAR = 0.06  # of the speed: a damped mode that crosses so near to a peak is that peak's


def judge(case: LateralCase) -> tuple[Judged, ...]:
    """Judge a case without second computations and charts, for comparisons and studies."""
    if any(criterion.kind == "project limit" for criterion in case.criteria):
        return assess(case).judged  # it may name any result
    whirl = Whirl(case, closer=2)
    static = _static(whirl)
    supports, stress, sag = _loads(whirl, static)
    mass = mechanics.mass_properties(whirl.model).mass
    worst = (float(stress.max()), sag)
    judging = Judging(whirl, supports, worst, {}, mass)
    return judging.all()


def assess(case: LateralCase) -> LateralAssessment:
    """Calculate a case and judge it against the limits that it states.

    Raises
    ------
    ModelError
        If the methods do not cover the case's values.
    """
    whirl = Whirl(case, closer=2)
    model = whirl.model
    static = _static(whirl)
    mass = mechanics.mass_properties(model)
    supports, stress, sag = _loads(whirl, static)
    chart = mechanics.campbell(model, _chart_row(whirl), case_modes(case))
    springs = _springs(whirl, whirl.speeds["rated"])
    undamped = mechanics.undamped_criticals(model, springs, 3, "forward", pedestals=False)
    criticals = _criticals(whirl, mechanics.synchronous_crossings(chart))
    onset = mechanics.instability_onset(chart)
    rated = np.array([whirl.speeds["rated"]])
    at_rated = mechanics.unbalance_responses(model, rated, whirl.loads, whirl.built.bow())
    findings = (
        _mass_finding(case, whirl, mass, static),
        *(finding for one in criticals for finding in _critical_findings(whirl, one)),
        _rated_finding(whirl),
        _decrement_finding(whirl),
        _onset_finding(chart, onset),
        *_load_findings(supports, stress),
    )
    base = {finding.id: finding for finding in findings}
    row = np.linspace(whirl.row[0], whirl.row[-1], 160)
    stiffness = np.array(
        [
            np.mean([both for both in _directions(whirl, float(v)) if both[0] > 0], axis=0)
            for v in row
        ]
    )
    return LateralAssessment(
        findings=findings,
        judged=Judging(whirl, supports, (float(stress.max()), sag), base, mass.mass).all(),
        not_assessed=_not_assessed(case),
        open_points=_mass_open(case, mass.mass),
        whirl=whirl,
        mass=mass,
        static=static,
        criticals=criticals,
        undamped=undamped,
        map=_map(whirl, springs),
        actual=tuple(mechanics.criticals_on_bearings(model, row[::4], 4)),
        support_stiffness=(row, stiffness[:, 0], stiffness[:, 1]),
        chart=chart,
        onset=onset,
        supports=supports,
        rated_shape=np.max([response.major[:, 0] for response in at_rated], axis=0),
        stress=stress,
        validity=_validity(whirl, springs),
        required_range=_required_range(whirl, criticals),
        asked="Find the critical speeds, the unbalance response and the stability of the rotor "
        "as drawn, and judge them against the limits stated.",
    )


def case_modes(case: LateralCase) -> int:
    """Return the number of damped modes followed, as stated or eight."""
    return case.analysis.modes if case.analysis and case.analysis.modes else _MODES


def _static(whirl: Whirl) -> mechanics.StaticState | None:
    if whirl.case.machine.orientation != "horizontal":
        return None
    return mechanics.static_deflection(whirl.model)


def _chart_row(whirl: Whirl) -> Floats:
    return np.linspace(whirl.row[0], whirl.row[-1], _CHART_SPEEDS)


def _springs(whirl: Whirl, speed: float) -> list[float]:
    """Return the direct stiffness in N/m of each support, the mean of both directions."""
    return [(x + y) / 2.0 for x, y in _directions(whirl, speed)]


def _directions(whirl: Whirl, speed: float) -> list[tuple[float, float]]:
    """Return the horizontal and vertical stiffness of each support, with its pedestal's spring.

    Zero for seals: the undamped criticals stand on the bearings alone.
    """
    found = []
    for support in whirl.model.supports:
        bearing = support.bearing
        if not bearing.carries_weight:
            found.append((0.0, 0.0))
            continue
        k = bearing.coefficients.at(np.array([speed])).stiffness[0]
        both = np.array([k[0, 0], k[1, 1]])
        if bearing.pedestal is not None:
            both = 1.0 / (1.0 / both + 1.0 / np.array(bearing.pedestal.stiffness))
        found.append((float(both[0]), float(both[1])))
    return found


def _map(whirl: Whirl, springs: list[float]) -> mechanics.CriticalSpeedMap:
    middle = math.exp(float(np.mean(np.log([k for k in springs if k > 0]))))
    row = middle * np.geomspace(0.02, 50.0, _MAP_POINTS)
    return mechanics.critical_speed_map(whirl.model, row, 4)


def _criticals(whirl: Whirl, crossings: list[mechanics.Crossing]) -> tuple[CriticalFindings, ...]:
    found = []
    for number, peak in enumerate(whirl.peaks(), 1):
        speed = peak.peak.speed
        near = [c for c in crossings if abs(c.speed - speed) <= _NEAR * speed]
        crossing = min(near, key=lambda c: abs(c.speed - speed), default=None)
        response = whirl.responses[peak.case]
        at = int(np.argmin(np.abs(response.speeds - speed)))
        shape = np.asarray(response.major[:, at])
        found.append(CriticalFindings(f"critical-{number}", peak, crossing, shape))
    return tuple(found)


def _mass_finding(
    case: LateralCase,
    whirl: Whirl,
    mass: mechanics.MassProperties,
    static: mechanics.StaticState | None,
) -> Finding:
    parts = whirl.built.rotor
    summed = mass.shaft_mass + sum(disc.mass for disc in parts.discs)
    summed += sum(part.mass for part in parts.masses)
    summed += sum(c.mass * c.share for c in parts.couplings)
    twice = second.rounding("sum of the parts", summed)
    if static is not None:
        loads = float(static.bearing_loads.sum()) / 9.80665
        twice = second.rounding("static bearing loads over gravity", loads)
    return Finding(
        id="rotor-mass",
        title="Mass of the rotor",
        symbol="m",
        value=mass.mass,
        quantity="mass",
        method="mass matrix moved as a rigid body",
        where="mass",
        headline=case.rotor.stated_mass is not None,
        second=twice,
    )


def _critical_findings(whirl: Whirl, one: CriticalFindings) -> list[Finding]:
    dense = second.Dense(whirl)
    peak, number = one.found.peak, one.id.removeprefix("critical-")
    speed, size = dense.peak(one.found)
    found = [
        Finding(
            id=one.id,
            title=f"Critical speed {number} (peak of the response)",
            symbol=rf"N_{{c{number}}}",
            value=float(peak.speed),
            quantity="speed",
            method="peak of the response, block elimination",
            where="criticals",
            second=second.of_peak(speed, "speed"),
        ),
        Finding(
            id=f"{one.id}-amplitude",
            title=f"Amplitude at critical speed {number}, {whirl.places[one.found.place].name}",
            symbol=rf"A_{{c{number}}}",
            value=float(peak.amplitude),
            quantity="displacement",
            measure="0-peak",
            method="peak of the response, block elimination",
            where="criticals",
            headline=False,
            second=second.of_peak(size, "amplitude"),
        ),
    ]
    if peak.amplification is not None:
        factor = dense.half_power(one.found, speed, size)
        found.append(
            Finding(
                id=f"{one.id}-factor",
                title=f"Amplification factor of critical speed {number}",
                symbol=rf"\mathit{{AF}}_{{{number}}}",
                value=float(peak.amplification),
                quantity="ratio",
                method="half-power points of the response",
                where="criticals",
                headline=factor is not None,
                second=None if factor is None else second.of_peak(factor, "factor"),
            )
        )
    return found


def _rated_finding(whirl: Whirl) -> Finding:
    speed = whirl.speeds["rated"]
    at = int(np.argmin(np.abs(whirl.row - speed)))
    sizes = [
        [float(abs(r.probe(p.station, p.angle)[at])) for p in whirl.places] for r in whirl.responses
    ]
    case, place = np.unravel_index(int(np.argmax(sizes)), np.shape(sizes))
    value = second.Dense(whirl).probe(int(case), int(place), float(whirl.row[at]))
    return Finding(
        id="amplitude-rated",
        title=f"Largest amplitude at a probe at rated speed, {whirl.places[place].name}",
        symbol="A",
        value=sizes[case][place],
        quantity="displacement",
        measure="0-peak",
        method="block elimination along the shaft",
        where="probes",
        second=second.rounding("full matrices", value),
    )


def _decrement_finding(whirl: Whirl) -> Finding:
    value = whirl.least_decrement(whirl.model)
    common = {
        "id": "least-decrement",
        "title": "Least logarithmic decrement of the forward modes, highest running speed",
        "symbol": r"\delta",
        "quantity": "ratio",
        "where": "stability",
    }
    if value is None:
        note = "no forward mode oscillates among those followed"
        return Finding(**common, value=None, method="not available", note=note)  # type: ignore[arg-type]
    return Finding(
        **common,  # type: ignore[arg-type]
        value=value,
        method="damped modes refined from a reduced model",
        second=second.rounding(
            "all eigenvalues of the full matrices",
            second.least_decrement(whirl.model, whirl.high, value),
        ),
    )


def _onset_finding(chart: mechanics.Campbell, onset: mechanics.Crossing | None) -> Finding:
    common = {
        "id": "instability-onset",
        "title": "Onset of instability",
        "symbol": r"\Omega_s",
        "quantity": "speed",
        "where": "stability",
        "headline": False,
    }
    if onset is None:
        values, swings = chart.decrements
        least = float(values[swings].min()) if swings.any() else math.inf
        note = (
            "every mode decays over all speeds looked at"
            if least > 0
            else "the rotor is unstable from the lowest speed looked at"
        )
        return Finding(**common, value=None, method="damped modes", note=note)  # type: ignore[arg-type]
    eigenvalues = mechanics.dense_eigenvalues(mechanics.dense_matrices(chart.model, onset.speed))
    near = eigenvalues[np.argmin(np.abs(eigenvalues - onset.exponent))]
    drift = onset.speed * (1.0 + float(near.real) / abs(onset.exponent))
    return Finding(
        **common,  # type: ignore[arg-type]
        value=onset.speed,
        method="zero of the decay of a followed mode",
        second=SecondComputation(
            "decay of the full matrices there", drift, 1e-5, "the decay is near zero"
        ),
    )


def _loads(
    whirl: Whirl, static: mechanics.StaticState | None
) -> tuple[tuple[SupportFindings, ...], Floats, float | None]:
    """Return forces by supports, stress by elements and the stress by weight.

    Rotating loads are the largest of all unbalance cases in the operating range.
    """
    speeds = np.unique([whirl.speeds["rated"], *np.linspace(whirl.low, whirl.high, 17)])
    speeds = speeds[(speeds >= whirl.row[0]) & (speeds <= whirl.row[-1])]
    rated = int(np.argmin(np.abs(speeds - whirl.speeds["rated"])))
    responses = mechanics.unbalance_responses(whirl.model, speeds, whirl.loads, whirl.built.bow())
    forces = [mechanics.bearing_forces(response) for response in responses]
    on = np.max([f.bearing_ellipse.major for f in forces], axis=0)
    ground = np.max([f.ground_ellipse.major for f in forces], axis=0)
    stress = np.max([mechanics.shaft_loads(r).stress for r in responses], axis=0).max(axis=(1, 2))
    loads = iter([] if static is None else static.bearing_loads.tolist())
    supports = tuple(
        SupportFindings(
            name=support.bearing.name or f"support {number}",
            static=next(loads, None) if support.bearing.carries_weight else None,
            rated=float(on[number - 1, rated]),
            largest=float(on[number - 1].max()),
            ground=float(ground[number - 1].max()),
        )
        for number, support in enumerate(whirl.model.supports, 1)
    )
    if static is None:
        return supports, np.asarray(stress), 0.0
    modulus = whirl.model.elements.section_modulus
    return supports, np.asarray(stress), float((np.abs(static.moment) / modulus).max())


def _load_findings(supports: tuple[SupportFindings, ...], stress: Floats) -> list[Finding]:
    worst = max(supports, key=lambda one: one.largest)
    return [
        Finding(
            id="bearing-force",
            title=f"Largest rotating bearing force in the operating range, {worst.name}",
            symbol="F",
            value=worst.largest,
            quantity="force",
            measure="0-peak",
            method="stiffness and damping times the relative motion",
            where="forces",
            headline=False,
        ),
        Finding(
            id="shaft-stress",
            title="Largest nominal bending stress by whirl in the operating range",
            symbol=r"\sigma",
            value=float(stress.max()),
            quantity="stress",
            measure="0-peak",
            method="end moments of the elements over section modulus",
            where="forces",
            headline=False,
        ),
    ]


def _validity(whirl: Whirl, springs: list[float]) -> Validity:
    check = mechanics.discretisation_check(whirl.built.rotor, springs, 3, pedestals=False)
    balances = [mechanics.energy_balance(response) for response in whirl.responses]
    return Validity(
        halving=check.largest,
        criticals=check.given,
        residual=max(float(response.residual.max()) for response in whirl.responses),
        energy=max(float(balance.mismatch.max()) for balance in balances),
        condition=mechanics.condition_estimate(whirl.model, whirl.speeds["rated"]),
    )


def _required_range(whirl: Whirl, criticals: tuple[CriticalFindings, ...]) -> tuple[float, float]:
    factor = max((c.found.peak.amplification or 0.0 for c in criticals), default=0.0) or None
    rules = [margin_rule(c) for c in whirl.case.criteria if c.kind == "separation margin"]
    below = max((rule.required("below", factor) or 0.0 for rule in rules), default=0.0)
    above = max((rule.required("above", factor) or 0.0 for rule in rules), default=0.0)
    return whirl.low * (1 - below), whirl.high * (1 + above)


def _mass_open(case: LateralCase, mass: float) -> tuple[str, ...]:
    """Return what is open where the mass differs from the stated one beyond its tolerance."""
    stated = case.rotor.stated_mass
    if stated is None:
        return ()
    gap, allowed = abs(mass - float(stated)), stated.half_width or 0.01 * float(stated)
    if gap <= allowed:
        return ()
    return (
        f"the calculated mass differs from the drawing's by {gap / float(stated):.2%}, beyond the "
        f"{allowed / float(stated):.2%} allowed: model and drawing are not the same rotor",
    )


def _not_assessed(case: LateralCase) -> tuple[str, ...]:
    mine = ["transient passage through the critical speeds", "casing, except the pedestals stated"]
    if not case.rotor.seals:
        mine.append("stiffness and damping of seals and wear rings: none is stated")
    return (*mine, *NOT_ASSESSED)
