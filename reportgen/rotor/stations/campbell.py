"""Damped eigenvalues against speed: the Campbell diagram, with each mode followed and named."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.counting import count_in_window
from reportgen.rotor.stations.eigenpairs import Eigenpairs, lowest_pairs, oscillates, refine
from reportgen.rotor.stations.model import Model
from reportgen.rotor.stations.shaft import Complex
from reportgen.rotor.stations.tracking import follow, separate_twins

Sense = Literal["forward", "backward", "mixed", "straight line", "overdamped", "absent"]

# Modes carried beyond those asked for, so that a mode may leave the lowest and return.
_SPARE = 4


def log_decrement(exponents: Complex) -> Real:
    """Logarithmic decrement δ = −2π Re λ / Im λ of oscillating modes.

    Raises
    ------
    ModelError
        If a mode does not oscillate: it has no decrement.
    """
    if not np.all(oscillates(exponents)):
        raise ModelError("an overdamped mode has no logarithmic decrement; leave it out")
    return np.asarray(-2 * np.pi * exponents.real / exponents.imag)


def whirl_sense(shaft: Complex, exponent: complex) -> Sense:
    """Name the sense of one mode (n, 4) by its orbits.

    Stations below 5 % of the largest orbit do not count, as near a node. An orbit whose
    short half-axis is under 0.1 % of the long one is a straight line and has no sense.
    """
    if not oscillates(np.asarray(exponent)):
        return "overdamped"
    f, b = np.abs(shaft[:, 0]), np.abs(shaft[:, 2])
    size = f + b
    seen = size > 0.05 * size.max()
    turning = (f - b)[seen] / size[seen]
    ahead, behind = bool((turning > 1e-3).any()), bool((turning < -1e-3).any())
    if ahead and behind:
        return "mixed"
    if not ahead and not behind:
        return "straight line"
    return "forward" if ahead else "backward"


@dataclass(frozen=True, eq=False)
class Campbell:
    """Modes followed over speed.

    Attributes
    ----------
    speeds
        Ω [rad/s], (S,).
    present
        Whether mode t was found at speed s, (T, S); other arrays mean nothing where not.
    exponents
        λ = σ + iω_d [1/s], (T, S); 0 where absent.
    sense
        Of each mode at each speed: forward, backward, mixed, straight line, overdamped, absent.
    shapes
        (T, S, n, 4) forward and backward parts of deflection and slope, (f, f', b, b').
    counted
        Speeds at which the number of modes was confirmed by the principle of the argument.
    pairs, place
        The eigenpairs behind it, and the number of each mode's pair at each speed.
    """

    model: Model
    speeds: Real
    present: NDArray[np.bool_]
    exponents: Complex
    sense: NDArray[np.str_]
    counted: tuple[float, ...]
    pairs: Eigenpairs
    place: NDArray[np.int64]

    @property
    def frequencies(self) -> Real:
        """Damped frequency ω_d [rad/s], (T, S); 0 where absent, (nearly) 0 where overdamped."""
        return np.asarray(self.exponents.imag)

    @property
    def decrements(self) -> tuple[Real, NDArray[np.bool_]]:
        """Logarithmic decrement (T, S) and where it exists (present and oscillating)."""
        swings = self.present & oscillates(self.exponents)
        safe = np.where(swings, self.exponents, 1j)
        return np.where(swings, log_decrement(safe), 0.0), swings

    def shape(self, mode: int, speed: int) -> Complex:
        """Vector of one mode at one of the speeds, (n, 4) in (f, f', b, b')."""
        if not self.present[mode, speed]:
            raise ModelError(f"mode {mode} was not found at {self.speeds[speed]:.6g} rad/s")
        return np.asarray(self.pairs.shaft[self.place[mode, speed]])


def _confirm(model: Model, pairs: Eigenpairs, speed: float, modes: int) -> None:
    """Count the roots in a window round those found and compare."""
    lam = pairs.exponents[pairs.speeds == speed]
    swing = np.sort(lam[oscillates(lam)].imag)
    if swing.size < 2:
        return
    # The top edge runs through the widest gap above the modes asked for.
    tail = swing[min(modes, swing.size - 1) - 1 :]
    gap = int(np.argmax(tail[1:] / tail[:-1]))
    failure: ModelError | None = None
    for part in (0.5, 0.37, 0.61):
        low = 0.6 * part * swing[0]
        high = tail[gap] * (tail[gap + 1] / tail[gap]) ** part
        inside = lam[(lam.imag > low) & (lam.imag < high)]
        margin = 0.4 * part * swing[0]
        left, right = inside.real.min() - margin, max(inside.real.max(), 0.0) + margin
        try:
            there = count_in_window(model, speed, (left, right), (low, high), lam)
        except ModelError as error:  # an unlucky edge: another window may do
            failure = error
            continue
        if there != inside.size:
            raise ModelError(
                f"{there} modes exist below {high:.6g} rad/s at a speed of {speed:.6g} rad/s but "
                f"{inside.size} were found; refine the elements or ask for fewer modes"
            )
        return
    assert failure is not None
    raise failure


def campbell(model: Model, speeds: ArrayLike, modes: int = 12, *, confirm: bool = True) -> Campbell:
    """Find and follow damped modes over a row of speeds.

    Parameters
    ----------
    model
        The rotor.
    speeds
        Ω [rad/s], rising, shape (S,).
    modes
        Number of lowest oscillating modes wanted at every speed; every mode that is among
        them somewhere is followed as far as it can be, and overdamped modes below them.
    confirm
        Confirm at the first, middle and last speed that no mode was missed.

    Raises
    ------
    ModelError
        If speeds do not rise, lie outside a coefficient table, or a mode was missed.

    Notes
    -----
    Roots are refined on the whole model by Newton's method until a step is below 1e-6 of
    the root, which leaves some 1e-10 (1e-8 is what the dense comparison asks).
    """
    row = np.atleast_1d(np.asarray(speeds, dtype=np.float64))
    if row.ndim != 1 or not np.all(np.isfinite(row)) or np.any(np.diff(row) <= 0) or row[0] < 0:
        raise ModelError("speeds of a Campbell diagram must rise from zero or above, in rad/s")
    if modes < 1:
        raise ModelError(f"{modes} modes asked for; give at least 1")
    pairs = separate_twins(lowest_pairs(model, row, modes + _SPARE))
    counted = tuple(float(row[i]) for i in sorted({0, row.size // 2, row.size - 1}))
    if confirm:
        for speed in counted:
            _confirm(model, pairs, speed, modes)
    place = follow(pairs, row, model.positions[-1] / 4).place
    wanted = np.zeros(pairs.exponents.size, dtype=bool)
    for v in row:
        at = np.flatnonzero(pairs.speeds == v)
        swing = at[oscillates(pairs.exponents[at])]
        top = swing[np.argsort(pairs.exponents[swing].imag)][:modes]
        wanted[top] = True
        if top.size:
            ceiling = pairs.exponents[top].imag.max()
            still = at[~oscillates(pairs.exponents[at]) & (np.abs(pairs.exponents[at]) < ceiling)]
            wanted[still] = True
    place = place[(wanted[place] & (place >= 0)).any(1)]
    present = place >= 0
    exponents = np.where(present, pairs.exponents[place], 0)
    first = present.argmax(1)
    start = np.abs(exponents[np.arange(first.size), first].imag)
    order = np.lexsort((start, first))
    place, present, exponents = place[order], present[order], exponents[order]
    sense = np.full(place.shape, "absent", dtype="<U13")
    for t, s in zip(*np.nonzero(present), strict=True):
        j = place[t, s]
        sense[t, s] = whirl_sense(pairs.shaft[j], complex(pairs.exponents[j]))
    return Campbell(model, row, present, exponents, sense, counted if confirm else (), pairs, place)


def _at_speed(chart: Campbell, mode: int, column: int, speed: float) -> Eigenpairs:
    """Refine mode ``mode`` at a new speed, from its pairs at the two columns around it."""
    a, b = chart.place[mode, column], chart.place[mode, column + 1]
    lo, hi = chart.speeds[column], chart.speeds[column + 1]
    part = (speed - lo) / (hi - lo)
    near = a if part < 0.5 else b
    lam = (1 - part) * chart.pairs.exponents[a] + part * chart.pairs.exponents[b]
    start = chart.pairs.take(np.array([near]))
    return refine(
        chart.model,
        Eigenpairs(
            np.array([lam]), np.array([speed]), start.shaft, start.pedestals, start.correction
        ),
    )


@dataclass(frozen=True)
class Crossing:
    """Mode ``mode`` at ``speed`` [rad/s], where its λ is ``exponent`` [1/s]."""

    mode: int
    speed: float
    exponent: complex
    sense: Sense

    @property
    def decrement(self) -> float:
        """Logarithmic decrement there."""
        return float(-2 * np.pi * self.exponent.real / self.exponent.imag)


def _crossings(
    chart: Campbell, value: NDArray[np.float64], part: str, order: float
) -> list[Crossing]:
    def measure(lam: complex, speed: float) -> float:
        return lam.imag - order * speed if part == "frequency" else lam.real

    found = []
    for t in range(value.shape[0]):
        for s in range(value.shape[1] - 1):
            both = chart.present[t, s] and chart.present[t, s + 1]
            swings = oscillates(chart.exponents[t, s : s + 2])
            if not both or not swings.all() or value[t, s] * value[t, s + 1] > 0:
                continue
            if value[t, s] == 0 and s > 0:
                continue
            lo, hi = float(chart.speeds[s]), float(chart.speeds[s + 1])
            f_lo, f_hi = float(value[t, s]), float(value[t, s + 1])
            for _ in range(60):
                # Regula falsi with the Illinois rule: bracketed, and fast on smooth curves.
                speed = hi - f_hi * (hi - lo) / (f_hi - f_lo) if f_hi != f_lo else lo
                pair = _at_speed(chart, t, s, speed)
                f = measure(complex(pair.exponents[0]), speed)
                if abs(f) < 1e-10 * abs(pair.exponents[0]) or abs(hi - lo) < 1e-14 * hi:
                    break
                if f * f_hi < 0:
                    lo, f_lo = hi, f_hi
                else:
                    f_lo /= 2
                hi, f_hi = speed, f
            lam = complex(pair.exponents[0])
            found.append(Crossing(t, speed, lam, whirl_sense(pair.shaft[0], lam)))
    return sorted(found, key=lambda c: c.speed)


def synchronous_crossings(chart: Campbell, order: float = 1.0) -> list[Crossing]:
    """Find where a mode's damped frequency equals ``order`` times the speed: damped criticals."""
    return _crossings(chart, chart.frequencies - order * chart.speeds, "frequency", order)


def instability_onset(chart: Campbell) -> Crossing | None:
    """Find the lowest speed at which a mode's decrement passes from positive to negative.

    None where every mode decays over all speeds of the chart, or where the rotor is unstable
    from its first speed on (see :attr:`Campbell.decrements`).
    """
    sigma = chart.exponents.real
    return next(
        (c for c in _crossings(chart, sigma, "decay", 1.0) if _rises(chart, c)),
        None,
    )


def _rises(chart: Campbell, at: Crossing) -> bool:
    s = int(np.clip(np.searchsorted(chart.speeds, at.speed) - 1, 0, chart.speeds.size - 2))
    return bool(chart.exponents[at.mode, s + 1].real > chart.exponents[at.mode, s].real)
