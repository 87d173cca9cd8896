"""Every structured path against general-purpose dense solvers.

Source: numpy.linalg.solve and scipy.linalg.eig / eigh on full matrices assembled element
by element in plain (x, α, y, β) coordinates. Tolerances: dense and structured results both
carry rounding times condition (about 1e7 for the response, hence 1e-8).

Obtained: computed by a general-purpose library.
"""

from __future__ import annotations

import numpy as np
import pytest
import scipy.linalg
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.rotor.stations import (
    AxialLoad,
    Bearing,
    Constant,
    Disc,
    Material,
    Model,
    Pedestal,
    Rotor,
    Section,
    SpeedTable,
    Unbalance,
    assemble,
    campbell,
    count_below,
    count_in_window,
    dense_eigenvalues,
    dense_matrices,
    dense_response,
    seal,
    unbalance_response,
    undamped_criticals,
)


def machine(seed: int, *, internal: float = 0.0) -> Model:
    draw = np.random.default_rng(seed)
    steel = Material(7850.0, 2.06e11, internal_damping=internal)
    n = int(draw.integers(6, 18))
    sections = tuple(
        Section(
            float(draw.uniform(0.03, 0.2)), float(draw.uniform(0.05, 0.12)), steel,
            inner=float(draw.choice([0, 0.02])), outer_right=float(draw.uniform(0.05, 0.12)),
            mass_outer=0.14,
        )
        for _ in range(n)
    )  # fmt: skip

    def table() -> SpeedTable:
        k = draw.uniform(-1, 1, (3, 2, 2)) * 2e7 + np.eye(2) * 8e7
        c = draw.uniform(-1, 1, (3, 2, 2)) * 2e4 + np.eye(2) * 1e5
        return SpeedTable([0.0, 500.0, 2000.0], k, c)

    foot = Pedestal((30.0, 20.0), (4e8, 2e8), (2e4, 1e4))
    a, b = sorted(draw.choice(n + 1, 2, replace=False).tolist())
    four = np.diag([1e6, 1e6, 1e3, 1e3])
    return assemble(
        Rotor(
            sections,
            discs=(Disc(n // 2, 15.0, 0.3, 0.2), Disc(0, 5.0, 0.05, 0.03)),
            bearings=(
                Bearing(a, table(), "A", foot if seed % 2 else None),
                Bearing(b, table(), "B", foot if seed % 3 else None),
                seal(n // 2, Constant(four, four / 1e3, np.diag([1.0, 1.0]))),
            ),
            axial_loads=(AxialLoad(0, n, -2e4),),
        )
    )


@settings(deadline=None, max_examples=12)
@given(st.integers(0, 10_000), st.floats(20, 1900))
def test_response_at_every_station(seed: int, speed: float) -> None:
    model = machine(seed, internal=1e-5)
    r = unbalance_response(model, [speed], [Unbalance(0, 1e-4), Unbalance(5, 2e-4, 2.0)])
    q = dense_response(model, speed, r.load[..., 0])
    n4 = 4 * model.stations
    scale = np.abs(q[:n4:2]).max()
    assert np.abs(r.x[:, 0] - q[0:n4:4]).max() < 1e-8 * scale
    assert np.abs(r.y[:, 0] - q[2:n4:4]).max() < 1e-8 * scale
    if model.pedestals:
        foot = r.pedestal_forward + r.pedestal_backward
        assert np.abs(foot[:, 0] - q[n4::2]).max() < 1e-8 * scale


@pytest.mark.parametrize("seed", range(6))
def test_damped_eigenvalues_all_found_and_equal(seed: int) -> None:
    model = machine(seed, internal=1e-5 if seed > 3 else 0.0)
    speeds = np.linspace(10, 1900, 4)
    chart = campbell(model, speeds, 8)
    for s, speed in enumerate(speeds):
        dense = dense_eigenvalues(dense_matrices(model, speed))
        swing = np.sort(dense.imag[dense.imag > 1e-6 * np.abs(dense)])
        mine = chart.exponents[chart.present[:, s] & (chart.exponents[:, s].imag > 0), s]
        for lam in mine:
            assert np.abs(dense - lam).min() < 1e-8 * abs(lam)
        # The eight lowest of the dense list are all there: none missed, none twice.
        assert np.sort(mine.imag)[:8] == pytest.approx(swing[:8], rel=1e-8)


@pytest.mark.parametrize("seed", range(3))
def test_count_in_a_window_is_that_of_the_dense_list(seed: int) -> None:
    model = machine(seed)
    dense = dense_eigenvalues(dense_matrices(model, 700.0))
    for left, high in ((-300.0, 2500.0), (-5000.0, 6000.0)):
        inside = (dense.real > left) & (dense.real < 10) & (dense.imag > 50) & (dense.imag < high)
        assert count_in_window(model, 700.0, (left, 10.0), (50.0, high)) == inside.sum()


@pytest.mark.parametrize("whirl", ["forward", "backward"])
def test_undamped_criticals(whirl: str) -> None:
    model = machine(4)
    got = undamped_criticals(model, 6e7, 4, whirl, pedestals=False)  # type: ignore[arg-type]
    sign = -1 if whirl == "forward" else 1
    n = model.stations
    K, N = np.zeros((2 * n, 2 * n)), np.zeros((2 * n, 2 * n))
    for chain, target, factor in (
        (model.stiffness, K, 1), (model.mass, N, 1), (model.polar, N, sign),
    ):  # fmt: skip
        for i in range(n):
            target[2 * i : 2 * i + 2, 2 * i : 2 * i + 2] += factor * chain.diagonal[i]
            if i + 1 < n:
                a, b = slice(2 * i, 2 * i + 2), slice(2 * i + 2, 2 * i + 4)
                target[a, b] += factor * chain.upper[i]
                target[b, a] += factor * chain.upper[i].T
    for support, k in zip(model.supports, got.stiffness, strict=True):
        K[2 * support.node, 2 * support.node] += k
    values = scipy.linalg.eigh(N, K, eigvals_only=True)
    expected = np.sort(1 / np.sqrt(values[values > 1e-14]))[:4]
    assert got.speeds == pytest.approx(expected, rel=1e-9)
    springs = got.stiffness
    below = [count_below(model, springs, whirl, v * 1.0001, False) for v in got.speeds]  # type: ignore[arg-type]
    assert below == [1, 2, 3, 4]
