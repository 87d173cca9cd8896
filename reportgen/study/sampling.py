"""Points of the unit cube that a study draws, in two halves for the sensitivities."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray
from scipy.stats import norm, qmc

from reportgen.errors import ModelError

Floats = NDArray[np.float64]
Method = Literal["sobol", "latin hypercube", "random"]
WIDTH = 2.0
"""Standard deviations in a tolerance of a given that is normal."""


@dataclass(frozen=True)
class Design:
    """Points at which the model is computed (Saltelli 2010).

    Parameters
    ----------
    A, B
        Two samples, shape (n, d), within (0, 1).
    """

    A: Floats
    B: Floats

    def mixed(self) -> Floats:
        """Return A with column i from B, for each i: shape (d, n, d)."""
        d = self.A.shape[1]
        out = np.broadcast_to(self.A, (d, *self.A.shape)).copy()
        for i in range(d):
            out[i, :, i] = self.B[:, i]
        return out

    def all(self) -> Floats:
        """Return every point: A, B, then the mixtures; shape (n(d + 2), d)."""
        return np.concatenate([self.A, self.B, *self.mixed()])


def design(method: Method, samples: int, dimensions: int, seed: int) -> Design:
    """Draw two samples of the unit cube.

    Parameters
    ----------
    method
        ``sobol``: scrambled Sobol' points in 2d dimensions; ``latin hypercube`` in as many;
        ``random``: independent points.
    samples
        n, a power of two.
    dimensions
        d.
    seed
        Of numpy's PCG64 generator; the same seed gives the same points.

    Raises
    ------
    ModelError
        If n is no power of two, or there are no dimensions.

    References
    ----------
    Sobol', I. M. (1967); McKay, M. D. et al. (1979), Technometrics 21, 239-245; Owen, A. B.
    (1998), scrambling. Computed by scipy.stats.qmc.
    """
    if samples < 1 or samples & (samples - 1) or dimensions < 1:
        raise ModelError(f"{samples} samples of {dimensions} inputs cannot be drawn")
    rng = np.random.default_rng(seed)
    if method == "sobol":
        points = qmc.Sobol(2 * dimensions, rng=rng).random_base2(int(math.log2(samples)))
    elif method == "latin hypercube":
        points = qmc.LatinHypercube(2 * dimensions, rng=rng).random(samples)
    else:
        points = rng.random((samples, 2 * dimensions))
    inside = np.clip(points, 2.0**-53, 1.0 - 2.0**-53)
    return Design(inside[:, :dimensions], inside[:, dimensions:])


def spread(unit: Floats, middle: float, half_width: float, distribution: str) -> Floats:
    """Return values within middle ± half width from points of (0, 1).

    ``uniform`` is even over the tolerance. ``normal`` has a standard deviation of half the
    tolerance and is cut at its ends: a part outside its tolerance is not built in. ``none``
    stays at the middle.

    Raises
    ------
    ModelError
        If the distribution is not one of these.
    """
    if distribution == "uniform":
        share = 2.0 * unit - 1.0
    elif distribution == "normal":
        low, high = norm.cdf(-WIDTH), norm.cdf(WIDTH)
        share = norm.ppf(low + (high - low) * unit) / WIDTH
    elif distribution == "none":
        share = np.zeros_like(unit)
    else:
        raise ModelError(f"no distribution {distribution!r}; uniform, normal or none")
    return np.asarray(middle + half_width * np.clip(share, -1.0, 1.0))
