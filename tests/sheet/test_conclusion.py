"""The conclusion: one sentence from the verdicts, every number a link."""

from __future__ import annotations

from typing import Any

import pytest

from reportgen.sheet.conclusion import conclusion_of
from reportgen.sheet.lines import plain


def criterion(verdict: str, title: str, margin: float | None, **changes: Any) -> Any:
    return {
        "title": title, "verdict": verdict, "margin": margin, "where": f"w-{title}",
        "value_shown": "12 µm", "limit_shown": "10 µm", "sense": "at most",
        "margin_shown": "" if margin is None else f"{100 * margin:g} %",
    } | changes  # fmt: skip


MET = [criterion("meets", "one", 0.5), criterion("meets", "two", 0.25)]
FAILED = criterion("does not meet", "three", -0.2)
OPEN = criterion("not assessed", "four", None)


@pytest.mark.parametrize(
    ("criteria", "holds", "said"),
    [
        (MET, 0, "The rotor meets all 2 criteria stated for it; the least margin, 25 % of the "
         "limit, is that of “two”."),
        (MET[:1], 1, "The rotor meets the one criterion stated for it, with 50 % of its limit "
         "left. One hold is open."),
        ([*MET, FAILED], 2, "The rotor does not meet 1 of the 3 stated criteria: three: 12 µm "
         "against at most 10 µm. 2 holds are open."),
        ([*MET, FAILED, OPEN], 0, "The rotor does not meet 1 of the 4 stated criteria: three: "
         "12 µm against at most 10 µm; not assessed: four."),
        ([*MET, OPEN], 0, "The rotor meets 2 of the 3 stated criteria; not assessed: four."),
        ([OPEN], 0, "The rotor meets 0 of the 1 stated criteria; not assessed: four."),
        ([], 0, "The case states no criterion: the results stand without a verdict."),
    ],
)  # fmt: skip
def test_the_verdicts_make_the_sentence(criteria: list[Any], holds: int, said: str) -> None:
    assert plain(conclusion_of(criteria, holds)) == said


def test_its_numbers_lead_to_where_they_are_computed() -> None:
    assert {"ref": "w-three", "text": "12 µm"} in conclusion_of([*MET, FAILED], 0)
    assert {"ref": "w-two", "text": "25 %"} in conclusion_of(MET, 0)
