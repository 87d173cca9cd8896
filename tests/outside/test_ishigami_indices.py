"""Sobol' indices of the Ishigami function, whose variance is parted in closed form.

Source: Ishigami, T., Homma, T. (1990), ISUMA '90, 398-403; the indices for a = 7, b = 0.1 as
printed in the literature on sensitivity analysis (0.3139, 0.4424, 0; totals 0.5576, 0.4424,
0.2437) are from memory, the closed form is computed here from the variance's parts. The
estimators are held against scipy.stats.sobol_indices on the same samples too.

Obtained: from memory, and computed by a general-purpose library.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.stats import sobol_indices

from reportgen.study.indices import sensitivity
from reportgen.study.sampling import design, spread

A, B = 7.0, 0.1


def ishigami(x):
    return np.sin(x[..., 0]) + A * np.sin(x[..., 1]) ** 2 + B * x[..., 2] ** 4 * np.sin(x[..., 0])


def closed_form():
    first = 0.5 * (1 + B * math.pi**4 / 5) ** 2
    second = A**2 / 8
    together = B**2 * math.pi**8 * (1 / 18 - 1 / 50)
    whole = first + second + together
    return (
        np.array([first, second, 0.0]) / whole,
        np.array([first + together, second, together]) / whole,
    )


@pytest.mark.parametrize("method", ["sobol", "latin hypercube", "random"])
def test_the_indices_of_the_ishigami_function_are_found(method):
    drawn = design(method, 8192, 3, 1)
    points = [spread(p, 0.0, math.pi, "uniform") for p in (drawn.A, drawn.B, drawn.mixed())]
    values = [ishigami(p) for p in points]
    found = sensitivity(*values, 0.99, 1)
    first, total = closed_form()
    assert np.round(first, 4).tolist() == [0.3139, 0.4424, 0.0]  # as printed
    assert np.round(total, 4).tolist() == [0.5576, 0.4424, 0.2437]
    # the error of independent points falls with the root of their number; Sobol' points do better
    tolerance = 0.02 if method == "sobol" else 0.05
    assert found.first == pytest.approx(first, abs=tolerance)
    assert found.total == pytest.approx(total, abs=tolerance)
    assert np.all(found.first_interval[:, 0] <= found.first_interval[:, 1])
    if method == "random":  # the intervals are those of independent samples
        inside = (found.total_interval[:, 0] <= total) & (total <= found.total_interval[:, 1])
        assert inside.all()


def test_the_estimators_are_those_of_scipy():
    drawn = design("sobol", 256, 3, 2)
    a, b, mixed = (ishigami(6 * p - 3) for p in (drawn.A, drawn.B, drawn.mixed()))
    found = sensitivity(a, b, mixed, 0.95, 1)
    func = {"f_A": a[None], "f_B": b[None], "f_AB": mixed[:, None]}
    theirs = sobol_indices(func=func, n=256)
    assert found.first == pytest.approx(np.ravel(theirs.first_order), rel=1e-10, abs=1e-12)
    assert found.total == pytest.approx(np.ravel(theirs.total_order), rel=1e-10, abs=1e-12)
