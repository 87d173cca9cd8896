"""Phases of a run under torque, and the check that their torques lead where they should."""

from __future__ import annotations

import math
from dataclasses import dataclass

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check
from reportgen.rotor.transient.coupled import CoupledRotor
from reportgen.rotor.transient.stepper import Leg
from reportgen.rotor.transient.torque import NetTorque, TorqueCurve

MOST_TURNS = 100_000
"""Turns in one run; at about 1,000 a second, more would keep a reader waiting for minutes."""


MOST_STEPS = 500_000
"""Steps in one phase; some minutes."""


@dataclass(frozen=True, eq=False)
class Phase:
    """A part of a run under given torques, up to a speed.

    Parameters
    ----------
    until
        Speed at which it ends [rad/s], 0 or more.
    drive
        Drive torque, with the rotation; None when the drive is off.
    load
        Load and drag torque, against the rotation; None for none.
    factor
        By which the drive torque is multiplied [-], 0 or more.
    """

    until: float
    drive: TorqueCurve | None = None
    load: TorqueCurve | None = None
    factor: float = 1.0

    def __post_init__(self) -> None:
        check.not_negative("speed at the end of a phase", self.until, "rad/s")
        check.not_negative("drive torque factor", self.factor)

    @property
    def net(self) -> NetTorque:
        """Drive less load."""
        return NetTorque(self.drive, self.load, self.factor)


def leg_of(
    coupled: CoupledRotor,
    phase: Phase,
    speed: float,
    critical: float | None,
    longest: float | None,
) -> Leg:
    """Make a phase from a speed ready for integration, or refuse it."""
    for curve in (phase.drive, phase.load):
        if curve is not None:
            curve.require(speed)
            curve.require(phase.until)
    duration, turns = require_way(phase.net, coupled.inertia, speed, phase.until, critical)
    if turns > MOST_TURNS:
        raise ModelError(
            f"the run from {speed:.6g} to {phase.until:.6g} rad/s takes about {turns:.3g} turns "
            f"({duration:.3g} s); the integration covers {MOST_TURNS:,}. Use a smaller range of "
            "speeds, or the passage at the constant acceleration that this torque gives"
        )
    _require_steps(coupled, duration, phase.until)
    rotor = coupled.rotor
    cycle = 2.0 * math.pi / rotor.natural_frequency
    damping = max(rotor.damping_ratio, 0.005)
    window = max(50.0 * cycle, 10.0 / (damping * rotor.natural_frequency), 0.02 * duration)
    patience = 20.0 * duration + 20.0 * window if longest is None else longest
    check.positive("longest time", patience, "s")
    drive, load = phase.drive, phase.load
    return Leg(
        _nothing if drive is None else drive.held(phase.factor),
        _nothing if load is None else load.held(),
        phase.until,
        window,
        patience,
    )


def _require_steps(coupled: CoupledRotor, duration: float, speed: float) -> None:
    """Refuse a rotor whose fastest motion, of a light support, forces steps without number."""
    steps = duration * coupled.fastest_rate(speed) / 4.0
    if steps > MOST_STEPS:
        raise ModelError(
            f"the run would need about {steps:.3g} steps, more than {MOST_STEPS:,} (hours): "
            "the support moves far faster than the rotor; leave out its mass, or its mass and "
            "damping"
        )


def _nothing(_: float) -> float:
    return 0.0


def require_way(
    net: NetTorque, inertia: float, start: float, end: float, critical: float | None
) -> tuple[float, float]:
    """Time [s] and turns of a run without whirl, or refuse torques that do not lead to its end.

    Raises
    ------
    ModelError
        If drive less load is not of the sign needed all the way; the message names the first speed
        at which it is not, and on which side of the critical it lies.
    """
    if start == end:
        raise ModelError(f"a phase begins and ends at {start:g} rad/s; nothing would change")
    duration, turns = net.run_time(inertia, start, end)
    if math.isfinite(turns):
        return duration, turns
    up = end > start
    speeds = net.grid(min(start, end), max(start, end))
    wrong = net.at(speeds) * (1.0 if up else -1.0) <= 0.0
    ordered = speeds[wrong] if up else speeds[wrong][::-1]
    at = float(ordered[0])
    balances = net.balances(min(start, end), max(start, end))
    if balances and at not in (start, end):
        at = min(balances, key=lambda w: abs(w - at))
    where = ""
    if critical is not None and (at < critical) == up:
        where = f", {'below' if up else 'above'} the critical speed of {critical:.6g} rad/s"
    what = (
        "the drive torque does not exceed the load torque"
        if up
        else "no torque slows the rotor further"
    )
    remedy = (
        "give more drive torque or less load, or end the run-up below that speed"
        if up
        else "end the run above that speed, or give the drag there"
    )
    raise ModelError(
        f"{what} at {at:.6g} rad/s{where}: the speed {end:.6g} rad/s is never reached; {remedy}"
    )
