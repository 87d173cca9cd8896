"""What a run under torque did: record, outcome, hang, energies."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from reportgen.rotor import onemass_checks as check
from reportgen.rotor.transient.balance import SteadyState, balances_of
from reportgen.rotor.transient.coupled import (
    ANGLE,
    SPEED,
    Complexes,
    CoupledRotor,
    EnergyAudit,
    Floats,
)
from reportgen.rotor.transient.record import Peak, highest, refined, time_above
from reportgen.rotor.transient.stepper import CAPTURED, REACHED, Leg, Track
from reportgen.rotor.transient.torque import NetTorque


@dataclass(frozen=True, eq=False)
class TorqueRun:
    """What a run under torque did.

    Parameters
    ----------
    time
        Instants [s], shape (n,), at the ends of the integrator's steps.
    speed, angle
        Speed [rad/s] and angle [rad] of the rotor, shape (n,).
    acceleration
        Angular acceleration [rad/s²], shape (n,).
    displacement
        Of the disc in the frame at rest [m], complex, shape (n,).
    outcome
        ``"reached"`` the last speed asked for, ``"captured"`` below it (a stall: the speed hangs),
        or ``"out of time"``.
    critical_speed
        Speed of the steady peak [rad/s]; None if there is none.
    crossed
        Whether the speed went from one side of the critical to the other for good.
    crossing_time
        When it first met the critical speed [s]; None if never.
    peak
        Highest amplitude of the disc, when and at what speed.
    hang_speed
        Mean speed at which a captured rotor hangs [rad/s], None otherwise.
    hang_swing
        Half the range of speed in that hang [rad/s], None otherwise.
    hang_state
        The steady state, stable to small deviations, that it settles to: from the energy balance
        of drive, load and whirl, not from the integration. None where there is none near.
    audit
        Energies over the run.
    reason
        In words, what stopped it or why it is no passage; otherwise empty.
    """

    time: Floats
    speed: Floats
    angle: Floats
    acceleration: Floats
    displacement: Complexes
    outcome: str
    critical_speed: float | None
    crossed: bool
    crossing_time: float | None
    peak: Peak
    hang_speed: float | None
    hang_swing: float | None
    hang_state: SteadyState | None
    audit: EnergyAudit
    reason: str
    fine_time: Floats
    fine_amplitude: Floats
    fine_speed: Floats

    @property
    def amplitude(self) -> Floats:
        """|z| of the disc at the instants [m] (0-peak)."""
        return np.asarray(np.abs(self.displacement))

    @property
    def turns(self) -> float:
        """Turns made [-]."""
        return float(self.angle[-1] - self.angle[0]) / (2.0 * math.pi)

    def time_above(self, limit: float) -> float:
        """Time with an amplitude above a limit [s].

        Parameters
        ----------
        limit
            Amplitude [m] (0-peak), greater than 0.
        """
        check.positive("amplitude limit", limit, "m")
        return time_above(self.fine_time, self.fine_amplitude, limit)


def result_of(
    coupled: CoupledRotor,
    track: Track,
    outcome: str,
    critical: float | None,
    leg: Leg,
    net: NetTorque,
) -> TorqueRun:
    """Judge a track that ended in a leg."""
    time = np.array(track.time)
    states, rates = np.array(track.state), np.array(track.rate)
    speed, angle = states[:, SPEED].real.copy(), states[:, ANGLE].real.copy()
    fine = refined(time, states, rates, coupled.motions)
    peak = highest(fine)
    crossed, when = _crossing(time, speed, critical)
    hang = swing = state = None
    reason = ""
    if outcome == CAPTURED:
        late = time >= time[-1] - leg.window
        hang = float(np.trapezoid(speed[late], time[late]) / np.ptp(time[late]))
        swing = 0.5 * float(np.ptp(speed[late]))
        # The swing of speed itself may cross the critical: a rotor that hangs has not passed.
        crossed = False
        state = _settles_at(coupled, net, hang, (speed.min(), leg.until))
        reason = _stall(hang if state is None else state.speed, leg.until, critical)
    elif outcome != REACHED:
        crossed = False
        reason = (
            f"after {time[-1]:.4g} s the speed is {speed[-1]:.6g} rad/s and {leg.until:.6g} rad/s "
            "is not reached; it creeps: give more torque, or allow a longer time"
        )
    elif not crossed:
        reason = _no_passage(speed, critical)
    return TorqueRun(
        time=time,
        speed=speed,
        angle=angle,
        acceleration=rates[:, SPEED].real.copy(),
        displacement=states[:, 0] * np.exp(1j * angle),
        outcome=outcome,
        critical_speed=critical,
        crossed=crossed,
        crossing_time=when,
        peak=peak,
        hang_speed=hang,
        hang_swing=swing,
        hang_state=state,
        audit=coupled.audit(states[0], states[-1]),
        reason=reason,
        fine_time=fine.time,
        fine_amplitude=fine.amplitude,
        fine_speed=fine.speed,
    )


def _settles_at(
    coupled: CoupledRotor, net: NetTorque, hang: float, ends: tuple[float, float]
) -> SteadyState | None:
    """Give the stable steady state nearest to where the speed hangs, within 2 %."""
    low, high = max(min(ends), 0.98 * hang), min(max(ends), 1.02 * hang)
    near = [s for s in balances_of(coupled, net, low, high) if s.stable]
    return min(near, key=lambda s: abs(s.speed - hang)) if near else None


def _stall(hang: float, target: float, critical: float | None) -> str:
    if critical is None:
        return f"the speed hangs at {hang:.6g} rad/s and does not reach {target:.6g} rad/s"
    return (
        f"stalled at the critical speed: the whirl takes what the drive has to spare, and the "
        f"speed hangs at {hang:.6g} rad/s ({100.0 * hang / critical:.1f} % of the critical speed "
        f"{critical:.6g} rad/s), short of {target:.6g} rad/s"
    )


def _no_passage(speed: Floats, critical: float | None) -> str:
    if critical is None:
        return "there is no critical speed to pass: the steady response has no peak"
    return (
        f"the critical speed {critical:.6g} rad/s is not within the run's {speed.min():.6g} to "
        f"{speed.max():.6g} rad/s: this is no passage"
    )


def _crossing(time: Floats, speed: Floats, critical: float | None) -> tuple[bool, float | None]:
    if critical is None:
        return False, None
    side = np.sign(speed - critical)
    change = np.flatnonzero(side[:-1] * side[1:] <= 0.0)
    if change.size == 0:
        return False, None
    j = int(change[0])
    share = (critical - speed[j]) / (speed[j + 1] - speed[j]) if speed[j + 1] != speed[j] else 0.0
    top = float(speed.max())
    passed = bool(side.min() < 0.0 < side.max()) and top > critical
    return passed, float(time[j] + share * (time[j + 1] - time[j]))
