"""Every demo's HTML report, as a reader's browser shows it."""

from __future__ import annotations

import csv
import io
import json
import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

DEMOS = sorted(p.stem for p in (Path(__file__).parents[2] / "cases").glob("*.yaml"))
Visit = Callable[[str], dict[str, Any]]
BLOCK = "application/vnd.reportgen.block+json"

VALUE = re.compile(r"\d[\d.]* (?:%|[µm]?m|mil|in|r/min|Hz|k?N|lbf|g·mm|oz·in)\b")
every_demo = pytest.mark.parametrize("name", DEMOS)


def number(text: str) -> float:
    return float(text.replace("\u2212", "-"))


@every_demo
def test_nothing_is_said_on_the_console_and_nothing_loaded(name: str, visit: Visit) -> None:
    seen = visit(name)
    assert seen["console"] == []
    loaded = [url for url in seen["requests"] if not url.startswith("data:")]
    assert len(loaded) == 1, loaded
    assert loaded[0].endswith("/data/report.html")


@every_demo
def test_axe_finds_no_violation_on_a_wide_screen_nor_on_a_phone(name: str, visit: Visit) -> None:
    assert visit(name)["axe"] == {"wide": [], "phone": []}


@every_demo
def test_no_screen_needs_to_scroll_sideways(name: str, visit: Visit) -> None:
    assert visit(name)["widths"] == {"390": 0, "768": 0, "1280": 0, "1920": 0}


@every_demo
def test_every_link_inside_leads_somewhere(name: str, visit: Visit) -> None:
    assert visit(name)["broken links"] == []


@every_demo
def test_the_conclusion_leads_to_where_its_numbers_are(
    name: str, visit: Visit, run_demo: Callable[[str], Any]
) -> None:
    followed = visit(name)["conclusion"]
    values = VALUE.findall(json.dumps(run_demo(name).results()["conclusion"], ensure_ascii=False))
    assert followed or not values, values
    for link in followed:
        assert link["seen"]
        value = link["words"].split()[0]
        assert value in link["target"], link


@every_demo
def test_a_figures_data_comes_out_of_the_page_itself(
    name: str, visit: Visit, run_demo: Callable[[str], Any]
) -> None:
    demo = run_demo(name)
    notebook = json.loads((demo.package / "data" / "calculation.ipynb").read_text("utf-8"))
    blocks = [
        output["data"][BLOCK]
        for cell in notebook["cells"]
        for output in cell.get("outputs", [])
        if BLOCK in output.get("data", {})
    ]
    drawn = next(
        curve
        for block in blocks
        if block["kind"] == "figure"
        for axes in block["axes"]
        for curve in axes["curves"]
    )
    data = visit(name)["data"]
    assert data["name"].endswith(".csv")
    assert demo.results()["document"]["number"] in data["name"]
    head, *rows = csv.reader(io.StringIO(data["text"]))
    assert drawn["name"] in head[1]
    assert [float(row[0]) for row in rows if row[0]] == pytest.approx(drawn["x"], rel=1e-6)
    assert [float(row[1]) for row in rows if row[1]] == pytest.approx(drawn["y"], rel=1e-6)


@every_demo
def test_pointing_at_a_curve_reads_its_value(name: str, visit: Visit) -> None:
    seen = visit(name)["hover"]
    for title in seen["titles"]:
        assert title in seen["reading"]
    said = re.search(r": .*? ([−\d.e]+), .*? ([−\d.e]+)$", seen["reading"])
    assert said, seen["reading"]
    assert number(said[1]) == pytest.approx(seen["x"], rel=1e-2)
    assert number(said[2]) == pytest.approx(seen["y"], rel=2e-2)
    assert seen["after"] == ""


@every_demo
def test_the_page_is_usable_by_keyboard(name: str, visit: Visit) -> None:
    keys = visit(name)["keys"]
    assert keys["first stop"] == "Skip to the report"
    assert keys["skips to"] == "content"
    one, two, back, away = keys["readings"]
    assert one
    assert two
    assert one != two
    assert back == one
    assert away == ""
    assert keys["ring"] != "none"


@every_demo
def test_with_scripts_off_and_no_network_all_is_there(name: str, visit: Visit) -> None:
    seen = visit(name)
    bare = seen["scripts off"]
    assert bare["text"].split() == seen["text"].split()
    assert bare["drawings"] == len(seen["figures"])
    assert bare["data"] == sum(figure["curves"] for figure in seen["figures"]) > 0


@every_demo
def test_every_figure_tells_its_finding_in_words(name: str, visit: Visit) -> None:
    for figure in visit(name)["figures"]:
        assert len(figure["alt"].split()) > 5
        assert re.search(r"\d", figure["alt"])


@every_demo
def test_every_figure_has_its_data_under_titles_with_units(name: str, visit: Visit) -> None:
    for figure in visit(name)["figures"]:
        if not figure["curves"]:
            assert "to scale" in figure["alt"]  # a drawing of the rotor plots no data
            continue
        assert all(re.match(r"\w", title) and ";" not in title for title in figure["titles"])
        assert any(re.search(r" \(.+\)$", title) for title in figure["titles"])


@every_demo
def test_the_browser_prints_pages_that_say_what_they_belong_to(
    name: str, visit: Visit, run_demo: Callable[[str], Any]
) -> None:
    about = run_demo(name).results()["document"]
    printed = visit(name)["print"]
    pages = printed["pages"]
    running = "DRAFT – not for use" if about["status"] == "draft" else about["status"]
    for n, page in enumerate(pages, 1):
        assert f"{about['number']} revision {about['revision']}, {running}" in page
        assert f"{n} of {len(pages)}" in page
        assert len(page.split()) > 10
    first = pages[0]
    for part in ("What was asked", "Conclusion", "Verdicts", "C1", about["title"].split()[0]):
        assert part in first, part
    assert "Contents" not in first
    for figure in printed["figures"]:
        assert figure["whole"]
        assert figure["height"] < 900  # CSS pixels; A4 leaves 258 mm, which are 975


@every_demo
def test_no_report_is_larger_than_5_mb(name: str, run_demo: Callable[[str], Any]) -> None:
    for form in ("report.html", "report.pdf"):
        assert (run_demo(name).package / "data" / form).stat().st_size < 5_000_000
