"""Confidence intervals of a share against printed ones.

Source: Newcombe, R. G. (1998), Statistics in Medicine 17, 857-872, table I: 95 % intervals by
Wilson's score method and by Clopper and Pearson's. From memory.

Obtained: from memory.
"""

from __future__ import annotations

import pytest

from reportgen.criteria.shares import share_interval

PRINTED = [
    (81, 263, (0.2553, 0.3662), (0.2527, 0.3676)),
    (15, 148, (0.0624, 0.1605), (0.0578, 0.1617)),
    (0, 20, (0.0, 0.1611), (0.0, 0.1684)),
    (1, 29, (0.0061, 0.1718), (0.0009, 0.1776)),
]


@pytest.mark.parametrize(("hits", "count", "wilson", "exact"), PRINTED)
def test_intervals_are_as_printed(hits, count, wilson, exact):
    half_of_last_digit = 0.5e-4
    assert share_interval(hits, count, 0.95, "wilson") == pytest.approx(
        wilson, abs=half_of_last_digit
    )
    assert share_interval(hits, count) == pytest.approx(exact, abs=half_of_last_digit)


def test_no_hit_in_n_gives_nearly_three_over_n():
    """The rule of three: 3/n is the one-sided 95 % limit (Hanley, Lippman-Hand 1983)."""
    assert share_interval(0, 1000, 0.90).high == pytest.approx(3 / 1000, rel=0.005)
