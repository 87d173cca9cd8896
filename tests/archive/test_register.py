"""The register: what it lists, what it says of damage, and that nothing hostile gets through."""

from __future__ import annotations

import csv
import io
import json
import os
import shutil
from pathlib import Path
from typing import Any

import pytest

from reportgen.archive.register import natural, read_register, to_json, without_series
from reportgen.archive.register_page import register_csv, register_html, write_register
from reportgen.errors import InputError, PackageError
from reportgen.package.zipped import zip_package

CRITERIA = [
    {"title": "Separation margin", "verdict": "does not meet"},
    {"title": "Amplitude", "verdict": "meets"},
]
HOSTILE = '"><script>alert(1)</script>\u202e=cmd|x'


@pytest.fixture(scope="module")
def archive(workshop: Any, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Give an archive: two revisions, a zip, a draft, a hostile title, three broken packages."""
    folder = tmp_path_factory.mktemp("register") / "archive"
    old, new = folder / "2025", folder / "2026"
    workshop.package(old, "prepared", revision="A", date="2025-11-03")
    workshop.package(
        new, "approved", revision="B", results={"criteria": CRITERIA, "holds": [{"id": "H1"}]}
    )
    zipped = workshop.package(new, "prepared", number="CAL-0500")
    zip_package(zipped)
    shutil.rmtree(zipped)
    workshop.package(new, number="CAL-0501", status="draft", title=HOSTILE)
    gone = workshop.package(new, "prepared", number="CAL-0600")
    (gone / "data" / "report.pdf").unlink()
    changed = workshop.package(new, "prepared", number="CAL-0601")
    results = changed / "data" / "results.json"
    results.write_bytes(results.read_bytes().replace(b"for review", b"for  issue"))
    (new / "broken.zip").write_bytes(b"PK\x03\x04 and nothing more")
    (new / "notes").mkdir()
    (new / "notes" / "letter.txt").write_text("no package")
    return folder


def rows(archive: Path) -> dict[str, Any]:
    return {Path(entry.place).name: entry for entry in read_register(archive)}


def test_each_package_is_a_row_with_its_document_verdict_holds_and_sign_offs(
    archive: Path,
) -> None:
    found = rows(archive)
    assert len(found) == 7
    one = found["CAL-0417_B"]
    assert (one.number, one.revision, one.status, one.date) == (
        "CAL-0417", "B", "for review", "2026-03-02",
    )  # fmt: skip
    assert (one.verdict, one.not_met, one.holds) == ("does not meet", ("Separation margin",), 1)
    assert [(s.role, s.name, s.time) for s in one.sign_offs] == [
        ("prepared", "Ann Ash", "2026-03-02T10:00:00Z"),
        ("checked", "Bo Birch", "2026-03-02T11:00:00Z"),
        ("approved", "Cy Cedar", "2026-03-02T12:00:00Z"),
    ]
    assert found["CAL-0500_B.zip"].sign_offs[0].name == "Ann Ash"
    assert found["CAL-0501_B"].fault == ""  # a draft need not be signed


def test_an_earlier_revision_names_the_one_that_follows_it(archive: Path) -> None:
    found = rows(archive)
    assert found["CAL-0417_A"].superseded_by == "B"
    assert found["CAL-0417_B"].superseded_by == ""


@pytest.mark.parametrize(
    ("name", "words"),
    [
        ("CAL-0600_B", "missing: data/report.pdf"),
        ("CAL-0601_B", "data/results.json is not the one of manifest-sha512.txt"),
        ("broken.zip", "cannot be read"),
    ],
)
def test_a_damaged_package_is_a_row_that_says_so(archive: Path, name: str, words: str) -> None:
    entry = rows(archive)[name]
    assert words in entry.fault
    page = register_html([entry]).decode()
    assert words in page


@pytest.mark.parametrize("lost", ["bagit.txt", "data/results.json", "manifest-sha512.txt"])
def test_whatever_file_a_package_lost_it_is_not_passed_over(
    lost: str, workshop: Any, tmp_path: Path
) -> None:
    (workshop.package(tmp_path) / lost).unlink()
    assert [bool(entry.fault) for entry in read_register(tmp_path)] == [True]


def test_an_unsigned_package_that_is_no_draft_is_said_to_be_so(
    workshop: Any, tmp_path: Path
) -> None:
    workshop.package(tmp_path)
    assert "unsigned" in read_register(tmp_path)[0].fault


def test_verifying_finds_what_a_listing_cannot_see(workshop: Any, tmp_path: Path) -> None:
    report = workshop.package(tmp_path, "prepared") / "data" / "report.html"
    report.write_bytes(report.read_bytes().replace(b"Test", b"Best"))
    assert read_register(tmp_path)[0].fault == ""
    entry = read_register(tmp_path, verify=True)[0]
    assert "report.html" in entry.fault
    assert "damaged" in entry.verified
    assert str(tmp_path) not in json.dumps(to_json([entry]))


def test_text_from_packages_never_becomes_markup_or_a_formula(archive: Path) -> None:
    page = register_html(read_register(archive)).decode()
    assert "<script>alert" not in page
    assert "&lt;script&gt;alert(1)" in page
    assert "\u202e" not in page
    cells = [
        cell
        for title in ("=1+1", "+1", "-1", "@SUM(A1)")
        for row in csv.reader(io.StringIO(_csv_of(title)))
        for cell in row
    ]
    assert cells
    assert not [cell for cell in cells if cell[:1] in tuple("=+-@")]


def _csv_of(title: str) -> str:
    from reportgen.archive.register import Entry

    return register_csv([Entry("CAL-1_A", "CAL-1", title, "A")]).decode("utf-8-sig")


def test_the_csv_holds_the_same_packages(archive: Path) -> None:
    entries = read_register(archive)
    table = list(csv.DictReader(io.StringIO(register_csv(entries).decode("utf-8-sig"))))
    assert [row["place"] for row in table] == [entry.place for entry in entries]
    one = next(row for row in table if row["place"].endswith("CAL-0417_B"))
    assert (one["approved"], one["criteria not met"]) == ("Cy Cedar", "Separation margin")


def test_the_page_tells_no_place_of_this_machine_and_links_from_where_it_lies(
    archive: Path,
) -> None:
    entries = read_register(archive)
    page, table = archive.parent / "out.html", archive.parent / "out.csv"
    write_register(archive, entries, page, table)
    text = page.read_text() + table.read_text()
    assert str(archive.parent) not in text
    links = [part.split('"')[0] for part in page.read_text().split('href="')[1:]]
    assert "./archive/2026/CAL-0417_B/data/report.html" in links
    # every link leads to something, but those of packages that lost their report
    assert [link for link in links if not (page.parent / link).exists()] == []
    again = register_html(read_register(archive), "archive/")
    assert again == page.read_bytes()


def test_a_page_that_cannot_be_written_leaves_the_old_one(archive: Path, tmp_path: Path) -> None:
    page = tmp_path / "register.html"
    page.write_text("old")
    (tmp_path / "register.csv").mkdir()  # a folder stands where the table must go
    with pytest.raises(PackageError, match=r"register\.csv"):
        write_register(archive, [], tmp_path / "new.html", tmp_path / "register.csv")
    assert page.read_text() == "old"
    assert [p.name for p in tmp_path.iterdir() if p.name.startswith(".")] == []


def test_an_archive_that_is_not_there_is_refused(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="no folder here"):
        read_register(tmp_path / "nowhere")


def test_results_are_read_the_same_without_their_series() -> None:
    whole = {"format": 1, "document": {"number": "C"}, "series": {"a": {"x": [1.0]}, "b": {}}}
    content = (json.dumps(whole, indent=1) + "\n").encode()
    cut = without_series(content)
    assert b'"x"' not in cut
    assert json.loads(cut) == {**whole, "series": {}}
    for other in (
        json.dumps(whole).encode(),
        (json.dumps({**whole, "holds": []}, indent=1) + "\n").encode(),
        content.replace(b'\n "series"', b'\n "seres"'),
    ):
        assert without_series(other) == other


def test_revisions_are_ordered_as_people_order_them() -> None:
    assert sorted(["10", "2", "B", "A", "AA", "1"], key=natural) == ["1", "2", "10", "A", "B", "AA"]


def test_links_and_hidden_folders_are_passed_over(workshop: Any, tmp_path: Path) -> None:
    package = workshop.package(tmp_path / "archive")
    (tmp_path / "archive" / "link").symlink_to(package)
    shutil.copytree(package, tmp_path / "archive" / ".CAL-0417_B.host-1.part" / "CAL-0417_B")
    assert [entry.place for entry in read_register(tmp_path / "archive")] == ["CAL-0417_B"]


def test_the_page_filters_sorts_and_is_accessible_in_a_browser(
    archive: Path, tmp_path: Path
) -> None:
    """Drive the page in Chromium; rules of accessibility as axe-core has them."""
    from axe_core_python.sync_playwright import Axe
    from playwright.sync_api import sync_playwright

    page_file = tmp_path / "register.html"
    page_file.write_bytes(register_html(read_register(archive)))
    with sync_playwright() as play:
        browser = play.chromium.launch(
            executable_path=os.environ.get("CHROMIUM", "/usr/bin/chromium"), args=["--no-sandbox"]
        )
        plain = browser.new_context(java_script_enabled=False).new_page()
        plain.goto(page_file.as_uri())
        assert plain.locator("tbody tr:visible").count() == 7
        assert plain.locator("input:visible").count() == 0
        page = browser.new_context(bypass_csp=True).new_page()
        faults: list[str] = []
        page.on("console", lambda message: faults.append(message.text))
        page.goto(page_file.as_uri())
        assert page.locator("#count").inner_text() == "7 of 7 packages shown"
        page.fill("#words", "cal-0417 approved")
        assert page.locator("tbody tr:visible").count() == 1
        page.fill("#words", "")
        page.check("#latest")
        assert page.locator("tbody tr.old:visible").count() == 0
        page.uncheck("#latest")
        page.select_option("#verdict", "does not meet")
        assert page.locator("tbody tr:visible").count() == 1
        page.select_option("#verdict", "")
        page.click("thead button:has-text('Revision')")
        first = page.locator("tbody tr").first.inner_text()
        page.click("thead button:has-text('Revision')")
        assert page.locator("tbody tr").last.inner_text() == first
        found = Axe().run(page)
        assert [violation["id"] for violation in found["violations"]] == []
        assert faults == []
        strict = browser.new_page()  # under the page's own policy
        strict.goto(page_file.as_uri())
        assert strict.locator("#count").inner_text() == "7 of 7 packages shown"
        browser.close()
