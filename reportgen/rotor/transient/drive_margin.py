"""The least drive torque with which a rotor passes its critical speed."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check
from reportgen.rotor.onemass_model import OneMassRotor
from reportgen.rotor.onemass_peak import resonance_peak
from reportgen.rotor.transient.balance import dense_grid
from reportgen.rotor.transient.coupled import CoupledRotor, whirl_torque
from reportgen.rotor.transient.stepper import REACHED
from reportgen.rotor.transient.torque import NetTorque, TorqueCurve
from reportgen.rotor.transient.torque_result import TorqueRun
from reportgen.rotor.transient.torque_run import run_up

_PAST = 1.4
"""Share of the critical speed beyond which a passage is behind: r² = 2, amplitude near 2e."""


@dataclass(frozen=True, eq=False)
class DriveMargin:
    """Least drive torque that passes the critical speed.

    Parameters
    ----------
    least_factor
        Least factor on the drive torque found to pass [-].
    stalls_at
        Largest factor found not to pass [-]; the bracket is (stalls_at, least_factor).
    quasi_static_factor
        Factor at which the drive exceeds load and steady whirl at every speed [-]: enough however
        slowly the rotor passes.
    load_factor
        Factor at which the drive just exceeds the load alone at every speed [-].
    stall
        The run at `stalls_at`; None where the load alone decides.
    passed
        The run at `least_factor`.
    reason
        What decides the least torque, in words.
    """

    least_factor: float
    stalls_at: float
    quasi_static_factor: float
    load_factor: float
    stall: TorqueRun | None
    passed: TorqueRun
    reason: str

    @property
    def margin(self) -> float:
        """Share by which the drive torque as given exceeds the least that passes [-]."""
        return 1.0 / self.least_factor - 1.0


def least_drive_torque(
    rotor: OneMassRotor,
    inertia: float,
    drive: TorqueCurve,
    load: TorqueCurve | None,
    target: float,
    start_speed: float = 0.0,
    *,
    tolerance: float = 1e-3,
    progress: Callable[[float], None] | None = None,
) -> DriveMargin:
    """Find the least factor on the drive torque with which the rotor passes its critical speed.

    Bisection between the factor that only just carries the load and the one that exceeds load and
    steady whirl everywhere. A run passes when it reaches 1.4 times the critical speed (or the
    target, if lower); that more torque passes where less does is taken for granted.

    Parameters
    ----------
    rotor, inertia, drive, load, target, start_speed
        As in `run_up`.
    tolerance
        Relative width of the bracket left, within [1e-6, 0.1].
    progress
        Called after each run with the width of the bracket left, relative.

    Returns
    -------
    DriveMargin
        Bracket and the runs at its ends.

    Raises
    ------
    ModelError
        As in `run_up`; if there is no critical speed between start and target; if the drive gives
        no torque at some speed on the way, which no factor mends.
    """
    if not 1e-6 <= tolerance <= 0.1:
        raise ModelError(f"tolerance is {tolerance:g}; it must be within 1e-6 and 0.1")
    critical = _critical(rotor, start_speed, target)
    load_factor, quasi = _static_factors(rotor, inertia, drive, load, (start_speed, target))
    end = min(target, _PAST * critical)

    def run(factor: float) -> TorqueRun:
        return run_up(rotor, inertia, drive, load, end, start_speed, factor=factor, rtol=1e-7)

    low = load_factor * (1.0 + tolerance)
    high = max(quasi * (1.0 + tolerance), low)
    passed = run(high)
    while passed.outcome != REACHED:
        high *= 1.5
        passed = run(high)
    stall: TorqueRun | None = None
    if low <= 0.0:
        low = 1e-3 * high
    trial = run(low) if low < high else passed
    if trial.outcome == REACHED:
        reason = "the load alone decides: a drive that only just carries it passes the critical"
        return DriveMargin(low, load_factor, quasi, load_factor, None, trial, reason)
    stall = trial
    while high - low > tolerance * high:
        factor = 0.5 * (low + high)
        trial = run(factor)
        if trial.outcome == REACHED:
            high, passed = factor, trial
        else:
            low, stall = factor, trial
        if progress is not None:
            progress((high - low) / high)
    reason = f"the whirl decides: with {low:.4g} times the drive torque, {stall.reason}"
    return DriveMargin(high, low, quasi, load_factor, stall, passed, reason)


def _critical(rotor: OneMassRotor, start: float, target: float) -> float:
    check.not_negative("start speed", start, "rad/s")
    critical = resonance_peak(rotor).speed
    if critical is None or not start < critical < target:
        what = "there is none" if critical is None else f"it is {critical:.6g} rad/s"
        raise ModelError(
            f"no critical speed lies between {start:g} and {target:g} rad/s ({what}): "
            "there is nothing to pass"
        )
    return critical


def _static_factors(
    rotor: OneMassRotor,
    inertia: float,
    drive: TorqueCurve,
    load: TorqueCurve | None,
    ends: tuple[float, float],
) -> tuple[float, float]:
    """Least factors that carry the load alone, and load and steady whirl, at every speed."""
    coupled = CoupledRotor(rotor, inertia)
    speeds = dense_grid(rotor, NetTorque(drive, load), *ends)
    given = drive.at(speeds)
    if float(given.min()) <= 0.0:
        at = float(speeds[np.argmin(given)])
        raise ModelError(
            f"{drive.name} gives {given.min():.4g} N·m at {at:.6g} rad/s: no factor on it makes "
            "the rotor pass; end the run-up below that speed"
        )
    taken = np.zeros(speeds.size) if load is None else load.at(speeds)
    whirl = taken + whirl_torque(coupled, speeds)
    return max(float((taken / given).max()), 0.0), float((whirl / given).max())
