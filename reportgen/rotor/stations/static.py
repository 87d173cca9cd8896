"""Mass properties, and deflection and bearing loads under gravity."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp
import scipy.sparse.linalg as spl

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.model import Chain, Model
from reportgen.rotor.stations.planes import chain_sparse

STANDARD_GRAVITY = 9.80665


@dataclass(frozen=True)
class MassProperties:
    """Of the whole rotor.

    ``mass`` [kg]; ``centre`` of mass from the left end [m]; ``polar_inertia`` and
    ``diametral_inertia`` about the centre [kg m²]; ``shaft_mass`` [kg] the share of the
    sections.
    """

    mass: float
    centre: float
    polar_inertia: float
    diametral_inertia: float
    shaft_mass: float


def _rigid(model: Model) -> tuple[Real, Real]:
    """Give unit translation and unit tilt about the left end, each (n, 2)."""
    lift = np.zeros((model.stations, 2))
    lift[:, 0] = 1
    tilt = np.column_stack([model.positions, np.ones(model.stations)])
    return lift, tilt


def _form(chain: Chain, a: Real, b: Real) -> float:
    return float((a * chain.times(b)).sum())


def mass_properties(model: Model) -> MassProperties:
    """Weigh the rotor from its mass matrix moved as a rigid body.

    Parameters
    ----------
    model
        The rotor.

    Returns
    -------
    MassProperties
        Shaft, discs, added masses and the carried shares of couplings.
    """
    lift, tilt = _rigid(model)
    mass = _form(model.mass, lift, lift)
    centre = _form(model.mass, lift, tilt) / mass
    return MassProperties(
        mass=mass,
        centre=centre,
        polar_inertia=float(model.elements.polar_inertia.sum() + model.station_polar.sum()),
        diametral_inertia=_form(model.mass, tilt, tilt) - mass * centre**2,
        shaft_mass=float(model.elements.weight.sum()),
    )


@dataclass(frozen=True, eq=False)
class StaticState:
    """Rotor at rest under its weight.

    ``deflection`` [m] and ``slope`` [rad] at every mesh station, upward positive, (n,);
    ``bearing_loads`` [N] downward on each weight-carrying bearing, in the order of the
    rotor's; ``moment`` [N m] at the left and right end of each element, (E, 2), positive
    where the lower fibre is in tension; ``equilibrium`` |ΣF| / weight, left by rounding.
    """

    deflection: Real
    slope: Real
    bearing_loads: Real
    moment: Real
    equilibrium: float


def static_deflection(
    model: Model,
    stiffness: Sequence[float] | None = None,
    gravity: float = STANDARD_GRAVITY,
) -> StaticState:
    """Deflect a horizontal rotor under gravity.

    Parameters
    ----------
    model
        The rotor; its weight-carrying bearings hold it up.
    stiffness
        Vertical stiffness of each of these bearings with its pedestal [N/m]; rigid points
        of support where left out.
    gravity
        [m/s²].

    Raises
    ------
    ModelError
        If the bearings do not hold the rotor, or their number and that of the stiffnesses
        differ.
    """
    nodes = [s.node for s in model.supports if s.bearing.carries_weight]
    if len(set(nodes)) < 2:
        raise ModelError(
            f"{len(set(nodes))} station(s) with a weight-carrying bearing; a rotor at rest needs "
            "at least two"
        )
    lift, _ = _rigid(model)
    load = -gravity * np.real(model.mass.times(lift))
    K = chain_sparse(model.stiffness).tolil()
    at = 2 * np.array(nodes)
    size = 2 * model.stations
    q = np.zeros(size)
    if stiffness is None:
        if len(set(nodes)) < len(nodes):
            raise ModelError(
                "two rigid supports at one station share its load in no definite way; "
                "give their stiffness"
            )
        free = np.setdiff1d(np.arange(size), at)
    else:
        springs = np.asarray(stiffness, dtype=np.float64)
        if springs.shape != at.shape or not np.all(springs > 0):
            raise ModelError(
                f"{springs.size} vertical stiffnesses for {at.size} weight-carrying bearings; "
                "give one above zero for each"
            )
        for place, k in zip(at, springs, strict=True):
            K[place, place] += k
        free = np.arange(size)
    q[free] = spl.splu(sp.csc_matrix(K.tocsr()[free][:, free])).solve(load.ravel()[free])
    shape = q.reshape(-1, 2)
    elastic = np.real(model.stiffness.times(shape))
    carried = (elastic - load)[nodes, 0] if stiffness is None else -springs * q[at]
    weight = gravity * mass_properties(model).mass
    ends = np.concatenate([shape[:-1], shape[1:]], axis=1)
    own = -gravity * np.einsum("eij,j->ei", model.elements.mass, np.array([1.0, 0, 1, 0]))
    forces = np.einsum("eij,ej->ei", model.element_stiffness, ends) - own
    return StaticState(
        deflection=shape[:, 0],
        slope=shape[:, 1],
        bearing_loads=np.asarray(carried),
        moment=np.column_stack([-forces[:, 1], forces[:, 3]]),
        equilibrium=float(abs(carried.sum() - weight) / weight),
    )
