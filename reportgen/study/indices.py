"""Sobol' indices: which input drives the variance of a result, alone and with others."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import ModelError

Floats = NDArray[np.float64]
RESAMPLES = 200
STILL = 1e-9
"""Spread of a result, over its size, below which nothing can be said to drive it."""


@dataclass(frozen=True)
class Sensitivity:
    """Sobol' indices of one result.

    Parameters
    ----------
    first, total
        Share of the variance by each input alone, and with all it takes part in, shape (d,);
        None where they are not available, for ``reason``.
    first_interval, total_interval
        Their confidence intervals, shape (d, 2).
    """

    first: Floats | None
    total: Floats | None
    first_interval: Floats | None = None
    total_interval: Floats | None = None
    reason: str = ""

    @property
    def leading(self) -> int | None:
        """Number of the input with the largest total index."""
        return None if self.total is None else int(np.argmax(self.total))


def sensitivity(
    at_a: Floats, at_b: Floats, mixed: Floats, confidence: float, seed: int
) -> Sensitivity:
    """Estimate Sobol' indices with their intervals.

    Parameters
    ----------
    at_a, at_b
        Results at the two samples, shape (n,).
    mixed
        Results at the first sample with input i from the second, shape (d, n).
    confidence
        Of the intervals; by the percentiles of a bootstrap of 200 resamples.
    seed
        Of the bootstrap.

    Returns
    -------
    Sensitivity
        Without indices where a result is missing (NaN) or nothing varies.

    Raises
    ------
    ModelError
        If the shapes do not fit.

    References
    ----------
    Saltelli, A. et al. (2010), Computer Physics Communications 181, 259-270: first order by
    their equation (b), total by Jansen's, equation (f) of their table 2.
    """
    n = at_a.size
    if at_b.shape != (n,) or mixed.shape[1:] != (n,):
        raise ModelError(f"samples of shapes {at_a.shape}, {at_b.shape}, {mixed.shape} do not fit")
    every = np.concatenate([at_a, at_b, mixed.ravel()])
    if np.isnan(every).any():
        return Sensitivity(None, None, reason="some samples have no such result")
    if float(np.ptp(every)) <= STILL * float(np.abs(every).max()):
        return Sensitivity(None, None, reason="no tolerance moves it")
    first, total = _indices(at_a, at_b, mixed)
    rng = np.random.default_rng(seed)
    resampled = np.array(
        [
            _indices(at_a[pick], at_b[pick], mixed[:, pick])
            for pick in rng.integers(0, n, (RESAMPLES, n))
        ]
    )
    ends = np.array([0.5 - 0.5 * confidence, 0.5 + 0.5 * confidence])
    low_high = np.quantile(resampled, ends, axis=0)  # (2, first and total, d)
    return Sensitivity(first, total, low_high[:, 0].T, low_high[:, 1].T)


def _indices(at_a: Floats, at_b: Floats, mixed: Floats) -> tuple[Floats, Floats]:
    both = np.concatenate([at_a, at_b])
    middle, variance = both.mean(), both.var()
    # the mean is taken out first: the estimator of the first order loses digits to it
    a, b, ab = at_a - middle, at_b - middle, mixed - middle
    first = np.mean(b * (ab - a), axis=1) / variance
    total = 0.5 * np.mean((a - ab) ** 2, axis=1) / variance
    return first, total
