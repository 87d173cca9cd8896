"""The rotor by stations of a case, its steady whirl, and the places that are watched."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from reportgen.assess.transient_judge import Steady
from reportgen.assess.transient_model import Contact
from reportgen.assess.transient_picture import steady_grid
from reportgen.case.to_rotor import BuiltRotor, to_rotor
from reportgen.criteria import Critical
from reportgen.errors import ModelError
from reportgen.rotor import stations as mechanics
from reportgen.rotor.transient.reduced import exciting_loads, reduce_model, steady_modal

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.case.passage import PassageCase
    from reportgen.rotor.stations.response import Bow, Unbalance

    Floats = NDArray[np.float64]
    Complexes = NDArray[np.complex128]

_ROW = 500
_SAME = 0.02  # of the speed: peaks of one mode at several places lie closer
_PAIRS = (3, 4, 5, 6, 8, 10, 12, 14, 16, 20, 24, 30, 40)
_AGREES = 1e-3
"""Share of the largest steady amplitude by which the reduced rotor may miss the whole one."""


@dataclass(frozen=True)
class Place:
    """A place that is watched: along a probe's axis, or in all directions (``angle`` None)."""

    id: str
    name: str
    station: int
    angle: float | None

    def seen(self, z: Complexes) -> Floats:
        """Return what is seen of a motion x + iy in m: along the axis, or its size."""
        if self.angle is None:
            return np.asarray(np.abs(z))
        return np.asarray((z * np.exp(-1j * self.angle)).real)


@dataclass(frozen=True, eq=False)
class StationSide:
    """What of a case its passages need, in SI. Made by :func:`station_side`."""

    built: BuiltRotor
    model: mechanics.Model
    unbalance: tuple[Unbalance, ...]
    bow: Bow | None
    places: tuple[Place, ...]
    clearances: tuple[tuple[int, str, float, float, float], ...]
    limit: float | None
    room_share: float
    row: Floats
    criticals: tuple[Critical, ...]
    static_loads: tuple[float | None, ...]
    forced_pairs: int | None
    maps: dict[tuple[float, str], tuple[Floats, Floats]] = field(default_factory=dict)

    def steady(self, place: Place, speeds: Floats) -> Floats:
        """Return the steady amplitude (0-peak, m) at a place over speeds in rad/s."""
        found = mechanics.unbalance_response(self.model, speeds, self.unbalance, self.bow)
        if place.angle is None:
            return np.asarray(found.major[self.model.node(place.station)])
        return np.abs(found.probe(place.station, place.angle))

    def largest_place(self, low: float, high: float) -> Place:
        """Return the place that whirls most in steady running between two speeds."""
        row = self.row[(self.row >= low) & (self.row <= high)]
        row = row if row.size else np.array([high])
        return max(self.places, key=lambda place: float(self.steady(place, row).max()))

    def critical_within(self, low: float, high: float) -> float | None:
        """Return the critical speed between two speeds with the largest response."""
        inside = [c.speed for c in self.criticals if low < c.speed < high]
        if not inside:
            return self.criticals[0].speed if self.criticals else None
        sizes = [
            max(float(self.steady(p, np.array([speed]))[0]) for p in self.places)
            for speed in inside
        ]
        return inside[int(np.argmax(sizes))]

    def steady_curve(self, place: Place, low: float, high: float) -> tuple[Floats, Floats]:
        """Return speeds, dense around the criticals, and the steady amplitude at them."""
        low = max(low, float(self.row[0]))
        speeds = steady_grid(low, high, None, 0.0)
        for critical in self.criticals:
            width = critical.speed / (2.0 * (critical.amplification or 10.0))
            speeds = np.union1d(speeds, steady_grid(low, high, critical.speed, width))
        speeds = speeds[(speeds >= low) & (speeds <= high)]
        return speeds, self.steady(place, speeds)

    def contacts(self, peaks: dict[str, float]) -> tuple[Contact, ...]:
        """Return what peaks by place leave of each clearance; they hold the bow already."""
        return tuple(
            Contact(f"clearance-{n}", name, clearance, peaks[f"clearance-{n}"], sag, runout)
            for n, name, clearance, sag, runout in self.clearances
        )

    def room(self, place: Place) -> float | None:
        """Return the amplitude that a place's own clearance leaves, within its share."""
        for number, _, clearance, sag, runout in self.clearances:
            if place.id == f"clearance-{number}":
                return self.room_share * clearance - sag - runout
        return None

    def pairs(self, low: float, high: float) -> tuple[int, float]:
        """Return how many modes in each plane suffice, and by how much they miss the whole rotor.

        The steady whirl of the reduced rotor is held against that of the whole one at every
        watched place, up to the highest speed and close to the criticals.

        Raises
        ------
        ModelError
            If 40 modes in each plane do not suffice, or those that the case states.
        """
        low = max(low, float(self.row[0]))
        speeds = np.unique(
            [*np.linspace(low, high, 40)]
            + [c.speed * (1.0 + d) for c in self.criticals for d in (-0.01, -0.003, 0.0, 0.01)]
        )
        speeds = speeds[(speeds >= low) & (speeds <= high)]
        whole = mechanics.unbalance_response(self.model, speeds, self.unbalance, self.bow)
        nodes = [self.model.node(place.station) for place in self.places]
        x, y = whole.x[nodes], whole.y[nodes]
        size = float(max(np.abs(x).max(), np.abs(y).max()))
        most = min(40, 2 * self.model.stations - 2)
        tried = _PAIRS if self.forced_pairs is None else (self.forced_pairs,)
        missed = math.inf
        for pairs in (p for p in tried if p <= most):
            reduced = reduce_model(self.model, pairs, self.reference(low, high))
            loads = exciting_loads(reduced, self.unbalance, self.bow)
            motion = steady_modal(reduced, speeds, *loads)
            missed = 0.0
            for place, a, b in zip(self.places, x, y, strict=True):
                both = reduced.station_rows(place.station) @ motion.T
                missed = max(missed, float(np.abs(both - np.array([a, b])).max()) / size)
            if missed <= _AGREES or self.forced_pairs is not None:
                return pairs, missed
        raise ModelError(
            f"{most} modes in each plane miss the whole rotor's steady whirl by {missed:.2%}: "
            "damping or stiffness at a support is beyond what the reduction follows"
        )

    def reference(self, low: float, high: float) -> float:
        """Return the speed at which supports are taken for the modes."""
        critical = self.critical_within(low, high)
        return critical if critical is not None and low < critical < high else high


def station_side(case: PassageCase) -> StationSide:
    """Return the rotor by stations of a case with its steady whirl.

    Raises
    ------
    ModelError
        If the mechanics do not cover a value.
    """
    assert case.stations is not None
    built = to_rotor(case.stations, (*case.planes, *case.probes, *case.clearances))
    model = mechanics.assemble(built.rotor)
    unbalance = tuple(
        mechanics.Unbalance(
            built.station(plane), float(plane.amount or 0.0), float(plane.angle or 0.0)
        )
        for plane in case.planes
    )
    horizontal = case.machine.orientation == "horizontal"
    static = mechanics.static_deflection(model) if horizontal else None
    places = [
        Place(f"probe-{n}", f"probe {p.name}", built.station(p), float(p.angle))
        for n, p in enumerate(case.probes, 1)
    ]
    clearances = []
    for n, c in enumerate(case.clearances, 1):
        station = built.station(c)
        places.append(Place(f"clearance-{n}", c.name, station, None))
        sag = 0.0 if static is None else abs(float(static.deflection[model.node(station)]))
        clearances.append((n, c.name, float(c.clearance), sag, float(c.runout or 0.0)))
    if not places:
        places = [
            Place(f"bearing-{n}", f"bearing {b.name or n}", b.station, None)
            for n, b in enumerate(built.rotor.bearings, 1)
        ]
    row = _row(case, built)
    bow = built.bow()
    shares = [float(c.share) for c in case.criteria if c.kind == "passage clearance"]
    return StationSide(
        built=built,
        model=model,
        unbalance=unbalance,
        bow=bow,
        places=tuple(places),
        clearances=tuple(clearances),
        limit=None if case.limit is None else float(case.limit.amplitude),
        room_share=min(shares, default=1.0),
        row=row,
        criticals=_criticals(model, row, unbalance, bow, places),
        static_loads=_static_loads(built, static),
        forced_pairs=case.modes,
    )


def _row(case: PassageCase, built: BuiltRotor) -> Floats:
    """Return even speeds up to beyond the highest of the case, within the supports' tables."""
    highest = max(
        *case.speeds.stated().values(), *(passage.speeds()[1] for passage in case.passages)
    )
    top, bottom = 2.0 * highest, highest / _ROW
    for bearing in built.rotor.bearings:
        if isinstance(bearing.coefficients, mechanics.SpeedTable):
            rows = np.asarray(bearing.coefficients.speeds)
            bottom, top = max(bottom, float(rows[0])), min(top, float(rows[-1]))
    return np.linspace(bottom, top, _ROW)


def _criticals(
    model: mechanics.Model,
    row: Floats,
    unbalance: tuple[Unbalance, ...],
    bow: Bow | None,
    places: list[Place],
) -> tuple[Critical, ...]:
    """Return the peaks of the steady response at the watched places, each mode once."""
    found: list[mechanics.Peak] = []
    for _ in range(3):
        response = mechanics.unbalance_response(model, row, unbalance, bow)
        found = []
        for place in places:
            node = model.node(place.station)
            curves = (
                (response.x[node], response.y[node])
                if place.angle is None
                else (response.probe(place.station, place.angle),)
            )
            for curve in curves:
                found += mechanics.find_peaks(row, curve, least=0.02)
        near = [
            peak.speed + 2.0 * float(row[1] - row[0]) * np.linspace(-1.0, 1.0, 21) for peak in found
        ]
        near += [np.linspace(p.lower or p.speed, p.upper or p.speed, 41) for p in found]
        if not near:
            return ()
        extra = np.unique(np.concatenate(near))
        row = np.union1d(row, extra[(extra > row[0]) & (extra < row[-1])])
    found.sort(key=lambda peak: -peak.amplitude)
    kept: list[mechanics.Peak] = []
    for peak in found:
        if all(abs(peak.speed - other.speed) > _SAME * other.speed for other in kept):
            kept.append(peak)
    kept.sort(key=lambda peak: peak.speed)
    return tuple(Critical(peak.speed, peak.amplification) for peak in kept)


def _static_loads(
    built: BuiltRotor, static: mechanics.StaticState | None
) -> tuple[float | None, ...]:
    """Return the static load of each bearing and seal, None where it carries none."""
    if static is None:
        return tuple(None for _ in built.rotor.bearings)
    loads = iter(static.bearing_loads.tolist())
    return tuple(next(loads) if b.carries_weight else None for b in built.rotor.bearings)


def steady_of(side: StationSide, case: PassageCase) -> Steady:
    """Return what of the steady whirl the case's limits may ask for."""
    speeds = case.speeds.stated()
    rated = speeds["rated"]
    low = speeds.get("minimum", rated)
    high = speeds.get("maximum continuous", rated)

    def largest(values: Floats) -> float | None:
        inside = values[(values >= side.row[0]) & (values <= side.row[-1])]
        if not inside.size:
            return None
        probes = [p for p in side.places if p.angle is not None] or list(side.places)
        return max(float(side.steady(place, inside).max()) for place in probes)

    between = [c.speed for c in side.criticals if low < c.speed < high]
    # as far as a margin can be asked for; what lies higher is none of the operating range's
    far = min(1.4 * max(speeds.values()), float(side.row[-1]))
    return Steady(
        criticals=tuple(c for c in side.criticals if c.speed <= far),
        searched=(float(side.row[0]), far),
        operating_range=(low, high),
        trip=speeds.get("trip"),
        rated=largest(np.array([rated])),
        operating=largest(np.array([*np.linspace(low, high, 101), *between])),
        unbalance=sum(part.amount for part in side.unbalance),
        mass=mechanics.mass_properties(side.model).mass,
        grade_speed=high,
    )
