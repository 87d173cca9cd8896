"""Speeds at which the drive just carries load and whirl: where a rotor can hang."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from reportgen.rotor.onemass_model import OneMassRotor
from reportgen.rotor.onemass_peak import resonance_peak
from reportgen.rotor.transient.coupled import (
    SPEED,
    Complexes,
    CoupledRotor,
    Floats,
    steady_motion,
    whirl_torque,
)
from reportgen.rotor.transient.torque import NetTorque, TorqueCurve, sign_changes


@dataclass(frozen=True)
class SteadyState:
    """A speed at which drive, load and whirl balance.

    Parameters
    ----------
    speed
        [rad/s].
    amplitude
        Of the disc [m] (0-peak).
    whirl_torque
        Torque that the whirl draws there [N·m].
    growth
        Largest real part of the exponents of small deviations [1/s].
    """

    speed: float
    amplitude: float
    whirl_torque: float
    growth: float

    @property
    def stable(self) -> bool:
        """Whether small deviations die out: a speed at which the rotor can hang."""
        return self.growth < 0.0


def steady_states(
    rotor: OneMassRotor,
    inertia: float,
    drive: TorqueCurve,
    load: TorqueCurve | None,
    low: float,
    high: float,
    factor: float = 1.0,
) -> tuple[SteadyState, ...]:
    """Speeds between two speeds where the drive just carries load and whirl.

    The energy balance of the steady whirl: factor·T_d(Ω) − T_l(Ω) = Ω(c|z|² + c_s|y|²). No
    integration; the roots are found on a grid that is dense about the critical speed.

    Parameters
    ----------
    rotor, inertia, drive, load, factor
        As in `run_up`.
    low, high
        Range of speeds [rad/s].

    Returns
    -------
    tuple of SteadyState
        In order of speed; empty if the drive exceeds load and whirl everywhere.

    Raises
    ------
    ModelError
        If a torque table does not cover the range.
    """
    return balances_of(CoupledRotor(rotor, inertia), NetTorque(drive, load, factor), low, high)


def balances_of(
    coupled: CoupledRotor, net: NetTorque, low: float, high: float
) -> tuple[SteadyState, ...]:
    """Find the steady states of a coupled rotor under a net torque; see `steady_states`."""

    def balance(speeds: Floats) -> Floats:
        return np.asarray(net.at(speeds) - whirl_torque(coupled, speeds))

    grid = dense_grid(coupled.rotor, net, low, high)
    return tuple(_state(coupled, net, w) for w in sign_changes(balance, grid))


def dense_grid(rotor: OneMassRotor, net: NetTorque, low: float, high: float) -> Floats:
    """Give speeds [rad/s] dense about the critical speed that hold every row of the tables."""
    critical = resonance_peak(rotor).speed
    grid = net.grid(low, high)
    if critical is not None:
        width = max(rotor.damping_ratio, 1e-6) * critical
        spread = critical + width * np.sinh(np.linspace(-12.0, 12.0, 2401))
        grid = np.unique(np.concatenate([grid, spread[(spread > low) & (spread < high)]]))
    return grid


def _state(coupled: CoupledRotor, net: NetTorque, speed: float) -> SteadyState:
    at = np.asarray([speed])
    motion = steady_motion(coupled, at)[:, 0]
    exponents = np.linalg.eigvals(_jacobian(coupled, net, motion, speed))
    torque = float(whirl_torque(coupled, at)[0])
    return SteadyState(speed, float(abs(motion[0])), torque, float(exponents.real.max()))


def _jacobian(coupled: CoupledRotor, net: NetTorque, motion: Complexes, speed: float) -> Floats:
    """Differentiate the rates of (Re and Im of the motions, θ̇), by central differences.

    The rates are of second degree in the motions, so that the differences are exact but for
    rounding; steps are scaled to the state.
    """
    drive = (lambda _: 0.0) if net.drive is None else net.drive.held(net.factor)
    load = (lambda _: 0.0) if net.load is None else net.load.held()
    rates = coupled.rates(drive, load)
    n = motion.size
    sizes = np.maximum(np.abs(motion), coupled.scale()[:n])

    def full(real: Floats) -> Floats:
        state = np.zeros(n + 5, dtype=np.complex128)
        state[:n] = (real[:n] + 1j * real[n : 2 * n]) * sizes
        state[SPEED] = real[-1] * speed
        rate = rates(0.0, state)
        moved = rate[:n] / sizes
        return np.concatenate([moved.real, moved.imag, [rate[SPEED].real / speed]])

    scaled = motion / sizes
    at = np.concatenate([scaled.real, scaled.imag, [1.0]])
    step = 1e-5
    columns = []
    for j in range(at.size):
        away = np.zeros(at.size)
        away[j] = step
        columns.append((full(at + away) - full(at - away)) / (2.0 * step))
    return np.array(columns).T
