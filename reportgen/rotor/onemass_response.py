"""Whirl of the one-mass rotor at constant speed; equations: `reportgen.rotor.onemass`."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check
from reportgen.rotor.onemass_model import OneMassRotor

STANDARD_GRAVITY = 9.80665
"""Standard acceleration of free fall, m/s² (ISO 80000-3)."""


def response(rotor: OneMassRotor, speed: ArrayLike) -> NDArray[np.complex128]:
    """Displacement of the disc at constant speed, in the frame that turns with the rotor.

    Parameters
    ----------
    rotor
        The rotor.
    speed
        Speed of rotation Ω [rad/s], any shape, 0 or more.

    Returns
    -------
    ndarray of complex
        Z [m] (0-peak), of the shape of `speed`. Its angle is that of the whirl ahead of the
        unbalance, so a lag is negative. On rigid supports without bow
        Z = e r² / (1 − r² + 2iζr) with r = Ω/ωₙ.

    Raises
    ------
    ModelError
        If a speed is negative or not finite, or where the response has no bound (a speed that is
        exactly an undamped critical speed).
    """
    return _displacements(rotor, speed)[0]


def support_response(rotor: OneMassRotor, speed: ArrayLike) -> NDArray[np.complex128]:
    """Displacement of the shaft ends at constant speed, in the turning frame.

    Parameters
    ----------
    rotor
        The rotor.
    speed
        Speed of rotation [rad/s], any shape.

    Returns
    -------
    ndarray of complex
        Displacement [m] (0-peak), zero on rigid supports.

    Raises
    ------
    ModelError
        As in `response`.
    """
    return _displacements(rotor, speed)[1]


def phase_lag(rotor: OneMassRotor, speed: ArrayLike) -> NDArray[np.float64]:
    """Angle by which the whirl of the disc lags the unbalance.

    Parameters
    ----------
    rotor
        The rotor; it must have unbalance or bow.
    speed
        Speed of rotation [rad/s], any shape.

    Returns
    -------
    ndarray of float
        Lag in (−π, π] [rad]: on rigid supports without bow atan2(2ζr, 1 − r²), 0 at rest, π/2 at
        r = 1, π far above.

    Raises
    ------
    ModelError
        As in `response`, and if the rotor has neither unbalance nor bow.
    """
    if rotor.eccentricity == 0.0 and rotor.bow == 0.0:
        raise ModelError("the rotor has neither unbalance nor bow, so its whirl has no phase")
    if rotor.support is None and rotor.bow == 0.0 and rotor.damping_ratio > 0.0:
        ratio = check.speeds(speed) / rotor.natural_frequency
        return np.asarray(np.arctan2(2.0 * rotor.damping_ratio * ratio, 1.0 - ratio**2))
    return lag_of(response(rotor, speed))


def lag_of(displacement: NDArray[np.complex128]) -> NDArray[np.float64]:
    """Lag of complex displacements in (−π, π] [rad]."""
    lag = -np.angle(displacement)
    return np.asarray(np.where(lag <= -math.pi, math.pi, lag))


def magnification(rotor: OneMassRotor, speed: ArrayLike) -> NDArray[np.float64]:
    """Amplitude of the disc over the eccentricity, |Z|/e.

    Parameters
    ----------
    rotor
        The rotor; its eccentricity must not be zero.
    speed
        Speed of rotation [rad/s], any shape.

    Returns
    -------
    ndarray of float
        |Z|/e [-].

    Raises
    ------
    ModelError
        As in `response`, and if the eccentricity is zero.
    """
    if rotor.eccentricity == 0.0:
        raise ModelError("magnification is amplitude over eccentricity; the eccentricity is 0")
    return np.asarray(np.abs(response(rotor, speed)) / rotor.eccentricity)


def static_sag(rotor: OneMassRotor, gravity: float = STANDARD_GRAVITY) -> float:
    """Deflection of the disc of a horizontal rotor under its own weight.

    Parameters
    ----------
    rotor
        The rotor.
    gravity
        Acceleration of free fall [m/s²].

    Returns
    -------
    float
        m g / k, plus on flexible supports (m + m_s) g / k_s [m].

    Raises
    ------
    ModelError
        If `gravity` is not finite or negative.
    """
    check.not_negative("gravity", gravity, "m/s²")
    sag = rotor.mass * gravity / rotor.stiffness
    if rotor.support is not None:
        sag += (rotor.mass + rotor.support.mass) * gravity / rotor.support.stiffness
    return sag


@dataclass(frozen=True)
class Forces:
    """Forces at constant speed in the turning frame, total of both bearings.

    Parameters
    ----------
    shaft
        Elastic force of the bent shaft, k (z − y_s − b) [N] (0-peak), complex.
    ground
        Force into the ground [N] (0-peak), complex: on rigid supports through the shaft and the
        external damping, k (z − b) + icΩz; on flexible supports through the support and the
        external damping, (k_s + ic_sΩ) y_s + icΩz.
    """

    shaft: NDArray[np.complex128]
    ground: NDArray[np.complex128]


def bearing_force(rotor: OneMassRotor, speed: ArrayLike) -> Forces:
    """Give the forces that the whirl puts on the shaft ends and into the ground.

    Parameters
    ----------
    rotor
        The rotor.
    speed
        Speed of rotation [rad/s], any shape.

    Returns
    -------
    Forces
        The turning part alone, without the weight. Without bow and on rigid supports the ground
        force has the size |Z|√(k² + (cΩ)²).

    Raises
    ------
    ModelError
        As in `response`.
    """
    speed = check.speeds(speed)
    disc, ends = _displacements(rotor, speed)
    shaft = rotor.stiffness * (disc - ends - rotor.bow_vector)
    drag = 1j * rotor.damping * speed * disc
    if rotor.support is None:
        return Forces(shaft=shaft, ground=shaft + drag)
    own = rotor.support
    return Forces(shaft=shaft, ground=(own.stiffness + 1j * own.damping * speed) * ends + drag)


def _displacements(
    rotor: OneMassRotor, speed: ArrayLike
) -> tuple[NDArray[np.complex128], NDArray[np.complex128]]:
    """Displacements of the disc and of the shaft ends in the turning frame."""
    omega = check.speeds(speed)
    whirl = np.asarray(1j * omega)
    k = rotor.stiffness
    inertia = rotor.mass * omega**2
    disc_stiffness = np.asarray(rotor.damping * whirl - inertia, dtype=np.complex128)
    bow_force = k * rotor.bow_vector
    unbalance = (rotor.eccentricity * inertia).astype(np.complex128)
    if rotor.support is None:
        disc = _divide(unbalance + bow_force, k + disc_stiffness, k, omega)
        return disc, np.zeros_like(disc)
    own = rotor.support
    ends_stiffness = np.asarray(
        own.stiffness + own.damping * whirl - own.mass * omega**2, dtype=np.complex128
    )
    # (k + D)(k + S) − k² written without the difference of near-equal squares.
    determinant = k * (disc_stiffness + ends_stiffness) + disc_stiffness * ends_stiffness
    scale = k * own.stiffness
    disc = _divide(
        (k + ends_stiffness) * unbalance + ends_stiffness * bow_force, determinant, scale, omega
    )
    ends = _divide(k * unbalance - disc_stiffness * bow_force, determinant, scale, omega)
    return disc, ends


def _divide(
    force: NDArray[np.complex128],
    stiffness: NDArray[np.complex128],
    scale: float,
    speed: NDArray[np.float64],
) -> NDArray[np.complex128]:
    # Closer than a few roundings to an undamped critical the quotient is noise, not a response.
    lost = np.abs(stiffness) <= 8.0 * np.finfo(np.float64).eps * scale
    if np.any(lost):
        at = float(np.broadcast_to(speed, lost.shape)[lost][0])
        raise ModelError(
            f"at {at:g} rad/s the undamped response has no bound; give damping or leave that "
            "speed out"
        )
    return np.asarray(force / stiffness, dtype=np.complex128)
