"""Column widths: no word is cut, values keep their units, the width is used."""

from __future__ import annotations

import pytest
import typst
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.publish.widths import ROOM, em, layout, pieces

WORDS = st.text(st.sampled_from("abcdefgh mnoprstu 0123456789.µ-/"), max_size=80)


def test_a_value_may_break_before_its_measure_only() -> None:
    for text, parts in {
        "10.77 µm peak-to-peak": ["10.77 µm", "peak-to-peak"],
        "at most 50.8 µm 0-peak": ["at most 50.8 µm", "0-peak"],
        "± 0.02 mm": ["± 0.02 mm"],
        "300 N s/m": ["300 N s/m"],
        "1.05×10⁵ lbf/in": ["1.05×10⁵ lbf/in"],
        "12.5": ["12.5"],
    }.items():
        assert [piece for piece, _ in pieces(text)] == parts


@settings(deadline=None)
@given(st.lists(st.lists(WORDS, min_size=3, max_size=3), max_size=5))
def test_the_columns_share_the_whole_width(rows: list[list[str]]) -> None:
    made = layout(["a", "b", "c"], rows, [False, True, False], [None] * 3, "a4")
    assert sum(made.shares) == pytest.approx(1)
    assert all(share > 0 for share in made.shares)
    assert made.height > 0


def test_no_column_is_narrower_than_its_longest_word() -> None:
    text = "preliminary " + "a long remark about nothing " * 8
    made = layout(["Status", "Remark"], [["preliminary", text]], [False] * 2, [0.01, 0.99], "a4")
    assert made.shares[0] * ROOM["a4"] > made.size * em("preliminary")


@pytest.mark.parametrize(
    "text",
    ["peak-to-peak", "project specification TPW-SP-114, 6.2", "1475 r/min", "at most 150 µm"],
)
def test_the_estimate_is_near_what_typst_measures(text: str) -> None:
    source = (
        f'#set text(font: "Libertinus Serif", size: 10pt)\n'
        f'#context [#metadata(measure("{text}").width.pt())<x>]'
    )
    measured = float(typst.query(source.encode(), "<x>", field="value", one=True))
    assert measured * 0.99 < 10 * em(text) < measured * 1.2


def test_a_date_keeps_its_column_wide_enough() -> None:
    long = "what changed in this revision of the document " * 6
    made = layout(["Date", "What changed"], [["2026-01-12", long]], [False] * 2, [None] * 2, "a4")
    assert made.shares[0] * ROOM["a4"] > made.size * em("2026-01-12")
