"""Names of packages and of files in them."""

from __future__ import annotations

import unicodedata

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import PackageError
from reportgen.package.names import LONGEST_NAME, clashes, name_fault, package_name


@pytest.mark.parametrize(
    ("number", "revision", "name"),
    [
        ("CAL-0417", "B", "CAL-0417_B"),
        ("CAL/0417\\26", "B", "CAL-0417-26_B"),
        ("..CAL", "B.", "CAL_B"),
        (".hidden", "0", "hidden_0"),
        ("100%", "A", "100-_A"),
        ("a\r\nb", "A", "a--b_A"),
        ("Cafe\u0301", "A", "Café_A"),
        ("  two  words ", "A", "two-words_A"),
        ("evil\u202egnp", "A", "evil-gnp_A"),
    ],
)
def test_the_name_is_made_from_number_and_revision(number, revision, name):
    assert package_name(number, revision) == name


@pytest.mark.parametrize("number", ["CON", "nul", "Com1", "LPT9.txt", "", "   ", "..."])
def test_numbers_that_cannot_name_a_folder_are_refused(number):
    with pytest.raises(PackageError):
        package_name(number, "A")


def test_a_name_too_long_is_refused_with_the_limit():
    with pytest.raises(PackageError, match=str(LONGEST_NAME)):
        package_name("N" * LONGEST_NAME, "A")


@given(st.text(max_size=40), st.text(max_size=6))
@settings(deadline=None, max_examples=300)
def test_whatever_comes_out_is_a_name_on_every_system(number, revision):
    try:
        name = package_name(number, revision)
    except PackageError:
        return
    assert name_fault(name) == ""
    assert "/" not in name
    assert not name.startswith(".")
    assert unicodedata.is_normalized("NFC", name)


@pytest.mark.parametrize(
    "path",
    [
        *("", "/etc/passwd", "../x", "a/../b", "a//b", "./a", "a\\b", "C:x", "a%0A", "a\nb"),
        *("a\rb", "Cafe\u0301", "con", "data/NUL.txt", "a. ", "a.", " a", "x" * 256, "a\u202eb"),
    ],
)
def test_paths_that_mean_something_else_elsewhere_are_faulted(path):
    assert name_fault(path)


@pytest.mark.parametrize("path", ["report.pdf", "tables/a b.csv", "Ωmega.csv", ".keep", "a..b"])
def test_ordinary_paths_are_not_faulted(path):
    assert name_fault(path) == ""


def test_files_that_would_be_one_file_clash():
    assert clashes(["a.csv", "A.CSV"]) == [("A.CSV", "a.csv")]
    assert clashes(["a", "a/b"]) == [("a", "a/b")]
    assert clashes(["a", "b/a"]) == []
