"""A case of passages of a rotor by stations, as a whole: criticals, runs, sudden unbalance."""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy.optimize import minimize_scalar

from reportgen.assess.model import Finding, SecondComputation
from reportgen.assess.transient_model import SuddenRun
from reportgen.assess.transient_newmark import whole_motion
from reportgen.assess.transient_picture import envelope
from reportgen.assess.transient_stations import turn_peaks
from reportgen.rotor import stations as mechanics
from reportgen.rotor.passage_programme import PiecewiseAcceleration
from reportgen.rotor.stations.response import bow_shape
from reportgen.rotor.transient.programme import Prescribed
from reportgen.rotor.transient.station_run import station_run

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from reportgen.assess.transient_station_side import Place, StationSide
    from reportgen.assess.transient_stations import Reduction
    from reportgen.case.passage import SuddenUnbalance

    Complexes = NDArray[np.complex128]

_DECAY = 5.0  # of the slowest mode: e⁻⁵ is left of the free whirl
_MOST_TURNS = 400


@dataclass(frozen=True)
class StationFacts:
    """What is particular to the model by stations: the side, and how each run was reduced."""

    side: StationSide
    reductions: tuple[Reduction, ...]


def station_criticals(side: StationSide, low: float, high: float) -> tuple[Finding, ...]:
    """Return the critical speed that the passages meet, and its steady amplitude."""
    critical = side.critical_within(low, high)
    if critical is None:
        return (
            Finding(
                id="critical-speed",
                title="Critical speed (peak of the steady response)",
                symbol=r"\Omega_c",
                value=None,
                quantity="speed",
                method="not available",
                where="critical-speed",
                note="the steady response has no peak up to "
                f"{side.row[-1] * 30.0 / math.pi:.5g} r/min",
            ),
        )
    place = side.largest_place(0.999 * critical, 1.001 * critical)
    bounds = (0.99 * critical, min(1.01 * critical, float(side.row[-1])))

    def highest(amplitude: Callable[[float], float]) -> tuple[float, float]:
        found = minimize_scalar(
            lambda speed: -amplitude(float(speed)),
            bounds=bounds,
            method="bounded",
            options={"xatol": 1e-9 * critical},
        )
        return float(found.x), float(-found.fun)

    first = highest(lambda speed: float(side.steady(place, np.array([speed]))[0]))
    second = highest(lambda speed: _dense_amplitude(side, place, speed))
    return (
        Finding(
            id="critical-speed",
            title=f"Critical speed (peak of the steady response, {place.name})",
            symbol=r"\Omega_c",
            value=first[0],
            quantity="speed",
            method="peak of the response by block elimination",
            where="critical-speed",
            second=SecondComputation(
                "search over solutions of the full matrices",
                second[0],
                1e-5,
                "a peak is flat: √ of round-off",
            ),
        ),
        Finding(
            id="steady-peak",
            title=f"Amplitude of steady running at the critical speed, {place.name}",
            symbol=r"|z|_c",
            value=first[1],
            quantity="displacement",
            measure="0-peak",
            method="response by block elimination",
            where="critical-speed",
            headline=False,
            second=SecondComputation(
                "search over solutions of the full matrices",
                second[1],
                1e-7,
                "round-off of the full solution",
            ),
        ),
    )


def _dense_amplitude(side: StationSide, place: Place, speed: float) -> float:
    model = side.model
    load = np.zeros((model.stations, 2), dtype=np.complex128)
    for part in side.unbalance:
        turned = cmath.exp(1j * part.angle)
        load[model.node(part.station), 0] += part.amount * speed**2 * turned
    if side.bow is not None:
        load += np.asarray(model.stiffness.times(bow_shape(model, side.bow)))
    q = mechanics.dense_response(model, speed, load)
    at = 4 * model.node(place.station)
    x, y = complex(q[at]), complex(q[at + 2])
    if place.angle is None:
        return 0.5 * (abs(x + 1j * y) + abs(x - 1j * y))
    return abs(math.cos(place.angle) * x + math.sin(place.angle) * y)


def station_sudden(side: StationSide, given: SuddenUnbalance, station: int) -> SuddenRun:
    """Calculate the whirl after an unbalance appears at a station.

    The motion is linear: the steady whirl before goes on, and what the new unbalance alone does
    from rest adds to it.
    """
    speed = float(given.speed)
    added = mechanics.Unbalance(station, float(given.amount), float(given.angle or 0.0))
    turn = 2.0 * math.pi / speed
    duration = min(max(_DECAY / _slowest(side, speed), 10.0 * turn), _MOST_TURNS * turn)
    dwell = Prescribed(PiecewiseAcceleration([(0.0, speed), (duration, speed)]))
    pairs, _ = side.pairs(0.9 * speed, speed)
    run = station_run(side.model, dwell, (added,), None, pairs, speed, per_turn=64, at_rest=True)
    before = mechanics.unbalance_response(side.model, np.array([speed]), side.unbalance, side.bow)
    turning = np.exp(1j * run.angle)

    def whirl(place: Place, moved: Complexes, turned: Complexes) -> Complexes:
        node = side.model.node(place.station)
        f, b = before.forward[node, 0, 0], before.backward[node, 0, 0]
        return np.asarray(moved + f * turned + np.conj(b) * np.conj(turned))

    peaks = {}
    records = {}
    for place in side.places:
        seen = place.seen(whirl(place, run.displacement(place.station), turning))
        records[place.id] = turn_peaks(run.angle, run.time, seen)
        peaks[place.id] = float(records[place.id][1].max())
    place = max(side.places, key=lambda p: peaks[p.id])
    time, size = records[place.id]
    at = int(np.argmax(size))
    last = min(float(time[at]) + 3.0 * turn, duration)
    whole = whole_motion(side.model, dwell, (added,), None, (0.0, last), at_rest=True)
    second = None
    if whole is not None:
        turned = np.exp(1j * dwell.angle(whole.time))
        seen = place.seen(whirl(place, whole.displacement(place.station), turned))
        second = SecondComputation(
            "whole rotor by full matrices, stepped by Newmark's rule",
            float(turn_peaks(dwell.angle(whole.time), whole.time, seen)[1].max()),
            1e-2,
            "120 steps a turn; the blow at the start rings in all modes",
        )
    new = (*side.unbalance, added)
    after = mechanics.unbalance_response(side.model, np.array([speed]), new, side.bow)
    drawn = envelope(time, size)
    return SuddenRun(
        name=given.name,
        speed=speed,
        amount=float(given.amount),
        place=place.name,
        time=drawn[0],
        amplitude=drawn[1],
        before=float(side.steady(place, np.array([speed]))[0]),
        after=float(after.major[side.model.node(place.station), 0])
        if place.angle is None
        else abs(complex(after.probe(place.station, place.angle)[0])),
        peak=peaks[place.id],
        peak_time=float(time[at]),
        method="reduced on modes, stepped exactly",
        contacts=side.contacts(peaks),
        force=None,
        second=second,
    )


def _slowest(side: StationSide, speed: float) -> float:
    """Return the slowest decay of the lowest modes at a speed in 1/s."""
    values = mechanics.dense_eigenvalues(mechanics.dense_matrices(side.model, speed))
    low = values[np.abs(values.imag) > 1e-3 * speed]
    low = low[np.abs(low) < 4.0 * speed]
    decay = -low.real
    return max(float(decay.min()) if decay.size else 0.01 * speed, 1e-3 * speed)
