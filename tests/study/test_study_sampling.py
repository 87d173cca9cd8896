"""Points and distributions of a study: where they lie, that seeds decide them, what is refused."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.stats import truncnorm

from reportgen.errors import ModelError
from reportgen.study.indices import sensitivity
from reportgen.study.sampling import design, spread

METHODS = ("sobol", "latin hypercube", "random")


@pytest.mark.parametrize("method", METHODS)
def test_a_seed_gives_the_same_points_and_another_seed_others(method):
    one, same, other = (design(method, 64, 3, seed).all() for seed in (5, 5, 6))
    assert np.array_equal(one, same)
    assert not np.array_equal(one, other)
    assert one.shape == (64 * 5, 3)
    assert one.min() > 0.0
    assert one.max() < 1.0


def test_the_mixtures_take_one_column_from_the_second_sample():
    drawn = design("random", 4, 3, 1)
    for i, mixed in enumerate(drawn.mixed()):
        kept = [k for k in range(3) if k != i]
        assert np.array_equal(mixed[:, i], drawn.B[:, i])
        assert np.array_equal(mixed[:, kept], drawn.A[:, kept])


@pytest.mark.parametrize("method", ["sobol", "latin hypercube"])
def test_every_stratum_of_each_input_holds_one_point(method):
    drawn = design(method, 128, 2, 3)
    for sample in (drawn.A, drawn.B):
        for column in sample.T:
            assert sorted(np.floor(128 * column).astype(int)) == list(range(128))


@given(
    middle=st.floats(-1e6, 1e6),
    half=st.floats(1e-9, 1e6),
    kind=st.sampled_from(["uniform", "normal", "none"]),
)
def test_no_value_leaves_its_tolerance(middle, half, kind):
    unit = np.array([2.0**-53, 0.3, 0.5, 1 - 2.0**-53])
    values = spread(unit, middle, half, kind)
    assert np.all(np.diff(values) >= 0)
    assert np.all((values >= middle - half) & (values <= middle + half))


def test_the_normal_spread_is_that_of_scipy_cut_at_two_standard_deviations():
    unit = np.linspace(0.01, 0.99, 50)
    theirs = truncnorm.ppf(unit, -2, 2, loc=3.0, scale=0.25)
    assert spread(unit, 3.0, 0.5, "normal") == pytest.approx(theirs, rel=1e-9)


def test_what_cannot_be_drawn_is_refused():
    with pytest.raises(ModelError, match="cannot be drawn"):
        design("sobol", 100, 2, 1)
    with pytest.raises(ModelError, match="no distribution"):
        spread(np.array([0.5]), 0.0, 1.0, "weibull")


def test_what_does_not_vary_or_does_not_exist_has_no_driver():
    flat = np.ones(8)
    assert "moves" in sensitivity(flat, flat, np.ones((2, 8)), 0.95, 1).reason
    broken = flat.copy()
    broken[3] = np.nan
    assert "some samples" in sensitivity(broken, flat, np.ones((2, 8)), 0.95, 1).reason
    with pytest.raises(ModelError, match="do not fit"):
        sensitivity(flat, flat[:4], np.ones((2, 8)), 0.95, 1)
