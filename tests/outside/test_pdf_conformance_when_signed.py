"""Signed PDFs judged by a validator of PDF/A-3a and PDF/UA-1.

Source: page-validation (PyPI), an independent validator that passes the veraPDF corpus by
its own account. Its rule SIGNATURE-BYTERANGE asks every signature to cover the whole file,
which no signature but the last can once a document is signed twice (ISO 32000-1, 12.8.1
lets later updates follow); from the second signature on this one complaint is expected.

Obtained: judged by a general-purpose library.
"""

from __future__ import annotations

import pikepdf
import pytest
from page import validate_pdf

BYTE_RANGE = "PDFA3A-SIGNATURE-BYTERANGE-001"


def failed_rules(path, profile):
    return {failure.rule_id for failure in validate_pdf(path, profile=profile).failures}


@pytest.mark.parametrize("profile", ["3a", "ua1"])
def test_the_published_pdf_conforms(approved_once, profile):
    assert validate_pdf(approved_once / "data" / "report.pdf", profile=profile).is_compliant


@pytest.mark.parametrize("profile", ["3a", "ua1"])
def test_the_first_signature_keeps_conformance(approved_once, profile):
    signed = approved_once / "signatures" / "prepared" / "report.pdf"
    assert validate_pdf(signed, profile=profile).is_compliant


@pytest.mark.parametrize("role", ["checked", "approved"])
def test_later_signatures_keep_conformance(approved_once, role):
    signed = approved_once / "signatures" / role / "report.pdf"
    assert failed_rules(signed, "3a") == {BYTE_RANGE}
    assert failed_rules(signed, "ua1") == set()


def test_the_validator_sees_a_planted_fault(approved_once, tmp_path):
    spoilt = tmp_path / "spoilt.pdf"
    with pikepdf.open(approved_once / "data" / "report.pdf") as pdf:
        del pdf.Root.Metadata
        pdf.save(spoilt)
    assert failed_rules(spoilt, "3a")


def test_signing_leaves_the_metadata_as_published(approved_once):
    with (
        pikepdf.open(approved_once / "data" / "report.pdf") as published,
        pikepdf.open(approved_once / "signatures" / "approved" / "report.pdf") as signed,
    ):
        assert signed.Root.Metadata.read_bytes() == published.Root.Metadata.read_bytes()
        assert str(signed.docinfo["/Title"]) == str(published.docinfo["/Title"])
