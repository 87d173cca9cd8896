"""Signatures in the PDF judged by Poppler's pdfsig.

Source: the ``pdfsig`` command on this machine (Poppler with NSS), which shares no code with
ours. It ends with 0 on a digest mismatch too, so its words are read.

Obtained: judged by a general-purpose tool.
"""

from __future__ import annotations

import shutil
import subprocess
from pathlib import Path

PDFSIG = shutil.which("pdfsig") or "pdfsig"


def pdfsig(pdf: Path) -> list[str]:
    done = subprocess.run(
        [PDFSIG, "-nocert", str(pdf)], capture_output=True, text=True, check=False
    )
    return done.stdout.split("Signature #")[1:]


def test_every_signature_is_valid_and_the_last_covers_all(approved_once):
    found = pdfsig(approved_once / "signatures" / "approved" / "report.pdf")
    assert len(found) == 3
    people = ("Ann Ash", "Bo Birch", "Cy Cedar")
    for text, field, person in zip(found, ("Prepared", "Checked", "Approved"), people, strict=True):
        assert f"Signature Field Name: {field}" in text
        assert f"Signer Certificate Common Name: {person}" in text
        assert "Signature Validation: Signature is Valid." in text
        assert "Signature Type: ETSI.CAdES.detached" in text
    assert "Total document signed" in found[-1]
    assert all("Not total document signed" in text for text in found[:-1])


def test_earlier_copies_hold_the_earlier_signatures(approved_once):
    assert len(pdfsig(approved_once / "signatures" / "prepared" / "report.pdf")) == 1
    assert len(pdfsig(approved_once / "signatures" / "checked" / "report.pdf")) == 2


def test_a_changed_byte_is_seen_by_pdfsig_too(approved):
    pdf = approved / "signatures" / "prepared" / "report.pdf"
    content = bytearray(pdf.read_bytes())
    content[content.index(b"/Title") + 8] ^= 1
    pdf.write_bytes(content)
    assert "Digest Mismatch" in pdfsig(pdf)[0]
