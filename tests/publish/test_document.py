"""One structure: numbered once, every reference resolved, faults named."""

from __future__ import annotations

import subprocess
from types import ModuleType
from typing import Any

import pytest

from reportgen.errors import PublishError
from reportgen.publish import House, nodes, pandoc, publish
from reportgen.publish.api import prepared
from reportgen.publish.document import document


def made(notebook: dict[str, Any]) -> nodes.Document:
    return document(notebook, House(), (), True)


def test_parts_are_numbered_in_reading_order(sample: ModuleType) -> None:
    report = made(sample.full())
    labels = {name: target.label for name, target in report.targets.items()}
    assert labels["critical-speed"] == "Equation 1"
    assert labels["response"] == "Figure 1"
    assert labels["response-soft"] == "Figure 2"
    assert labels["whirl-table"] == "Table 1"
    assert labels["separation"] == "criterion C1"
    assert labels["n-c"] == "result R1"
    assert labels["method"] == "Section 2"
    assert [h.number for h in report.headings()] == [
        "1", "2", "2.1", "2.1.1", "3", "3.1", "3.2", "4", "5", "6",
    ]  # fmt: skip


def test_anchors_are_unique(sample: ModuleType) -> None:
    anchors = [t.anchor for t in made(sample.full()).targets.values()]
    assert len(anchors) == len(set(anchors))


@pytest.mark.parametrize("text", ["See [](#nowhere).", "[words](#nowhere)"])
def test_a_reference_that_leads_nowhere_is_an_error(sample: ModuleType, text: str) -> None:
    with pytest.raises(PublishError, match="nowhere"):
        made(sample.small(text=text))


def test_a_block_reference_that_leads_nowhere_is_an_error(sample: ModuleType) -> None:
    block = {"kind": "paragraph", "text": ["see ", {"strong": [{"ref": "gone"}]}]}
    with pytest.raises(PublishError, match="gone"):
        made(sample.small(block))


def test_a_criterion_that_points_nowhere_is_an_error(sample: ModuleType) -> None:
    one = sample.criterion("c", "C", "meets", "1", "2", "50 %", "gone", "at most")
    with pytest.raises(PublishError, match="gone"):
        made(sample.small(criteria=[one]))


def test_two_blocks_of_one_name_are_an_error(sample: ModuleType) -> None:
    with pytest.raises(PublishError, match="two blocks are named 'f'"):
        made(sample.small(sample.long_table("f", 2), sample.figure_block("f")))


def test_a_block_and_a_criterion_of_one_name_are_an_error(sample: ModuleType) -> None:
    one = sample.criterion("t", "C", "meets", "1", "2", "50 %", "", "at most")
    table = sample.long_table("t", 2) | {"note": ""}
    with pytest.raises(PublishError, match="a block and a criterion"):
        made(sample.small(table, criteria=[one]))


def test_a_result_named_as_its_block_leads_to_the_block(sample: ModuleType) -> None:
    table = sample.long_table("t", 2) | {"note": ["see ", {"ref": "t"}]}
    one = sample.result("t", "T", "t", "1 m", "t")
    assert made(sample.small(table, results=[one])).targets["t"].label == "Table 1"


FAULTY = [
    ({"kind": "dance"}, "dance"),
    ({"kind": "paragraph"}, "text"),
    ({"kind": "paragraph", "text": 3}, "3"),
    ({"kind": "paragraph", "text": {"html": "<b>"}}, "html"),
    (
        {
            "kind": "table",
            "id": "t",
            "caption": "c",
            "columns": [{"title": "a"}],
            "rows": [["1", "2"]],
        },
        "row 1: 2 cells under 1 columns",
    ),
    (
        {"kind": "figure", "id": "f", "caption": "c", "alt": " ", "svg": "<svg/>", "axes": []},
        "no alt",
    ),
]  # fmt: skip


@pytest.mark.parametrize(("block", "told"), FAULTY)
def test_a_faulty_block_is_named(sample: ModuleType, block: dict[str, Any], told: str) -> None:
    with pytest.raises(PublishError, match=told):
        made(sample.small(block))


def test_a_notebook_without_results_is_refused(sample: ModuleType) -> None:
    with pytest.raises(PublishError, match="no results"):
        made(sample.notebook(sample.prose("# A")))


def test_a_notebook_with_a_failed_cell_is_refused(sample: ModuleType) -> None:
    failed = {"output_type": "error", "ename": "ValueError", "evalue": "no", "traceback": []}
    with pytest.raises(PublishError, match="ValueError: no"):
        made(sample.notebook(sample.code("x", failed), *sample.small()["cells"]))


def test_a_cell_that_swallows_the_next_is_named(sample: ModuleType) -> None:
    report = sample.small()
    cells = [sample.prose("```\nopen"), sample.prose("# Next"), *report["cells"]]
    with pytest.raises(PublishError, match="leaves a block open"):
        made(sample.notebook(*cells))


def test_a_formula_in_prose_that_fails_is_named(sample: ModuleType) -> None:
    with pytest.raises(PublishError, match=r"\\\\nope"):
        prepared(sample.small(text=r"A $\nope{x}$."), House(), {}, True)


def test_pandoc_runs_twice_for_a_report(
    sample: ModuleType, monkeypatch: pytest.MonkeyPatch
) -> None:
    calls: list[Any] = []
    real = subprocess.run

    def counted(*args: Any, **kw: Any) -> Any:
        calls.append(args[0])
        return real(*args, **kw)

    monkeypatch.setattr(subprocess, "run", counted)
    publish(sample.full())
    assert [call[0] for call in calls] == [pandoc.executable()] * 2


def test_a_link_to_a_script_is_refused(sample: ModuleType) -> None:
    with pytest.raises(PublishError, match="javascript"):
        made(sample.small(text="[x](javascript:alert)"))


def test_parameters_that_were_injected_stay_out_of_the_code(sample: ModuleType) -> None:
    report = made(sample.full())
    assert "case = {'a': 1}" not in report.code
    assert report.code[0] == "case = None"
