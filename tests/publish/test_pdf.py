"""The PDF against PDF/A-3a and PDF/UA-1, and by its structure."""

from __future__ import annotations

import io
import re
import subprocess
from collections.abc import Callable
from pathlib import Path
from types import ModuleType
from typing import Any

import numpy as np
import pikepdf
import pytest

from reportgen.errors import PublishError
from reportgen.publish import Published, publish

Faults = Callable[[bytes], list[str]]
ATTACHED = {"case.yaml": b"a: 1\n", "results.json": b"{}\n", "calculation.ipynb": b"{}\n"}


def filled(report: Path, folder: Path) -> list[float]:
    """Return how far down each page's body goes, as a share, by what is seen on it."""
    done = subprocess.run(
        ["pdftoppm", "-r", "20", "-gray", report, folder / "page"], capture_output=True, check=True
    )
    assert done.returncode == 0
    found = []
    for image in sorted(folder.glob("page*.pgm")):
        _, size, _, pixels = image.read_bytes().split(b"\n", 3)
        width, height = map(int, size.split())
        rows = np.frombuffer(pixels, np.uint8).reshape(height, width)
        body = rows[height // 12 : -height // 12]  # between the lines at the page's edges
        inked = np.flatnonzero((body < 200).any(axis=1))
        found.append(float(inked[-1] + 1) / len(body) if inked.size else 0.0)
    return found


DEMOS = sorted(p.stem for p in (Path(__file__).parents[2] / "cases").glob("*.yaml"))


@pytest.fixture(scope="module")
def opened(published: Published) -> pikepdf.Pdf:
    return pikepdf.open(io.BytesIO(published.pdf))


def words(pdf: bytes, folder: Path) -> str:
    place = folder / "r.pdf"
    place.write_bytes(pdf)
    done = subprocess.run(["pdftotext", "-layout", place, "-"], capture_output=True, check=True)
    return done.stdout.decode()


@pytest.mark.parametrize("status", ["draft", "for review", "for issue"])
@pytest.mark.parametrize("units", ["si", "us"])
def test_every_status_and_paper_is_pdf_a_and_pdf_ua(
    sample: ModuleType, pdf_faults: Faults, status: str, units: str
) -> None:
    about = sample.results()["document"] | {"status": status}
    text = "# One\n\nText $x^2$.\n\n## Two\n\n| a | b |\n|---|--:|\n| 1 | 2 |\n"
    report = sample.small(sample.figure_block("f"), text=text, document=about, units=units)
    assert pdf_faults(publish(report, attachments=ATTACHED).pdf) == []


def test_the_full_sample_is_pdf_a_and_pdf_ua(published: Published, pdf_faults: Faults) -> None:
    assert pdf_faults(published.pdf) == []
    assert published.pdf.endswith(b"\n")


def test_the_validation_sees_a_planted_fault(published: Published, pdf_faults: Faults) -> None:
    broken = pikepdf.open(io.BytesIO(published.pdf))
    del broken.Root.MarkInfo
    out = io.BytesIO()
    broken.save(out)
    assert pdf_faults(out.getvalue())


def test_metadata_says_what_the_document_is(opened: pikepdf.Pdf) -> None:
    with opened.open_metadata() as metadata:
        assert (
            metadata["dc:title"]
            == "CAL-0001 revision B: Lateral vibration of a made-up cooling fan"
        )
        assert metadata["dc:creator"] == ["A. Nyman"]
        assert metadata["pdfaid:part"] == "3"
        assert metadata["pdfuaid:part"] == "1"
    assert str(opened.docinfo["/CreationDate"]).startswith("D:20260302")
    assert str(opened.Root.Lang) == "en"


def test_files_are_attached_unchanged(opened: pikepdf.Pdf) -> None:
    found = {name: spec.get_file().read_bytes() for name, spec in opened.attachments.items()}
    assert found == ATTACHED
    relations = [str(spec.AFRelationship) for spec in opened.Root.AF]
    assert sorted(relations) == ["/Data", "/Source", "/Source"]


def unembedded(opened: pikepdf.Pdf) -> list[str]:
    descriptors = [
        one for one in opened.objects
        if isinstance(one, pikepdf.Dictionary) and one.get("/Type") == "/FontDescriptor"
    ]  # fmt: skip
    assert len(descriptors) >= 3
    files = ("/FontFile", "/FontFile2", "/FontFile3")
    return [str(one.FontName) for one in descriptors if not any(key in one for key in files)]


def test_every_font_is_embedded(opened: pikepdf.Pdf) -> None:
    assert unembedded(opened) == []


def tags(opened: pikepdf.Pdf) -> list[Any]:
    return [
        one for one in opened.objects
        if isinstance(one, pikepdf.Dictionary) and "/S" in one and "/P" in one and "/K" in one
    ]  # fmt: skip


def test_figures_and_formulas_have_words(opened: pikepdf.Pdf) -> None:
    kinds = [str(tag.S) for tag in tags(opened)]
    for kind in ("/H1", "/H2", "/Table", "/TH", "/TD", "/L", "/Figure", "/Formula", "/Link"):
        assert kind in kinds, kind
    spoken = [tag for tag in tags(opened) if str(tag.S) in ("/Figure", "/Formula")]
    assert len(spoken) > 10
    assert all(str(tag.get("/Alt", "")).strip() for tag in spoken)
    assert any("peaks at 1672 rpm" in str(tag.Alt) for tag in spoken)
    assert any("square root of k over m" in str(tag.Alt) for tag in spoken)


def titles(opened: pikepdf.Pdf) -> list[str]:
    with opened.open_outline() as outline:
        return [item.title for item in outline.root]


def test_the_outline_names_every_section(opened: pikepdf.Pdf) -> None:
    assert [t for t in titles(opened) if t[0].isdigit()] == [
        "1 Purpose and scope", "2 Method", "3 Results", "4 Awkward text", "5 Cautions",
        "6 About this document",
    ]  # fmt: skip
    assert "Verdicts" in titles(opened)


def test_each_page_says_what_it_belongs_to(published: Published, tmp_path: Path) -> None:
    pages = words(published.pdf, tmp_path).split("\f")[:-1]
    for n, one in enumerate(pages, 1):
        assert one.count("CAL-0001 revision B") >= 2
        assert f"page {n} of {len(pages)}" in one
        assert "for review" in one
        assert "2026-03-02" in one
        assert "DRAFT" not in one


def test_a_draft_says_so_on_every_page(sample: ModuleType, tmp_path: Path) -> None:
    about = sample.results()["document"] | {"status": "draft"}
    report = sample.small(sample.long_table("t", 90) | {"note": ""}, document=about)
    pages = words(publish(report).pdf, tmp_path).split("\f")[:-1]
    assert len(pages) >= 3
    assert all("DRAFT – not for use" in one for one in pages)
    assert "cannot be signed" in pages[0]
    assert "signatures/" not in pages[0]


def test_page_one_answers_first(published: Published, tmp_path: Path) -> None:
    first = words(published.pdf, tmp_path).split("\f")[0]
    for text in (
        "Cooling fan, tag K-12", "What was asked", "Conclusion", "does not meet", "not assessed",
        "84.1 µm 0-peak", "at most 60 µm", "PS-4", "H2", "Revision history", "Sign-off",
        "B. Okoro", "nobody named", "signatures/prepared/",
    ):  # fmt: skip
        assert text in first, text


def test_a_long_table_repeats_its_head(published: Published, tmp_path: Path) -> None:
    pages = words(published.pdf, tmp_path).split("\f")
    assert sum("Remark" in one and "Ratio" in one for one in pages) >= 2


def test_awkward_text_is_printed_as_text(published: Published, tmp_path: Path) -> None:
    text = words(published.pdf, tmp_path)
    for part in (
        "<script>alert('x')</script>", "#panic(1) $x$ *bold* _it_ `raw` @ref <label>",
        r"\input{/etc/passwd} \write18{ls}", "{{ 7*7 }} {% raw %}", "U+4E2D", "U+202E",
        "U+1F642", "U+0007",
    ):  # fmt: skip
        assert part in text, part
    assert "are printed as their Unicode code points" in " ".join(text.split())


def test_links_lead_to_places_that_exist(opened: pikepdf.Pdf) -> None:
    places = {
        "https://example.org/a?b=1&c=2" if "/A" in note and note.A.get("/S") == "/URI" else "inside"
        for one in opened.pages
        for note in one.get("/Annots", [])
    }
    assert places == {"https://example.org/a?b=1&c=2", "inside"}


@pytest.mark.parametrize(("units", "size"), [("si", (595, 842)), ("us", (612, 792))])
def test_paper_follows_the_units(sample: ModuleType, units: str, size: tuple[int, int]) -> None:
    opened = pikepdf.open(io.BytesIO(publish(sample.small(units=units)).pdf))
    box = [round(float(v)) for v in opened.pages[0].MediaBox]
    assert tuple(box[2:]) == size


def test_a_date_that_is_none_is_refused(sample: ModuleType) -> None:
    about = sample.results()["document"]
    for date in ("2026-02-30", "soon"):
        with pytest.raises(PublishError, match="date"):
            publish(sample.small(document=about | {"date": date}))


@pytest.mark.parametrize("name", ["title", "number", "project"])
def test_ten_thousand_characters_do_not_break_the_page(
    sample: ModuleType, pdf_faults: Faults, name: str
) -> None:
    about = sample.results()["document"] | {name: "W" * 10_000}
    report = publish(sample.small(document=about))
    assert pdf_faults(report.pdf) == []


def test_the_same_notebook_gives_the_same_bytes(sample: ModuleType, published: Published) -> None:
    again = publish(sample.full(), attachments=ATTACHED)
    assert again.pdf == published.pdf
    assert again.html == published.html


@pytest.mark.parametrize("name", DEMOS)
def test_every_demo_is_a_report_to_file_and_to_read_aloud(
    name: str, run_demo: Callable[[str], Any], pdf_faults: Faults, tmp_path: Path
) -> None:
    demo = run_demo(name)
    held = demo.package / "data"
    about = demo.results()["document"]
    made = (held / "report.pdf").read_bytes()
    assert pdf_faults(made) == []
    opened = pikepdf.open(io.BytesIO(made))
    assert unembedded(opened) == []
    with opened.open_metadata() as metadata:
        heading = f"{about['number']} revision {about['revision']}: {about['title']}"
        assert metadata["dc:title"] == heading
        assert metadata["dc:creator"] == [about["prepared"]["name"]]
    for file, spec in opened.attachments.items():
        assert spec.get_file().read_bytes() == (held / file).read_bytes(), file
    assert {"case.yaml", "results.json", "calculation.ipynb"} <= set(opened.attachments)
    spoken = [tag for tag in tags(opened) if str(tag.S) in ("/Figure", "/Formula")]
    assert spoken
    assert all(len(str(tag.get("/Alt", "")).strip()) > 0 for tag in spoken)
    sections = re.findall(
        r'<h2 id="section-[^>]*><span class="number">(\d+)</span> ([^<]*)</h2>',
        (held / "report.html").read_text("utf-8"),
    )
    assert [t for t in titles(opened) if t[0].isdigit()] == [f"{n} {t}" for n, t in sections]
    pages = words(made, tmp_path).split("\f")[:-1]
    for n, one in enumerate(pages, 1):
        assert one.count(f"{about['number']} revision {about['revision']}") >= 2
        for part in (about["status"], about["date"], f"page {n} of {len(pages)}"):
            assert part in one, part
    for part in ("What was asked", "Conclusion", "Verdicts", "Open holds", "Prepared"):
        assert part in pages[0], part
    # a page ends early where a figure or table would be cut, but none is nearly empty
    assert min(filled(held / "report.pdf", tmp_path)[:-1]) > 0.3
    size = (612, 792) if demo.results()["units"] == "us" else (595, 842)
    assert tuple(round(float(v)) for v in opened.pages[0].MediaBox)[2:] == size
