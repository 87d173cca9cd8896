"""Undamped synchronous critical speeds, their shapes and energies, and the speed map."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
import scipy.sparse as sp
import scipy.sparse.linalg as spl
from numpy.typing import NDArray

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.model import Model
from reportgen.rotor.stations.planes import chain_sparse, lowest_roots
from reportgen.rotor.stations.reduction import frequency_scale

Whirl = Literal["forward", "backward"]


@dataclass(frozen=True, eq=False)
class Criticals:
    """Undamped critical speeds of one kind of whirl on isotropic supports.

    Attributes
    ----------
    speeds
        Ω of each [rad/s], rising, shape (m,).
    shapes
        Deflection and slope at every mesh station, greatest deflection 1, (m, n, 2).
    pedestal_shapes
        Deflection of each pedestal in the same scale, (m, p).
    whirl
        ``forward`` or ``backward``.
    stiffness
        Support stiffness used for each bearing [N/m].
    rigid_body
        Number of modes without stiffness (a rotor not or not fully supported), left out.
    exhausted
        True if the rotor has no further critical of this kind than those given.
    """

    model: Model
    speeds: Real
    shapes: Real
    pedestal_shapes: Real
    whirl: Whirl
    stiffness: Real
    rigid_body: int
    exhausted: bool


@dataclass(frozen=True, eq=False)
class _Pencil:
    """K − Ω²N with unknowns of the shaft first, then pedestals."""

    K: sp.csc_matrix
    N: sp.csc_matrix


def support_stiffness(model: Model, stiffness: float | Sequence[float] | Real) -> Real:
    """Spread a stiffness over all supports; seals get none unless all are given one."""
    carrying = np.array([s.bearing.carries_weight for s in model.supports], dtype=bool)
    given = np.asarray(stiffness, dtype=np.float64)
    out = np.zeros(carrying.size)
    if given.ndim == 0:
        out[carrying] = float(given)
    elif given.shape == (carrying.size,):
        out = given.copy()
    elif given.shape == (int(carrying.sum()),):
        out[carrying] = given
    else:
        raise ModelError(
            f"{given.size} support stiffnesses for {carrying.size} bearings and seals; "
            "give one number, or one for each"
        )
    if not np.all(np.isfinite(out)) or np.any(out < 0):
        raise ModelError("support stiffness must be finite, zero or above, in N/m")
    return out


def _pencil(model: Model, stiffness: Real, whirl: Whirl, pedestals: bool) -> _Pencil:
    sign = -1.0 if whirl == "forward" else 1.0
    n, p = 2 * model.stations, model.pedestals if pedestals else 0
    rows: list[int] = []
    columns: list[int] = []
    values: list[float] = []
    mass = np.zeros(n + p)
    for support, k in zip(model.supports, stiffness, strict=True):
        i = 2 * support.node
        pedestal = support.bearing.pedestal
        if pedestal is None or not pedestals:
            rows, columns, values = [*rows, i], [*columns, i], [*values, k]
            continue
        j = n + support.pedestal
        (mx, my), (kx, ky) = pedestal.mass, pedestal.stiffness
        if mx != my or kx != ky:
            raise ModelError(
                f"pedestal of bearing {support.bearing.name or support.node} differs between x "
                "and y; isotropic criticals need one value: use pedestals=False, or the damped "
                "eigenvalues"
            )
        rows += [i, i, j, j]
        columns += [i, j, i, j]
        values += [k, -k, -k, k + kx]
        mass[j] = mx
    extra = sp.coo_matrix(
        (np.array(values), (np.array(rows, dtype=int), np.array(columns, dtype=int))),
        shape=(n + p, n + p),
    )
    pad = sp.csc_matrix((p, p))
    K = sp.block_diag([chain_sparse(model.stiffness), pad]) + extra
    N = sp.block_diag([chain_sparse(model.mass) + sign * chain_sparse(model.polar), pad])
    return _Pencil(sp.csc_matrix(K), sp.csc_matrix(N + sp.diags(mass)))


def count_below(model: Model, stiffness: Real, whirl: Whirl, speed: float, pedestals: bool) -> int:
    """Count undamped criticals below ``speed`` by the signs of an LDLᵀ elimination.

    For supported rotors: the number of negative pivots of K − Ω²N (Sylvester's law of
    inertia; Wittrick & Williams 1971) where N = M − G for forward whirl.
    """
    pencil = _pencil(model, stiffness, whirl, pedestals)
    matrix = sp.csc_matrix(pencil.K - speed**2 * pencil.N)
    factor = spl.splu(
        matrix, permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0, options={"SymmetricMode": True}
    )
    return int((factor.U.diagonal() < 0).sum())


def undamped_criticals(
    model: Model,
    stiffness: float | Sequence[float] | Real,
    count: int = 4,
    whirl: Whirl = "forward",
    *,
    pedestals: bool = True,
) -> Criticals:
    """Find undamped synchronous critical speeds by the direct eigenproblem.

    (K − Ω²(M − G)) q = 0 for forward whirl, (K − Ω²(M + G)) q = 0 for backward, with G the
    matrix of polar inertia.

    Parameters
    ----------
    model
        The rotor.
    stiffness
        Of the supports [N/m]: one number for all weight-carrying bearings, or one for each.
    count
        How many, from the lowest.
    whirl
        ``forward`` or ``backward``.
    pedestals
        Put each pedestal (undamped, equal in x and y) in series; False takes ``stiffness``
        as that of the whole support.

    Returns
    -------
    Criticals
        Fewer than ``count`` where the rotor has no more (a disc with polar above diametral
        inertia has no forward conical critical); ``exhausted`` then says so.

    Raises
    ------
    ModelError
        If a stiffness does not fit, or axial compression exceeds the buckling load.
    """
    if count < 1:
        raise ModelError(f"{count} critical speeds asked for; give at least 1")
    springs = support_stiffness(model, stiffness)
    pencil = _pencil(model, springs, whirl, pedestals)
    _refuse_buckled(pencil)
    scale = frequency_scale(model)
    # A small negative shift keeps K − λN regular when the rotor has rigid-body modes.
    roots, vectors = lowest_roots(pencil.K, pencil.N, count + 4, -((1e-3 * scale) ** 2))
    rigid = np.abs(roots) < (1e-5 * scale) ** 2
    real = (roots > 0) & ~rigid
    speeds, vectors = np.sqrt(roots[real]), vectors[:, real]
    speeds, vectors = speeds[:count], vectors[:, :count]
    shaft = vectors[: 2 * model.stations].T.reshape(-1, model.stations, 2)
    top = np.take_along_axis(shaft[:, :, 0], np.abs(shaft[:, :, 0]).argmax(1)[:, None], 1)
    return Criticals(
        model=model,
        speeds=speeds,
        shapes=shaft / top[:, :, None],
        pedestal_shapes=(vectors[2 * model.stations :].T / top),
        whirl=whirl,
        stiffness=springs,
        rigid_body=int(rigid.sum()),
        exhausted=speeds.size < count,
    )


def _refuse_buckled(pencil: _Pencil) -> None:
    size = pencil.K.shape[0]
    lift = 1e-9 * abs(pencil.K).max()
    factor = spl.splu(
        sp.csc_matrix(pencil.K + lift * sp.identity(size)),
        permc_spec="MMD_AT_PLUS_A",
        diag_pivot_thresh=0.0,
        options={"SymmetricMode": True},
    )
    if (factor.U.diagonal() < 0).any():
        raise ModelError(
            "the shaft buckles under its axial load before it turns; check the sign (tension "
            "positive) and size of the load"
        )


@dataclass(frozen=True, eq=False)
class EnergyShares:
    """Shares of potential and kinetic energy in one mode shape; each kind sums to 1.

    ``sections`` strain share of each rotor section; ``supports`` of each bearing;
    ``pedestals`` of each pedestal spring. ``shaft_kinetic``, ``station_kinetic`` and
    ``pedestal_kinetic``: kinetic shares of the sections (each), of rigid parts at each
    mesh station, of pedestal masses. Gyroscopic terms count with the synchronous sign.
    """

    sections: Real
    supports: Real
    pedestals: Real
    shaft_kinetic: Real
    station_kinetic: Real
    pedestal_kinetic: Real


def energy_shares(criticals: Criticals, mode: int) -> EnergyShares:
    """Split the energy of critical number ``mode`` (from 0) over the parts.

    Raises
    ------
    ModelError
        If there is no such critical.
    """
    if not 0 <= mode < criticals.speeds.size:
        raise ModelError(f"critical {mode} asked for; 0 to {criticals.speeds.size - 1} were found")
    model, q = criticals.model, criticals.shapes[mode]
    p = criticals.pedestal_shapes[mode]
    sign = -1.0 if criticals.whirl == "forward" else 1.0
    ends = np.concatenate([q[:-1], q[1:]], axis=1)

    def of(matrices: Real) -> NDArray[np.float64]:
        per = np.einsum("ei,eij,ej->e", ends, matrices, ends)
        return np.add.reduceat(per, model.node_of[:-1])

    strain = of(model.element_stiffness)
    supports, ground, moving = [], np.zeros(p.size), np.zeros(p.size)
    for s, k in zip(model.supports, criticals.stiffness, strict=True):
        with_pedestal = s.bearing.pedestal is not None and p.size > 0
        relative = q[s.node, 0] - (p[s.pedestal] if with_pedestal else 0.0)
        supports.append(k * relative**2)
        if with_pedestal and s.bearing.pedestal is not None:
            ground[s.pedestal] = s.bearing.pedestal.stiffness[0] * p[s.pedestal] ** 2
            moving[s.pedestal] = s.bearing.pedestal.mass[0] * p[s.pedestal] ** 2
    shaft = of(model.elements.mass + sign * model.elements.polar)
    station = model.station_mass * q[:, 0] ** 2
    station = station + (model.station_diametral + sign * model.station_polar) * q[:, 1] ** 2
    potential = strain.sum() + sum(supports) + ground.sum()
    kinetic = shaft.sum() + station.sum() + moving.sum()
    return EnergyShares(
        strain / potential,
        np.array(supports) / potential,
        ground / potential,
        shaft / kinetic,
        station / kinetic,
        moving / kinetic,
    )
