"""One rotor by stations judged leanly: what a tolerance study needs of each sample.

Whirl at the probes by one elimination over a row of speeds, its peaks, and the damped modes
where a decrement is asked for. Nothing is computed a second time here; limits that need more
are left open, with the reason.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.assess.model import Judged
from reportgen.assess.one_mass_judge import margin_rule, stated
from reportgen.criteria import (
    SOURCES,
    Critical,
    Limit,
    Outcome,
    amplitude_at_speed,
    clearance_share,
    log_decrement,
    residual_unbalance_by_load,
    separation_margins,
)
from reportgen.errors import ModelError
from reportgen.rotor import stations as mechanics

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.case.lateral import LateralCase, UnbalanceCase

    Floats = NDArray[np.float64]

SPEEDS = 400
"""Even speeds of the response; peaks between them are interpolated in 1/A²."""
_BEYOND = 1.35  # of the highest speed: as far as a margin can be asked for, and a band beyond
_SAME = 0.02  # of the speed: peaks of one mode at several probes lie closer
_MODES = 8


def judge(case: LateralCase, speeds: int = SPEEDS) -> tuple[Judged, ...]:
    """Judge a case by stations against the limits that it states.

    Parameters
    ----------
    case
        The case.
    speeds
        Number of even speeds that the response is computed at.

    Raises
    ------
    ModelError
        If the methods do not cover the case's values.
    """
    whirl = _Whirl(case, speeds)
    judged: list[Judged] = []
    for criterion in case.criteria:
        for outcome in whirl.apply(criterion):
            number = len(judged) + 1
            judged.append(Judged(f"C{number}", outcome, f"criterion-{number}"))
    return tuple(judged)


class _Whirl:
    """The unbalance response of a case at its probes, ready to be held against limits."""

    def __init__(self, case: LateralCase, speeds: int) -> None:
        from reportgen.case.to_rotor import to_rotor

        self.case = case
        planes = [plane for one in case.unbalance_cases for plane in one.planes]
        self.built = to_rotor(case.rotor, (*case.probes, *case.clearances, *planes))
        self.model = mechanics.assemble(self.built.rotor)
        self.speeds = case.speeds.stated()
        rated = self.speeds["rated"]
        self.low = self.speeds.get("minimum", rated)
        self.high = self.speeds.get("maximum continuous", rated)
        self.row = self._row(speeds)
        loads = [self.built.unbalance(one, self._total(one)) for one in case.unbalance_cases]
        self.responses = mechanics.unbalance_responses(
            self.model, self.row, loads, self.built.bow()
        )

    def _row(self, count: int) -> Floats:
        """Return the speeds looked at: even, and those that limits are set at."""
        top = _BEYOND * max(self.speeds.values())
        if self.case.analysis and self.case.analysis.highest_speed is not None:
            top = float(self.case.analysis.highest_speed)
        bottom = top / SPEEDS
        for bearing in self.built.rotor.bearings:
            # nothing is extrapolated beyond a table of coefficients
            if isinstance(bearing.coefficients, mechanics.SpeedTable):
                rows = np.asarray(bearing.coefficients.speeds)
                bottom, top = max(bottom, float(rows[0])), min(top, float(rows[-1]))
        wanted = np.array([*self.speeds.values(), *np.linspace(self.low, self.high, 17)])
        inside = wanted[(wanted >= bottom) & (wanted <= top)]
        return np.union1d(np.linspace(bottom, top, count), inside)

    def _total(self, one: UnbalanceCase) -> float | None:
        factor = 1.0 if one.factor is None else float(one.factor)
        if one.rule is None:
            return None
        mass = mechanics.mass_properties(self.model).mass
        if one.rule == "balance grade":
            return factor * float(one.grade or 0.0) / self.high * mass
        loads = mechanics.static_deflection(self.model).bearing_loads
        gravity = float(np.sum(loads)) / mass
        return factor * sum(
            residual_unbalance_by_load(float(load) / gravity, self.high) for load in loads
        )

    def apply(self, criterion: Any) -> list[Outcome]:
        """Return the outcomes of one criterion."""
        match criterion.kind:
            case "separation margin":
                return separation_margins(
                    self.criticals(),
                    self.low,
                    self.high,
                    margin_rule(criterion),
                    trip=self.speeds.get("trip"),
                    searched=(float(self.row[0]), float(self.row[-1])),
                )
            case "amplitude at speed":
                return [self._amplitude(criterion)]
            case "clearance":
                return self._clearances(criterion)
            case "logarithmic decrement":
                return [self._decrement(criterion)]
            case kind:
                limit = Limit(kind.capitalize(), "at most", "ratio", stated(criterion), kind)
                return [limit.not_assessed("a tolerance study does not judge this limit")]

    def _probes(self) -> list[int]:
        """Return the mesh stations of the probes, of the bearings where there are none."""
        if self.case.probes:
            places = [self.built.station(probe) for probe in self.case.probes]
        else:
            places = [bearing.station for bearing in self.built.rotor.bearings]
        return sorted({self.model.node(place) for place in places})

    def criticals(self) -> list[Critical]:
        """Return the peaks of the response, each mode once: the highest of its peaks."""
        found: list[Any] = []
        for response in self.responses:
            for node in self._probes():
                for curve in (response.x[node], response.y[node]):
                    found += mechanics.find_peaks(self.row, curve, least=0.02)
        found.sort(key=lambda peak: -peak.amplitude)
        kept: list[Any] = []
        for peak in found:
            if all(abs(peak.speed - other.speed) > _SAME * other.speed for other in kept):
                kept.append(peak)
        kept.sort(key=lambda peak: peak.speed)
        return [Critical(peak.speed, peak.amplification) for peak in kept]

    def _within(self, over: str) -> NDArray[np.bool_]:
        rated = self.speeds["rated"]
        low, high = {
            "rated": (rated, rated),
            "operating range": (self.low, self.high),
            "up to trip": (0.0, self.speeds.get("trip", self.high)),
        }[over]
        return np.asarray((self.row >= low) & (self.row <= high))

    def _largest(self, node: int, over: str) -> float | None:
        chosen = self._within(over)
        if not chosen.any():
            return None
        return max(float(response.major[node, chosen].max()) for response in self.responses)

    def _amplitude(self, criterion: Any) -> Outcome:
        sizes = [self._largest(node, criterion.at) for node in self._probes()]
        known = [size for size in sizes if size is not None]
        at = "rated speed" if criterion.at == "rated" else "the operating range"
        return amplitude_at_speed(
            max(known) if known else None,
            float(criterion.limit),
            measure="0-peak",
            limit_measure=criterion.measure,
            harmonic=True,
            source=stated(criterion),
            title=f"Largest amplitude at a probe in {at}",
        )

    def _clearances(self, criterion: Any) -> list[Outcome]:
        sag = None
        if self.case.machine.orientation == "horizontal":
            sag = np.abs(mechanics.static_deflection(self.model).deflection)
        out = []
        for place in self.case.clearances:
            node = self.model.node(self.built.station(place))
            out.append(
                clearance_share(
                    self._largest(node, criterion.over),
                    float(place.clearance),
                    sag=0.0 if sag is None else float(sag[node]),
                    runout=0.0 if place.runout is None else float(place.runout),
                    bow=0.0,  # the response holds the bow already
                    allowed=float(criterion.share),
                    source=stated(criterion, SOURCES["petroleum-clearance"]),
                    title=f"Clearance at {place.name}",
                )
            )
        return out

    def _decrement(self, criterion: Any) -> Outcome:
        rotor, coupling = self.built.rotor, criterion.cross_coupling
        if coupling is not None:
            place = self._part(criterion.on)
            rotor = mechanics.with_cross_coupling(rotor, place, float(coupling))
        model = mechanics.assemble(rotor)
        chart = mechanics.campbell(model, [self.high], _MODES, confirm=False)
        least = math.inf
        for mode in range(chart.exponents.shape[0]):
            if chart.sense[mode, 0] == "forward":
                exponent = np.asarray([chart.exponents[mode, 0]])
                least = min(least, float(mechanics.log_decrement(exponent)[0]))
        return log_decrement(
            None if math.isinf(least) else least,
            cross_coupling=0.0 if coupling is None else float(coupling),
            required=float(criterion.minimum),
            source=stated(criterion, SOURCES["petroleum-stability"]),
            title="Least logarithmic decrement of the forward modes",
        )

    def _part(self, name: str) -> int:
        for _, part in self.case.rotor.parts():
            if getattr(part, "name", None) == name:
                return self.built.station(part)
        raise ModelError(f"there is no part {name!r}")
