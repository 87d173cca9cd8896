"""The unbalance response of a rotor by stations of a case, and the limits read off it.

Whirl at the probes by one elimination over a row of speeds, its peaks, and the damped modes
where a decrement is asked for. Nothing is computed a second time here.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.assess.stated_limits import margin_rule, stated
from reportgen.criteria import (
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


@dataclass(frozen=True)
class FoundPeak:
    """A peak of the response: the highest of one mode's, and where it was found.

    ``peak`` is that of the mechanics; ``case`` the number of the unbalance case, ``place`` that of
    the probe, both from 0.
    """

    peak: mechanics.Peak
    case: int
    place: int


@dataclass(frozen=True)
class Place:
    """A place where the whirl is watched: a station, and the angle of a probe in rad."""

    name: str
    station: int
    angle: float


class Whirl:
    """The unbalance response of a case at its probes, ready to be held against limits."""

    def __init__(self, case: LateralCase, speeds: int = SPEEDS, closer: int = 0) -> None:
        """Calculate the response; ``closer`` times again with more speeds around its peaks."""
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
        self.totals = [self._total(one) for one in case.unbalance_cases]
        self.loads = [
            self.built.unbalance(one, total)
            for one, total in zip(case.unbalance_cases, self.totals, strict=True)
        ]
        self.places = self._places()
        self._respond()
        for _ in range(closer):
            near = [_around(found.peak, self.row) for found in self.peaks()]
            self.row = np.union1d(self.row, np.concatenate([*near, self.row[:1]]))
            self._respond()

    def _respond(self) -> None:
        self.responses = mechanics.unbalance_responses(
            self.model, self.row, self.loads, self.built.bow()
        )

    def _places(self) -> list[Place]:
        """Return the probes; where there are none, both directions at each bearing."""
        probes = [
            Place(probe.name, self.built.station(probe), float(probe.angle))
            for probe in self.case.probes
        ]
        bearings = [
            Place(f"{b.name or f'bearing {n}'}, {way}", b.station, angle)
            for n, b in enumerate(self.built.rotor.bearings, 1)
            for way, angle in (("horizontal", 0.0), ("vertical", math.pi / 2))
        ]
        return probes or bearings

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
                return [limit.not_assessed("a study does not judge this limit")]

    def _probes(self) -> list[int]:
        """Return the mesh stations of the probes, of the bearings where there are none."""
        if self.case.probes:
            places = [self.built.station(probe) for probe in self.case.probes]
        else:
            places = [bearing.station for bearing in self.built.rotor.bearings]
        return sorted({self.model.node(place) for place in places})

    def peaks(self) -> list[FoundPeak]:
        """Return the peaks of the response, each mode once: the highest of its peaks."""
        found: list[FoundPeak] = []
        for number, response in enumerate(self.responses):
            for index, place in enumerate(self.places):
                curve = response.probe(place.station, place.angle)
                found += [
                    FoundPeak(peak, number, index)
                    for peak in mechanics.find_peaks(self.row, curve, least=0.02)
                ]
        found.sort(key=lambda one: -one.peak.amplitude)
        kept: list[FoundPeak] = []
        for one in found:
            speed = one.peak.speed
            if all(abs(speed - other.peak.speed) > _SAME * other.peak.speed for other in kept):
                kept.append(one)
        return sorted(kept, key=lambda one: one.peak.speed)

    def criticals(self) -> list[Critical]:
        """Return the critical speeds that limits are held against."""
        return [Critical(one.peak.speed, one.peak.amplification) for one in self.peaks()]

    def within(self, over: str) -> NDArray[np.bool_]:
        rated = self.speeds["rated"]
        low, high = {
            "rated": (rated, rated),
            "operating range": (self.low, self.high),
            "up to trip": (0.0, self.speeds.get("trip", self.high)),
        }[over]
        return np.asarray((self.row >= low) & (self.row <= high))

    def largest(self, node: int, over: str) -> float | None:
        chosen = self.within(over)
        if not chosen.any():
            return None
        return max(float(response.major[node, chosen].max()) for response in self.responses)

    def _amplitude(self, criterion: Any) -> Outcome:
        sizes = [self.largest(node, criterion.at) for node in self._probes()]
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
                    self.largest(node, criterion.over),
                    float(place.clearance),
                    sag=0.0 if sag is None else float(sag[node]),
                    runout=0.0 if place.runout is None else float(place.runout),
                    bow=0.0,  # the response holds the bow already
                    allowed=float(criterion.share),
                    source=stated(criterion),
                    title=f"Clearance at {place.name}",
                )
            )
        return out

    def with_coupling(self, criterion: Any) -> mechanics.Model:
        """Return the rotor with the cross-coupling that a criterion on the decrement adds."""
        if criterion.cross_coupling is None:
            return self.model
        place, size = self.part(criterion.on), float(criterion.cross_coupling)
        return mechanics.assemble(mechanics.with_cross_coupling(self.built.rotor, place, size))

    def least_decrement(self, model: mechanics.Model) -> float | None:
        """Return the least logarithmic decrement of the forward modes at the highest speed."""
        chart = mechanics.campbell(model, [self.high], _MODES, confirm=False)
        forward = [
            float(mechanics.log_decrement(np.asarray([exponent]))[0])
            for exponent, sense in zip(chart.exponents[:, 0], chart.sense[:, 0], strict=True)
            if sense == "forward"
        ]
        return min(forward, default=None)

    def _decrement(self, criterion: Any) -> Outcome:
        coupling = criterion.cross_coupling
        return log_decrement(
            self.least_decrement(self.with_coupling(criterion)),
            cross_coupling=0.0 if coupling is None else float(coupling),
            required=float(criterion.minimum),
            source=stated(criterion),
            title="Least logarithmic decrement of the forward modes",
        )

    def part(self, name: str) -> int:
        for _, part in self.case.rotor.parts():
            if getattr(part, "name", None) == name:
                return self.built.station(part)
        raise ModelError(f"there is no part {name!r}")


def _around(peak: mechanics.Peak, row: Floats) -> Floats:
    """Return speeds close around a peak and over its half-power band, within the row's ends."""
    step = float(row[1] - row[0])
    near = peak.speed + 2.0 * step * np.linspace(-1.0, 1.0, 21)
    band = np.linspace(peak.lower or peak.speed, peak.upper or peak.speed, 31)
    both = np.concatenate([near, band])
    return np.asarray(both[(both > row[0]) & (both < row[-1])])
