"""The one-mass rotor of a case, calculated and judged as a whole."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from reportgen.assess import one_mass_second as second
from reportgen.assess.cautions import NOT_ASSESSED
from reportgen.assess.model import Assessment, Finding, SecondComputation
from reportgen.assess.one_mass_judge import Judging, required_range
from reportgen.assess.one_mass_passage import PassageFindings, find_passage
from reportgen.assess.one_mass_rotor import reference_speed_of, rotor_of
from reportgen.assess.one_mass_stress import StressFindings, find_stress
from reportgen.rotor import onemass

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.case.onemass import OneMassCase

GRAVITY = 9.80665


@dataclass(frozen=True)
class AtSpeed:
    """Steady whirl at one speed: amplitude (m, 0-peak), lag (rad), force to ground (N, 0-peak)."""

    amplitude: float
    lag: float
    ground_force: float


@dataclass(frozen=True, kw_only=True)
class OneMassAssessment(Assessment):
    """Everything that the one-mass report shows, in SI.

    ``curve`` is the complex response (shape (n,)) at ``curve_speed``; ``curve_lag`` its lag
    behind the eccentricity in rad. ``speeds`` holds the stated speeds by their names in the
    case. Ranges are pairs, low and high.
    """

    rotor: onemass.OneMassRotor
    peak: onemass.Peak
    half_power: onemass.AmplificationFactor
    speeds: dict[str, float]
    operating_range: tuple[float, float]
    required_range: tuple[float, float]
    curve_speed: NDArray[np.float64]
    curve: NDArray[np.complex128]
    curve_lag: NDArray[np.float64]
    passages: tuple[PassageFindings, ...]
    grade_speed: float
    stress: StressFindings | None
    asked: str
    horizontal: bool

    def at_speed(self, speed: float) -> AtSpeed:
        """Return amplitude, lag and ground force at a constant speed in rad/s."""
        return AtSpeed(
            amplitude=abs(complex(onemass.response(self.rotor, speed))),
            lag=float(onemass.phase_lag(self.rotor, speed)),
            ground_force=abs(complex(onemass.bearing_force(self.rotor, speed).ground)),
        )

    @property
    def plain(self) -> bool:
        """Whether the closed form of the unbowed rotor on rigid supports applies."""
        return self.rotor.support is None and self.rotor.bow == 0.0


def assess(case: OneMassCase) -> OneMassAssessment:
    """Calculate a one-mass case and judge it against the limits that it states.

    Raises
    ------
    ModelError
        If the methods do not cover the case's values.
    """
    rotor = rotor_of(case)
    speeds = case.speeds.stated()
    operating = (
        speeds.get("minimum", speeds["rated"]),
        speeds.get("maximum continuous", speeds["rated"]),
    )
    peak = onemass.resonance_peak(rotor)
    half_power = onemass.amplification_factor(rotor)
    passages = tuple(find_passage(case, rotor, p, i) for i, p in enumerate(case.passages or ()))
    stress = find_stress(case, rotor, speeds["rated"])
    findings = (
        *_critical_findings(rotor, peak, half_power),
        *_amplitude_findings(rotor, speeds),
        *_force_findings(case, rotor, speeds),
        *_stress_findings(stress),
        *_stability_findings(rotor),
        *(finding for p in passages for finding in p.findings()),
    )
    top = max(*speeds.values(), 1.6 * (peak.speed or rotor.natural_frequency))
    curve_speed = _grid(rotor, peak, 1.05 * top)
    curve = onemass.response(rotor, curve_speed)
    base = {f.id: f for f in findings}
    judging = Judging(case, rotor, speeds, operating, peak, half_power, base, passages)
    return OneMassAssessment(
        findings=findings,
        judged=judging.all(),
        not_assessed=(
            "second and higher bending modes, gyroscopic effect, speed-dependent supports",
            *NOT_ASSESSED,
        ),
        rotor=rotor,
        peak=peak,
        half_power=half_power,
        speeds=speeds,
        operating_range=operating,
        required_range=required_range(case, operating, half_power.factor),
        curve_speed=curve_speed,
        curve=curve,
        curve_lag=onemass.lag_of(curve),
        passages=passages,
        grade_speed=reference_speed_of(case),
        stress=stress,
        asked=_asked(case),
        horizontal=case.machine.orientation == "horizontal",
    )


def _grid(rotor: onemass.OneMassRotor, peak: onemass.Peak, top: float) -> NDArray[np.float64]:
    """Return speeds from standstill up, close together around the peak."""
    even = np.linspace(0.0, top, 301)
    if peak.speed is None:
        return even
    width = max(rotor.damping_ratio, 1e-3) * peak.speed
    near = peak.speed + width * np.sinh(np.linspace(-3.5, 3.5, 201))
    return np.unique(np.concatenate([even, near[(near > 0) & (near < top)], [peak.speed]]))


def _critical_findings(
    rotor: onemass.OneMassRotor, peak: onemass.Peak, half: onemass.AmplificationFactor
) -> list[Finding]:
    found = [
        Finding(
            id="natural-frequency",
            title="Undamped natural frequency",
            symbol=r"\omega_n",
            value=float(rotor.natural_frequency),
            quantity="speed",
            method="square root of stiffness over mass, supports rigid",
            where="natural-frequency",
            headline=False,
        )
    ]
    lowest = float(second.natural_frequencies(rotor)[0])
    if rotor.support is None:
        found[0] = _with(found[0], "eigenvalue of the matrices", lowest, 1e-10, "round-off")
    if peak.speed is None or peak.amplitude is None:
        note = peak.reason
        return [
            *found,
            _absent(
                "critical-speed",
                "Critical speed (peak of the response)",
                r"\Omega_c",
                "speed",
                note,
            ),
        ]
    at, size = second.searched_peak(rotor, peak.speed)
    factor = second.half_power_amplification(rotor, at, size) if half.factor is not None else None
    found += [
        Finding(
            id="critical-speed",
            title="Critical speed (peak of the response)",
            symbol=r"\Omega_c",
            value=float(peak.speed),
            quantity="speed",
            method="closed form" if rotor.support is None and not rotor.bow else "refined search",
            where="critical-speed",
            second=SecondComputation(
                "search over two-plane matrix solutions", at, 1e-5, "a peak is flat: √ of round-off"
            ),
        ),
        Finding(
            id="amplitude-peak",
            title="Amplitude at the critical speed, steady",
            symbol=r"|z|_c",
            value=float(peak.amplitude),
            quantity="displacement",
            measure="0-peak",
            method="closed form" if rotor.support is None and not rotor.bow else "refined search",
            where="critical-speed",
            second=SecondComputation(
                "search over two-plane matrix solutions", size, 1e-8, "search to 1e-9 of the speed"
            ),
        ),
    ]
    if half.factor is None or factor is None:
        found.append(
            _absent(
                "amplification-factor", "Amplification factor", r"\mathit{AF}", "ratio", half.reason
            )
        )
    else:
        found.append(
            Finding(
                id="amplification-factor",
                title="Amplification factor (half-power points)",
                symbol=r"\mathit{AF}",
                value=float(half.factor),
                quantity="ratio",
                method="half-power points of the response",
                where="amplification-factor",
                second=SecondComputation(
                    "half-power points bracketed on matrix solutions",
                    factor,
                    1e-4,
                    "a difference of two near speeds",
                ),
            )
        )
    return found


def _amplitude_findings(rotor: onemass.OneMassRotor, speeds: dict[str, float]) -> list[Finding]:
    return [
        Finding(
            id=f"amplitude-{name.replace(' ', '-')}",
            title=f"Amplitude at {name} speed",
            symbol=r"|z|",
            value=float(abs(onemass.response(rotor, speed))),
            quantity="displacement",
            measure="0-peak",
            method="closed form in the complex plane",
            where="amplitude-rated" if name == "rated" else "speeds",
            headline=name == "rated",
            second=SecondComputation(
                "two-plane matrix solution", second.amplitude(rotor, speed), 1e-9, "round-off"
            ),
        )
        for name, speed in speeds.items()
    ]


def _force_findings(
    case: OneMassCase, rotor: onemass.OneMassRotor, speeds: dict[str, float]
) -> list[Finding]:
    rated = speeds["rated"]
    force = onemass.bearing_force(rotor, rated)
    z = complex(onemass.response(rotor, rated))
    newton = None
    if rotor.support is None and not rotor.bow:
        newton = SecondComputation(
            "mass times acceleration of its centre",
            second.ground_force(rotor, rated, z),
            1e-9,
            "round-off",
        )
    found = [
        Finding(
            id="ground-force",
            title="Force into the ground at rated speed, rotating",
            symbol="F_g",
            value=float(abs(force.ground)),
            quantity="force",
            measure="0-peak",
            method="amplitude times dynamic stiffness of the path to ground",
            where="ground-force",
            second=newton,
        )
    ]
    if case.machine.orientation == "horizontal":
        found.append(
            Finding(
                id="sag",
                title="Static sag of the shaft",
                symbol="s",
                value=float(onemass.static_sag(rotor)),
                quantity="displacement",
                method="weight over stiffness",
                where="sag",
                headline=False,
                second=None
                if rotor.support
                else SecondComputation(
                    "gravity over the square of the matrices' eigenvalue",
                    GRAVITY / float(second.natural_frequencies(rotor)[0]) ** 2,
                    1e-9,
                    "round-off",
                ),
            )
        )
    return found


def _stress_findings(stress: StressFindings | None) -> list[Finding]:
    if stress is None:
        return []
    return [
        Finding(
            id="bending-stress",
            title="Nominal bending stress of the shaft at rated speed",
            symbol=r"\sigma",
            value=stress.stress,
            quantity="stress",
            method="largest moment over section modulus, without notch factor",
            where="bending-stress",
            headline=False,
        )
    ]


def _stability_findings(rotor: onemass.OneMassRotor) -> list[Finding]:
    if not rotor.internal_damping:
        return []
    if rotor.support is not None:
        return [
            _absent(
                "instability-onset",
                "Onset of instability by internal damping",
                r"\Omega_s",
                "speed",
                "the threshold with flexible supports needs the model by stations",
            )
        ]
    return [
        Finding(
            id="instability-onset",
            title="Onset of instability by internal damping",
            symbol=r"\Omega_s",
            value=float(onemass.internal_damping_onset(rotor)),
            quantity="speed",
            method="closed form, viscous internal damping",
            where="instability-onset",
            second=SecondComputation(
                "sign of the eigenvalues, bracketed",
                second.instability_onset(rotor),
                1e-6,
                "eigenvalues near zero lose half their digits",
            ),
        )
    ]


def _with(finding: Finding, method: str, value: float, tolerance: float, why: str) -> Finding:
    return replace(finding, second=SecondComputation(method, value, tolerance, why))


def _absent(name: str, title: str, symbol: str, quantity: str, note: str) -> Finding:
    return Finding(
        id=name,
        title=title,
        symbol=symbol,
        value=None,
        quantity=quantity,
        method="not available",
        where=name,
        note=note,
    )


def _asked(case: OneMassCase) -> str:
    parts = ["the critical speed", "the unbalance response at the running speeds"]
    if case.passages:
        parts.append("the passage through the critical speed")
    return (
        f"Find {', '.join(parts[:-1])} and {parts[-1]}, and judge them against the limits stated."
    )
