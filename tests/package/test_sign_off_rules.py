"""Who may sign what, and when: a failing case for each rule, and the case that passes."""

from __future__ import annotations

import json
from dataclasses import replace
from datetime import timedelta

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import PackageError, SignatureError
from reportgen.package.statement import Statement

HOLDS = {"holds": [{"id": "H1", "text": "mass"}, {"id": "H2", "text": "bow"}]}
FAILED = {"results": [{"id": "critical", "second": {"agrees": False}}]}


def refused(workshop, path, role, person, hours=9, **how):
    before = sorted(path.rglob("*"))
    with pytest.raises(SignatureError) as caught:
        workshop.sign(path, role, person, hours, **how)
    assert sorted(path.rglob("*")) == before
    return str(caught.value)


def test_a_draft_is_not_signed(workshop, tmp_path):
    path = workshop.package(tmp_path, status="draft")
    assert "a draft is not signed" in refused(workshop, path, "prepared", "Ann Ash")


@pytest.mark.parametrize(
    ("upto", "role", "person", "words"),
    [
        ("", "checked", "Bo Birch", "before it is signed as prepared"),
        ("", "approved", "Cy Cedar", "before it is signed as prepared"),
        ("prepared", "approved", "Cy Cedar", "before it is signed as checked"),
        ("prepared", "prepared", "Ann Ash", "signed as prepared already"),
        ("approved", "checked", "Bo Birch", "signed as checked already"),
    ],
)
def test_the_order_is_prepared_checked_approved(workshop, tmp_path, upto, role, person, words):
    path = workshop.package(tmp_path, upto)
    assert words in refused(workshop, path, role, person)


def test_who_prepared_cannot_be_the_only_checker(workshop, tmp_path):
    path = workshop.package(tmp_path, "prepared", checked={"name": "ann  ASH"})
    words = refused(workshop, path, "checked", "Ann Ash")
    assert "Ann Ash prepared it" in words
    assert "document.one_person" in words


def test_who_prepared_cannot_check_under_another_name(workshop, tmp_path):
    path = workshop.package(tmp_path, "prepared")
    ann = replace(workshop.identity("Ann Ash"))
    words = refused(workshop, path, "checked", "Bo Birch", identity=ann)
    assert "the certificate is the same" in words
    assert "the self-issued identity is that of Ann Ash" in words


def test_one_person_may_do_both_where_the_case_says_so(workshop, tmp_path, judge):
    who = {"name": "Ann Ash"}
    path = workshop.package(tmp_path, "prepared", checked=who, **{"one person": True})
    workshop.sign(path, "checked", "Ann Ash", 1)
    assert judge(path).ok


@pytest.mark.parametrize("word", ["yes", 1, "true", None])
def test_only_true_says_so(workshop, tmp_path, word):
    who = {"name": "Ann Ash"}
    path = workshop.package(tmp_path, "prepared", checked=who, **{"one person": word})
    assert "prepared it" in refused(workshop, path, "checked", "Ann Ash")


def test_the_signer_is_whom_the_report_names(workshop, tmp_path):
    path = workshop.package(tmp_path)
    words = refused(workshop, path, "prepared", "Bo Birch")
    assert "the report names Ann Ash under prepared, the signer is Bo Birch" in words


def test_anybody_may_sign_where_the_report_names_nobody(workshop, tmp_path, judge):
    path = workshop.package(tmp_path, prepared={"role": "engineer"}, checked=None)
    workshop.sign(path, "prepared", "Di Dogwood")
    workshop.sign(path, "checked", "Bo Birch", 1)
    assert judge(path).ok


def test_a_self_issued_identity_signs_for_its_holder_only(workshop, tmp_path):
    path = workshop.package(tmp_path)
    words = refused(workshop, path, "prepared", "Ann Ash", identity=workshop.identity("Bo Birch"))
    assert "the self-issued identity is that of Bo Birch" in words


def test_an_approval_needs_every_open_hold_accepted(workshop, tmp_path, judge):
    path = workshop.package(tmp_path, "checked", results=HOLDS)
    assert "not accepted: H1, H2" in refused(
        workshop, path, "approved", "Cy Cedar", accepted_holds=()
    )
    assert "not accepted: H2" in refused(
        workshop, path, "approved", "Cy Cedar", accepted_holds=["H1"]
    )
    workshop.sign(path, "approved", "Cy Cedar", 3, accepted_holds=["H1", "H2"])
    assert judge(path).signers[-1].accepted_holds == {"H1": "mass", "H2": "bow"}


def test_a_hold_that_is_not_there_cannot_be_accepted(workshop, tmp_path):
    path = workshop.package(tmp_path, results=HOLDS)
    words = refused(workshop, path, "prepared", "Ann Ash", accepted_holds=["H3"])
    assert "no open hold 'H3'" in words
    assert "open are: H1, H2" in words


def test_an_approval_needs_second_computations_that_agree(workshop, tmp_path):
    path = workshop.package(tmp_path, "checked", results=FAILED)
    assert "does not agree for critical" in refused(workshop, path, "approved", "Cy Cedar")


def test_a_checker_records_which_second_computations_agreed(workshop, tmp_path):
    results = {"results": [{"id": "a", "second": {"agrees": True}}, *FAILED["results"]]}
    path = workshop.package(tmp_path, "checked", results=results)
    stated = json.loads((path / "signatures/checked/statement.json").read_bytes())
    assert stated["second computations"] == {"agreed": ["a"], "not agreed": ["critical"]}


def test_a_time_before_the_last_sign_off_is_refused(workshop, tmp_path):
    path = workshop.package(tmp_path, "prepared")
    assert "lies before that of" in refused(workshop, path, "checked", "Bo Birch", -1)


def test_all_reasons_are_given_at_once(workshop, tmp_path):
    path = workshop.package(tmp_path, status="draft")
    words = refused(workshop, path, "checked", "Ann Ash", accepted_holds=["H9"])
    assert len(words.splitlines()) == 5


def test_an_expired_identity_does_not_sign(workshop, tmp_path):
    path = workshop.package(tmp_path)
    late = workshop.signed_time + timedelta(days=365 * 11)
    assert "expired on" in refused(workshop, path, "prepared", "Ann Ash", time=late)


@pytest.mark.parametrize(
    "harm",
    [
        lambda path: (path / "data/report.html").write_text("other"),
        lambda path: (path / "data/more.txt").write_text("more"),
        lambda path: (path / "tagmanifest-sha512.txt").unlink(),
        lambda path: (path / "data/results.json").unlink(),
        lambda path: (path / "empty").mkdir(),
    ],
)
def test_a_damaged_package_is_not_signed(workshop, tmp_path, harm):
    path = workshop.package(tmp_path)
    harm(path)
    with pytest.raises(PackageError, match="damaged"):
        workshop.sign(path, "prepared", "Ann Ash", accepted_holds=())
    assert not (path / "signatures").exists()


def statement(**changes):
    from datetime import UTC, datetime

    whole = {
        "role": "prepared",
        "number": "CAL-1",
        "revision": "A",
        "name": "Ann Ash",
        "words": "I did",
        "time": datetime(2026, 3, 2, tzinfo=UTC),
        "certificates": ("AA",),
        "holder": "Ann Ash",
        "self_issued": True,
        "accepted_holds": {},
        "second_agreed": (),
        "second_failed": (),
        "tag_manifest": "00",
        "pdf": None,
        "earlier": {},
    }
    return Statement(**(whole | changes))


@given(st.text(), st.text(), st.dictionaries(st.text(), st.text(), max_size=3))
@settings(deadline=None, max_examples=100)
def test_a_statement_reads_back_as_it_was_written(name, words, holds):
    made = statement(name=name, words=words, accepted_holds=holds)
    try:
        content = made.to_bytes()
    except UnicodeEncodeError:
        return  # a lone surrogate is no text
    assert Statement.from_bytes(content) == made


@given(st.data())
@settings(deadline=None, max_examples=200)
def test_a_statement_changed_in_one_byte_is_another_statement_or_none(data):
    made = statement()
    content = bytearray(made.to_bytes())
    content[data.draw(st.integers(0, len(content) - 1))] ^= data.draw(st.integers(1, 255))
    try:
        read = Statement.from_bytes(bytes(content))
    except ValueError:
        return
    assert read != made
    assert read.description != made.description


@pytest.mark.parametrize(
    "content", [b"", b"[]", b"{}", b"null", b'{"format": 2}', b"[" * 5000, b"\xff", b'"x"']
)
def test_what_is_no_statement_is_refused(content):
    with pytest.raises(ValueError, match=r"statement|format|Expecting|codec"):
        Statement.from_bytes(content)
