"""One-mass rotor on supports that differ between the horizontal and the vertical direction.

The two directions have criticals of their own. The orbit is an ellipse,

    z = F e^{iΩt} + B e^{−iΩt},

with the semi-axes |F| + |B| and ||F| − |B||, its long axis at (arg F + arg B)/2, described in the
sense of rotation where |F| > |B|. Between the criticals of the two directions the phases of x and y
have turned by π against each other and the whirl runs backward, unless damping prevents it.

Internal damping does not act on F, which turns with the rotor, but opposes B, which bends the
fibres at 2Ω: the force on it is 2iΩc_i B.
"""

from __future__ import annotations

import itertools
from dataclasses import dataclass, replace

import numpy as np
from numpy.polynomial import Polynomial
from numpy.typing import ArrayLike, NDArray

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check
from reportgen.rotor.onemass_model import IsotropicSupport, OneMassRotor
from reportgen.rotor.onemass_peak import (
    Peak,
    positive_roots,
    quotient,
    resonance_peaks,
    undamped_criticals,
)

Complexes = NDArray[np.complex128]


@dataclass(frozen=True)
class AnisotropicSupport:
    """Support with the horizontal and the vertical as principal directions, total of both bearings.

    Parameters
    ----------
    horizontal, vertical
        Stiffness, damping and mass that act in each direction.
    """

    horizontal: IsotropicSupport
    vertical: IsotropicSupport


@dataclass(frozen=True)
class Orbit:
    """Elliptical orbit of the disc at constant speed.

    Parameters
    ----------
    forward, backward
        F and B [m], complex, of the shape of the speeds.
    """

    forward: Complexes
    backward: Complexes

    @property
    def horizontal(self) -> Complexes:
        """Phasor X of the horizontal motion x = Re(X e^{iΩt}) [m]."""
        return np.asarray(self.forward + np.conj(self.backward))

    @property
    def vertical(self) -> Complexes:
        """Phasor Y of the vertical motion [m]."""
        return np.asarray(-1j * (self.forward - np.conj(self.backward)))

    @property
    def semi_major(self) -> NDArray[np.float64]:
        """Half the long axis, the greatest amplitude [m] (0-peak)."""
        return np.asarray(np.abs(self.forward) + np.abs(self.backward))

    @property
    def semi_minor(self) -> NDArray[np.float64]:
        """Half the short axis [m], 0 or more."""
        return np.asarray(np.abs(np.abs(self.forward) - np.abs(self.backward)))

    @property
    def inclination(self) -> NDArray[np.float64]:
        """Angle of the long axis from the horizontal in (−π/2, π/2] [rad]; 0 for a circle."""
        product = self.forward * self.backward
        angle = 0.5 * np.angle(np.where(product == 0.0, 1.0, product))
        return np.asarray(np.where(angle <= -0.5 * np.pi, 0.5 * np.pi, angle))

    @property
    def sense(self) -> NDArray[np.int_]:
        """1 where the whirl runs with the rotation, −1 against it, 0 where it is a line."""
        difference = np.abs(self.forward) - np.abs(self.backward)
        flat = np.abs(difference) <= 1e-12 * self.semi_major
        return np.asarray(np.where(flat, 0, np.sign(difference)).astype(np.int_))


def orbit_response(rotor: OneMassRotor, support: AnisotropicSupport, speed: ArrayLike) -> Orbit:
    """Orbit of the disc at constant speed on supports that differ in the two directions.

    Parameters
    ----------
    rotor
        The rotor, its own `support` left out.
    support
        The supports.
    speed
        Speed of rotation [rad/s], any shape.

    Returns
    -------
    Orbit
        The angle of the rotor is Ωt.

    Raises
    ------
    ModelError
        If the rotor has a support of its own, or a speed is exactly an undamped critical.
    """
    _require_no_own(rotor)
    omega = check.speeds(speed)
    matrix, right = _phasor_system(rotor, support, omega)
    try:
        phasors = np.linalg.solve(matrix, right[..., None])[..., 0]
    except np.linalg.LinAlgError:
        raise ModelError(
            "at one of the speeds the undamped response has no bound; give damping or leave that "
            "speed out"
        ) from None
    x, y = phasors[..., 0], phasors[..., 1]
    return Orbit(
        forward=np.asarray(0.5 * (x + 1j * y)),
        backward=np.asarray(0.5 * np.conj(x - 1j * y)),
    )


@dataclass(frozen=True)
class SplitCriticals:
    """Critical speeds of the two directions.

    Parameters
    ----------
    horizontal, vertical
        Undamped critical speeds of each direction, rising [rad/s].
    horizontal_peaks, vertical_peaks
        Peaks of the damped response in each direction.
    """

    horizontal: tuple[float, ...]
    vertical: tuple[float, ...]
    horizontal_peaks: tuple[Peak, ...]
    vertical_peaks: tuple[Peak, ...]


def split_criticals(rotor: OneMassRotor, support: AnisotropicSupport) -> SplitCriticals:
    """Critical speeds and response peaks of each direction.

    Parameters
    ----------
    rotor
        The rotor, its own `support` left out, without internal damping (which couples the two
        directions).
    support
        The supports.

    Returns
    -------
    SplitCriticals
        One critical a direction on massless supports, two where the support has mass.

    Raises
    ------
    ModelError
        If the rotor has internal damping, a support of its own, or no unbalance or bow.
    """
    along = _directions(rotor, support)
    bare = [
        replace(one, damping_ratio=0.0, support=None if own is None else replace(own, damping=0.0))
        for one in along
        for own in (one.support,)
    ]
    criticals = [tuple(undamped_criticals(one)) for one in bare]
    peaks = [resonance_peaks(one) for one in along]
    return SplitCriticals(criticals[0], criticals[1], peaks[0], peaks[1])


def backward_ranges(
    rotor: OneMassRotor, support: AnisotropicSupport
) -> tuple[tuple[float, float], ...]:
    """Ranges of speed where the disc whirls against the rotation.

    Parameters
    ----------
    rotor, support
        As in `split_criticals`.

    Returns
    -------
    tuple of pairs
        Lower and upper end of each range [rad/s]; empty if damping or equal stiffness leaves
        none. |F|² − |B|² has the sign of Re(X iȲ), a quotient of polynomials in the speed whose
        changes of sign are its roots.

    Raises
    ------
    ModelError
        As in `split_criticals`.
    """
    along = _directions(rotor, support)
    (upper_x, lower_x), (upper_y, lower_y) = (quotient(one) for one in along)
    product = upper_x * lower_y * _conjugate(upper_y * lower_x)
    sign = Polynomial(np.real(product.coef))
    # A flat numerator at standstill is no change of sense; every change is a root of odd order.
    edges = [0.0, *positive_roots(sign)]
    edges.append(2.0 * edges[-1] + 1.0)
    ranges: list[tuple[float, float]] = []
    for low, high in itertools.pairwise(edges):
        if high - low <= 1e-6 * high or float(sign(0.5 * (low + high))) >= 0.0:
            continue
        ranges.append((low * rotor.natural_frequency, high * rotor.natural_frequency))
    return tuple(ranges)


def _directions(
    rotor: OneMassRotor, support: AnisotropicSupport
) -> tuple[OneMassRotor, OneMassRotor]:
    _require_no_own(rotor)
    if rotor.internal_damping > 0.0:
        raise ModelError(
            "internal damping couples the two directions; set it to 0 here, or use the orbit "
            "response, which takes it in"
        )
    return (
        replace(rotor, support=support.horizontal),
        replace(rotor, support=support.vertical),
    )


def _require_no_own(rotor: OneMassRotor) -> None:
    if rotor.support is not None:
        raise ModelError("the rotor has a support of its own; give the supports once")


def _conjugate(polynomial: Polynomial) -> Polynomial:
    return Polynomial(np.conj(polynomial.coef))


def _phasor_system(
    rotor: OneMassRotor, support: AnisotropicSupport, omega: NDArray[np.float64]
) -> tuple[Complexes, Complexes]:
    """Dynamic stiffness and load of (X, Y, X_s, Y_s), shapes (..., 4, 4) and (..., 4)."""
    matrix = np.zeros((*omega.shape, 4, 4), dtype=np.complex128)
    right = np.zeros((*omega.shape, 4), dtype=np.complex128)
    k, bow = rotor.stiffness, rotor.stiffness * rotor.bow_vector
    inertia = rotor.mass * omega**2
    own = 1j * rotor.damping * omega - inertia
    # Shaft and internal damping act on the deflection (X − X_s, Y − Y_s): c_i (ẋ + Ωy, ẏ − Ωx).
    shaft = np.zeros((*omega.shape, 2, 2), dtype=np.complex128)
    shaft[..., 0, 0] = shaft[..., 1, 1] = k + 1j * rotor.internal_damping * omega
    shaft[..., 0, 1] = rotor.internal_damping * omega
    shaft[..., 1, 0] = -rotor.internal_damping * omega
    matrix[..., :2, :2] = matrix[..., 2:, 2:] = shaft
    matrix[..., :2, 2:] = matrix[..., 2:, :2] = -shaft
    for row, along in enumerate((support.horizontal, support.vertical)):
        matrix[..., row, row] += own
        matrix[..., row + 2, row + 2] += (
            along.stiffness + 1j * along.damping * omega - along.mass * omega**2
        )
    for row, turn in enumerate((1.0, -1j)):
        right[..., row] = turn * (rotor.eccentricity * inertia + bow)
        right[..., row + 2] = -turn * bow
    return matrix, right
