"""Forces of a whirling rotor: on bearings, pedestals and ground, within the shaft; energy."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.orbits import Orbits, orbits_of
from reportgen.rotor.stations.response import Response
from reportgen.rotor.stations.shaft import Complex


@dataclass(frozen=True, eq=False)
class BearingForces:
    """Complex force amplitudes [N, 0-peak] at each bearing or seal, (B, 2, S) in (x, y).

    ``bearing``: of the shaft on the bearing. ``ground``: of the pedestal's spring and damper
    on the ground (that on the bearing where there is no pedestal).
    """

    bearing: Complex
    ground: Complex

    @property
    def bearing_ellipse(self) -> Orbits:
        """Largest and least force on the bearing over a turn, (B, S)."""
        return _ellipse(self.bearing)

    @property
    def ground_ellipse(self) -> Orbits:
        """Largest and least force on the ground over a turn, (B, S)."""
        return _ellipse(self.ground)


def _ellipse(force: Complex) -> Orbits:
    x, y = force[:, 0], force[:, 1]
    return orbits_of((x + 1j * y) / 2, (x - 1j * y) / 2)


def _real(forward: Complex, backward: Complex) -> tuple[Complex, Complex]:
    return forward + backward, -1j * (forward - backward)


def _support_state(response: Response, index: int) -> tuple[Complex, Complex, Complex]:
    """Motion relative to the pedestal (4, S), reaction (4, S), pedestal motion (2, S)."""
    support = response.model.supports[index]
    f, b = response.forward[support.node], response.backward[support.node]
    x, y = _real(f, b)
    q = np.stack([x[0], y[0], x[1], y[1]])
    pedestal = np.zeros((2, response.speeds.size), dtype=np.complex128)
    if support.pedestal >= 0:
        pedestal[:] = _real(
            response.pedestal_forward[support.pedestal],
            response.pedestal_backward[support.pedestal],
        )
        q[:2] -= pedestal
    at = support.bearing.coefficients.at(response.speeds)
    w = response.speeds[:, None, None]
    z = at.stiffness + 1j * w * at.damping - w**2 * at.inertia
    return q, np.einsum("sij,js->is", z, q), pedestal


def bearing_forces(response: Response) -> BearingForces:
    """Find the dynamic forces on bearings and into the ground.

    Parameters
    ----------
    response
        To unbalance or bow.

    Returns
    -------
    BearingForces
        In the order of the rotor's bearings.
    """
    model, w = response.model, response.speeds
    shape = (len(model.supports), 2, w.size)
    bearing, ground = np.zeros(shape, complex), np.zeros(shape, complex)
    for i, support in enumerate(model.supports):
        _, reaction, moved = _support_state(response, i)
        bearing[i] = ground[i] = reaction[:2]
        pedestal = support.bearing.pedestal
        if pedestal is not None:
            k, c = np.array(pedestal.stiffness), np.array(pedestal.damping)
            ground[i] = (k[:, None] + 1j * w * c[:, None]) * moved
    return BearingForces(bearing, ground)


@dataclass(frozen=True, eq=False)
class ShaftLoads:
    """Internal loads at both ends of every element.

    ``moment`` [N m] and ``shear`` [N] ellipses, 0-peak, arrays (E, 2, S); ``stress``: largest
    nominal bending stress over the circumference and the turn [Pa, 0-peak], (E, 2, S).
    """

    moment: Orbits
    shear: Orbits
    stress: Real


def shaft_loads(response: Response, concentration: float = 1.0) -> ShaftLoads:
    """Find bending moment, shear force and stress along the whirling shaft.

    Parameters
    ----------
    response
        To unbalance (a bow's own shape is taken off first).
    concentration
        Factor on the nominal stress, 1 or above.

    Notes
    -----
    End loads of each element from its own stiffness and inertia, with the shapes the
    response was found with: in balance with the neighbours to rounding. The moment turns
    with the shaft in forward circular whirl; the stress is then steady in the shaft, and
    alternates by the backward part. The half-axes bound it.
    """
    if not concentration >= 1:
        raise ModelError(f"stress concentration factor is {concentration:g}; give 1 or above")
    model, e, w = response.model, response.model.elements, response.speeds
    ends = []
    for sign, q in ((-1.0, response.forward - response.bow[..., None]), (1.0, response.backward)):
        both = np.concatenate([q[:-1], q[1:]], axis=1)
        elastic = np.einsum("eij,ejs->eis", model.element_stiffness, both)
        if sign > 0 and model.has_internal_damping:
            elastic = elastic + 2j * w * np.einsum("eij,ejs->eis", e.internal, both)
        whole = response.forward if sign < 0 else response.backward
        moving = np.concatenate([whole[:-1], whole[1:]], axis=1)
        inertia = e.mass + sign * e.polar
        ends.append(elastic - w**2 * np.einsum("eij,ejs->eis", inertia, moving))
    # Left and right end with one sign: what the right part does to the left part.
    flip = np.array([-1.0, 1.0])[:, None]
    f, b = ends
    moment = orbits_of(flip * f[:, 1::2], flip * b[:, 1::2])
    shear = orbits_of(flip * f[:, 0::2], flip * b[:, 0::2])
    stress = concentration * moment.major / e.section_modulus[..., None]
    return ShaftLoads(moment, shear, stress)


@dataclass(frozen=True, eq=False)
class EnergyBalance:
    """Work per turn [J], (S,): put in by unbalance, taken out by supports; their mismatch.

    ``supports`` (B, S) includes cross-coupled stiffness, which may give energy (negative);
    ``internal`` is that of internal damping; ``pedestals`` (B, S) of pedestal dampers.
    ``mismatch``: |input − output| over the larger of the sums of absolute parts.
    """

    unbalance: Real
    supports: Real
    pedestals: Real
    internal: Real
    mismatch: Real


def energy_balance(response: Response) -> EnergyBalance:
    """Compare the work of the exciting forces with what supports and damping take, per turn.

    ∮F dx = π Im(F x̄) for each harmonic pair. Only motions and part forces enter, so that an
    error in assembly or solution shows.
    """
    model, w = response.model, response.speeds
    # Forward force and motion: both planes together count twice the product.
    put = 2 * np.pi * (response.load * response.forward.conj()).imag.sum((0, 1))
    shape = (len(model.supports), w.size)
    taken, ground = np.zeros(shape), np.zeros(shape)
    for i, support in enumerate(model.supports):
        q, reaction, moved = _support_state(response, i)
        taken[i] = np.pi * (reaction * q.conj()).imag.sum(0)
        pedestal = support.bearing.pedestal
        if pedestal is not None:
            c = np.array(pedestal.damping)[:, None]
            ground[i] = np.pi * (w * c * np.abs(moved) ** 2).sum(0)
    internal = np.zeros(w.size)
    if model.has_internal_damping:
        # Steady forward whirl does not flex the turning shaft; backward whirl does, twice a turn.
        b = response.backward
        internal = 2 * np.pi * (2 * w * b.conj() * model.internal.times(b)).real.sum((0, 1))
    out = taken.sum(0) + ground.sum(0) + internal
    size = np.abs(taken).sum(0) + np.abs(ground).sum(0) + np.abs(internal) + np.abs(put)
    # Elastic work swings to and fro within a turn; below its rounding there is no energy
    # left to compare (a rotor without damping).
    swing = np.zeros(w.size)
    for q in (response.forward, response.backward):
        swing += np.abs(q.conj() * model.stiffness.times(q)).sum((0, 1))
    floor = 1e-9 * swing + 1e-300
    return EnergyBalance(put, taken, ground, internal, np.abs(put - out) / np.maximum(size, floor))
