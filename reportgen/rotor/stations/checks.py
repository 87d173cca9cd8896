"""Second computations and checks of a station model."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import scipy.sparse as sp
import scipy.sparse.linalg as spl
from numpy.typing import ArrayLike

from reportgen.errors import ModelError
from reportgen.rotor.stations.coefficients import Real
from reportgen.rotor.stations.criticals import Whirl, undamped_criticals
from reportgen.rotor.stations.harmonic import triplets
from reportgen.rotor.stations.inputs import Rotor
from reportgen.rotor.stations.model import Model, assemble
from reportgen.rotor.stations.peaks import find_peaks
from reportgen.rotor.stations.response import Response


@dataclass(frozen=True, eq=False)
class DiscretisationCheck:
    """Criticals [rad/s] with the elements as given and with each halved.

    ``change``: relative, of each; ``largest`` of them.
    """

    given: Real
    halved: Real
    change: Real
    largest: float


def discretisation_check(
    rotor: Rotor,
    stiffness: float | Sequence[float],
    count: int = 4,
    whirl: Whirl = "forward",
    *,
    pedestals: bool = True,
) -> DiscretisationCheck:
    """Halve every element and compare the undamped criticals."""
    given, halved = (
        undamped_criticals(assemble(r), stiffness, count, whirl, pedestals=pedestals).speeds
        for r in (rotor, rotor.refined(2))
    )
    if given.size != halved.size:
        raise ModelError(
            f"{given.size} criticals with the elements given but {halved.size} with each halved; "
            "use more elements"
        )
    change = np.abs(halved - given) / halved
    return DiscretisationCheck(given, halved, change, float(change.max(initial=0.0)))


def criticals_from_response(response: Response, share: float = 1e-3) -> Real:
    """Find speeds [rad/s] at which the largest orbit along the rotor peaks.

    A second computation of the criticals: for small damping the peaks stand at the
    synchronous damped eigenvalues. ``share`` of the largest counts as a peak at all.
    """
    return np.array(
        [p.speed for p in find_peaks(response.speeds, response.major.max(axis=0), share)]
    )


@dataclass(frozen=True, eq=False)
class Comparison:
    """Each of ``first`` with the nearest of ``second`` and their relative ``difference``."""

    first: Real
    second: Real
    difference: Real


def compare_nearest(first: ArrayLike, second: ArrayLike) -> Comparison:
    """Pair each value with the nearest of another computation."""
    a, b = np.asarray(first, dtype=np.float64), np.asarray(second, dtype=np.float64)
    if a.size == 0 or b.size == 0:
        raise ModelError("a comparison needs at least one value from each computation")
    near = b[np.abs(a[:, None] - b).argmin(axis=1)]
    return Comparison(a, near, np.abs(near - a) / np.abs(a))


def condition_estimate(model: Model, speed: float) -> float:
    """Estimate the condition number of the response equations at a speed [rad/s].

    In the 1-norm after scaling rows and columns by the square roots of the diagonal, so that
    units do not count (Hager 1984; Higham & Tisseur 2000). Times 1e-16 it bounds the relative
    error that rounding leaves in the response.

    Raises
    ------
    ModelError
        If the equations are singular.
    """
    rows, columns, values, size = triplets(model, 1j * speed, speed)
    z = sp.csc_matrix((values, (rows, columns)), shape=(size, size))
    still = triplets(model, 0.0, speed)
    elastic = sp.csc_matrix((still[2], (still[0], still[1])), shape=(size, size))
    scale = sp.diags(1 / np.sqrt(np.maximum(np.abs(elastic.diagonal()), 1e-300)))
    scaled: Any = (scale @ z @ scale).tocsc()
    try:
        factor, adjoint = spl.splu(scaled), spl.splu(scaled.conj().T.tocsc())
    except RuntimeError as error:
        raise ModelError(
            f"the response equations at {speed:.6g} rad/s are singular; leave the speed out"
        ) from error
    inverse = spl.LinearOperator(
        scaled.shape,
        matvec=factor.solve,
        rmatvec=adjoint.solve,
        dtype=np.complex128,
    )
    return float(spl.onenormest(inverse) * spl.norm(scaled, 1))
