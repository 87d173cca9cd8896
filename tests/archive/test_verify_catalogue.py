"""Every rule of verification has a package that breaks it, and is told so in words."""

from __future__ import annotations

import hashlib
import json
import os
import shutil
from datetime import timedelta
from pathlib import Path

import pytest

from reportgen.package import sign as signing
from reportgen.package.bag import bag_files, manifest_bytes
from reportgen.package.write import read_payload

P7S = "tagmanifest-sha512.txt.p7s"


def repack(path: Path, **payload: bytes) -> None:
    """Change the payload and make every manifest anew, as who has no key could."""
    files = bag_files(read_payload(path) | payload, {"External-Identifier": "CAL-0417"})
    for name, content in files.items():
        (path / name).parent.mkdir(parents=True, exist_ok=True)
        (path / name).write_bytes(content)


def retag(path: Path) -> None:
    """Make the tag manifest anew."""
    names = ("bag-info.txt", "bagit.txt", "manifest-sha512.txt")
    digests = {name: hashlib.sha512((path / name).read_bytes()).hexdigest() for name in names}
    (path / "tagmanifest-sha512.txt").write_bytes(manifest_bytes(digests))


def edit(path: Path, old: bytes, new: bytes) -> None:
    content = path.read_bytes()
    assert old in content
    path.write_bytes(content.replace(old, new, 1))


def append(path: Path, content: bytes) -> None:
    path.write_bytes(path.read_bytes() + content)


def swap(one: Path, other: Path) -> None:
    a, b = one.read_bytes(), other.read_bytes()
    one.write_bytes(b)
    other.write_bytes(a)


def link(path: Path, name: str) -> None:
    outside = path.parent / "outside"
    shutil.move(path / name, outside)
    (path / name).symlink_to(outside)


def weaker(path: Path) -> None:
    for kind in ("manifest", "tagmanifest"):
        lines = (path / f"{kind}-sha512.txt").read_text().splitlines()
        names = [line[130:] for line in lines if "sha512" not in line[130:]]
        names += ["manifest-md5.txt"] if kind == "tagmanifest" else []
        (path / f"{kind}-md5.txt").write_text(
            "".join(f"{hashlib.md5((path / n).read_bytes()).hexdigest()}  {n}\n" for n in names)
        )
    for kind in ("manifest", "tagmanifest"):
        (path / f"{kind}-sha512.txt").unlink()


BAG = {
    "a changed byte": (
        lambda p: edit(p / "data/report.html", b"Test", b"Tesu"),
        "data/report.html: changed",
    ),
    "a file emptied": (
        lambda p: (p / "data/case.yaml").write_bytes(b""),
        "data/case.yaml: changed",
    ),
    "a file added": (
        lambda p: (p / "data/tables/more.csv").write_text("1"),
        "data/tables/more.csv: not in the manifest: added",
    ),
    "an empty file added": (
        lambda p: (p / "data/.keep").touch(),
        "data/.keep: not in the manifest",
    ),
    "a file removed": (
        lambda p: (p / "data/case.yaml").unlink(),
        "data/case.yaml: missing",
    ),
    "a file renamed": (
        lambda p: (p / "data/case.yaml").rename(p / "data/case.yml"),
        "data/case.yaml: renamed to data/case.yml",
    ),
    "a file renamed in case only": (
        lambda p: (p / "data/case.yaml").rename(p / "data/Case.yaml"),
        "data/case.yaml: renamed to data/Case.yaml",
    ),
    "two files exchanged": (
        lambda p: swap(p / "data/case.yaml", p / "data/inputs.json"),
        "data/inputs.json: changed",
    ),
    "a digest in the manifest changed": (
        lambda p: edit(p / "manifest-sha512.txt", b"a", b"b"),
        "manifest-sha512.txt: changed",
    ),
    "the manifest removed": (
        lambda p: (p / "manifest-sha512.txt").unlink(),
        "manifest-sha512.txt: missing",
    ),
    "the tag manifest removed": (
        lambda p: (p / "tagmanifest-sha512.txt").unlink(),
        "tagmanifest-sha512.txt: missing",
    ),
    "the tag manifest emptied": (
        lambda p: (p / "tagmanifest-sha512.txt").write_bytes(b""),
        "bagit.txt: not in the manifest: added",
    ),
    "the tag manifest no manifest": (
        lambda p: (p / "tagmanifest-sha512.txt").write_bytes(b"\xff\n"),
        "is not a list of SHA-512 digests",
    ),
    "manifest lines in another order": (
        lambda p: (p / "tagmanifest-sha512.txt").write_bytes(
            b"".join(reversed((p / "tagmanifest-sha512.txt").read_bytes().splitlines(True)))
        ),
        "order or line ends",
    ),
    "line ends changed": (
        lambda p: (p / "tagmanifest-sha512.txt").write_bytes(
            (p / "tagmanifest-sha512.txt").read_bytes().replace(b"\n", b"\r\n")
        ),
        "tagmanifest-sha512.txt",
    ),
    "digests in capitals": (
        lambda p: (p / "tagmanifest-sha512.txt").write_bytes(
            (p / "tagmanifest-sha512.txt").read_bytes().replace(b"a", b"A")
        ),
        "is not a list of SHA-512 digests",
    ),
    "a manifest of a weaker hash beside": (
        lambda p: (p / "manifest-md5.txt").write_text("0" * 32 + "  data/case.yaml\n"),
        "a manifest of another hash",
    ),
    "manifests downgraded to a weaker hash": (weaker, "a manifest of another hash"),
    "fetch.txt": (
        lambda p: (p / "fetch.txt").write_text("http://x.invalid/a - data/a\n"),
        "fetch.txt: would let files be fetched",
    ),
    "a file at the top": (
        lambda p: (p / "README.txt").write_text("hello"),
        "README.txt: does not belong to a package",
    ),
    "a hidden file at the top": (
        lambda p: (p / ".DS_Store").write_bytes(b"\0"),
        ".DS_Store: does not belong",
    ),
    "a folder at the top": (
        lambda p: shutil.copytree(p / "data", p / "data2"),
        "data2/case.yaml: does not belong",
    ),
    "an empty folder in the payload": (
        lambda p: (p / "data/empty").mkdir(),
        "data/empty/: empty folder",
    ),
    "an empty folder at the top": (lambda p: (p / "x").mkdir(), "x/: empty folder"),
    "a file behind a link": (lambda p: link(p, "data/case.yaml"), "data/case.yaml: a link"),
    "a folder behind a link": (lambda p: link(p, "data/tables"), "data/tables: a link"),
    "the payload behind a link": (lambda p: link(p, "data"), "data: a link"),
    "a link to nowhere": (
        lambda p: (p / "data/x").symlink_to("nowhere"),
        "data/x: a link",
    ),
    "a pipe": (lambda p: os.mkfifo(p / "data/pipe"), "data/pipe: neither a file nor a folder"),
    "a name that differs elsewhere": (
        lambda p: (p / "data/Cafe\u0301.txt").write_text(""),
        "not in Unicode normal form C",
    ),
    "a name with a line end": (
        lambda p: (p / "data/a\nb").write_text(""),
        "control, format or unassigned character",
    ),
    "names that collide": (
        lambda p: (p / "data/CASE.yaml").write_text(""),
        "collides with",
    ),
    "another version of BagIt": (
        lambda p: (edit(p / "bagit.txt", b"1.0", b"0.9"), retag(p)),
        "bagit.txt: is not the declaration of BagIt 1.0",
    ),
    "the declaration removed": (
        lambda p: (p / "bagit.txt").unlink(),
        "bagit.txt: is not the declaration",
    ),
    "another size stated": (
        lambda p: (edit(p / "bag-info.txt", b"Payload-Oxum: ", b"Payload-Oxum: 1"), retag(p)),
        "bag-info.txt: states the size 1",
    ),
    "bag info removed": (lambda p: (p / "bag-info.txt").unlink(), "states the size None"),
    "bag info no text": (
        lambda p: (p / "bag-info.txt").write_bytes(b"\xff\xfe"),
        "states the size None",
    ),
    "the folder renamed to another revision": (
        lambda p: p.rename(p.with_name("CAL-0417_C")),
        "its folder must be named CAL-0417_B",
    ),
    "results removed": (
        lambda p: (p / "data/results.json").unlink(),
        "data/results.json is missing",
    ),
    "results no JSON": (lambda p: repack(p, **{"results.json": b"{"}), "results.json cannot be"),
    "results nested without end": (
        lambda p: repack(p, **{"results.json": b"[" * 100_000}),
        "results.json",
    ),
    "results of another format": (
        lambda p: repack(
            p,
            **{
                "results.json": json.dumps(
                    json.loads((p / "data/results.json").read_bytes()) | {"format": 2}
                ).encode()
            },
        ),
        "format 2 was written by a later version",
    ),
    "results that name no document": (
        lambda p: repack(p, **{"results.json": b'{"format": 1, "document": {}}'}),
        "results.json: number is missing",
    ),
}

SIGNATURES = {
    "a statement edited": (
        lambda p: edit(p / "signatures/checked/statement.json", b"with care", b"with love"),
        "is not the statement that was signed",
    ),
    "a statement in another form": (
        lambda p: edit(p / "signatures/checked/statement.json", b"{\n", b"{ \n"),
        "is not written as a statement is",
    ),
    "a statement of an unknown format": (
        lambda p: edit(p / "signatures/checked/statement.json", b'"format": 1', b'"format": 9'),
        "format 9 is not known",
    ),
    "statements exchanged": (
        lambda p: swap(
            p / "signatures/prepared/statement.json", p / "signatures/checked/statement.json"
        ),
        "is a sign-off as checked",
    ),
    "signatures exchanged": (
        lambda p: swap(p / "signatures/prepared" / P7S, p / "signatures/checked" / P7S),
        "is not the statement that was signed",
    ),
    "a signature emptied": (
        lambda p: (p / "signatures/checked" / P7S).write_bytes(b""),
        f"signatures/checked/{P7S}: ",
    ),
    "a signature cut off": (
        lambda p: (p / "signatures/checked" / P7S).write_bytes(
            (p / "signatures/checked" / P7S).read_bytes()[:-1]
        ),
        f"signatures/checked/{P7S}: ",
    ),
    "bytes after a signature": (
        lambda p: (p / "signatures/checked" / P7S).write_bytes(
            (p / "signatures/checked" / P7S).read_bytes() + b"\0"
        ),
        "trailing data",
    ),
    "a signature that is none": (
        lambda p: (p / "signatures/checked" / P7S).write_bytes(b"-----BEGIN CMS-----\n"),
        f"signatures/checked/{P7S}: ",
    ),
    "the last sign-off's signature removed": (
        lambda p: (p / "signatures/approved" / P7S).unlink(),
        f"signatures/approved/{P7S}: missing",
    ),
    "a statement removed": (
        lambda p: (p / "signatures/approved/statement.json").unlink(),
        "signatures/approved/statement.json: missing",
    ),
    "a signed PDF removed": (
        lambda p: (p / "signatures/checked/report.pdf").unlink(),
        "signatures/checked/report.pdf: missing",
    ),
    "the sign-off in the middle removed": (
        lambda p: shutil.rmtree(p / "signatures/checked"),
        "before it is signed as checked",
    ),
    "the first sign-off removed": (
        lambda p: shutil.rmtree(p / "signatures/prepared"),
        "before it is signed as prepared",
    ),
    "a file added to a sign-off": (
        lambda p: (p / "signatures/checked/note.txt").write_text("ok"),
        "signatures/checked/note.txt: does not belong to a sign-off",
    ),
    "a file added beside the sign-offs": (
        lambda p: (p / "signatures/report.pdf").write_text("ok"),
        "signatures/report.pdf: does not belong to a sign-off",
    ),
    "a sign-off in an unknown role": (
        lambda p: shutil.copytree(p / "signatures/checked", p / "signatures/witnessed"),
        "signatures/witnessed/statement.json: does not belong",
    ),
    "payload and manifests made anew": (
        lambda p: repack(p, **{"report.html": b"forged"}),
        "the tag manifest was changed",
    ),
}

PDF = {
    "bytes appended": (
        lambda p: append(p / "signatures/approved/report.pdf", b"\n%%EOF"),
        "6 bytes were appended after signing",
    ),
    "the last signature cut off": (
        lambda p: shutil.copy(
            p / "signatures/checked/report.pdf", p / "signatures/approved/report.pdf"
        ),
        "signatures/approved/report.pdf: cut off",
    ),
    "an earlier copy given later bytes": (
        lambda p: shutil.copy(
            p / "signatures/approved/report.pdf", p / "signatures/checked/report.pdf"
        ),
        "bytes were appended after signing",
    ),
    "replaced by the unsigned report": (
        lambda p: shutil.copy(p / "data/report.pdf", p / "signatures/approved/report.pdf"),
        "cut off",
    ),
    "a byte changed": (
        lambda p: edit(p / "signatures/approved/report.pdf", b"/Title", b"/Tytle"),
        "signatures/approved/report.pdf: changed since it was signed",
    ),
}


@pytest.fixture(scope="module")
def prepared_once(workshop, tmp_path_factory):
    return workshop.package(tmp_path_factory.mktemp("prepared"), "prepared")


@pytest.mark.parametrize("case", BAG)
def test_damage_to_the_bag_is_seen_and_named(prepared_once, tmp_path, judge, case):
    path = Path(shutil.copytree(prepared_once, tmp_path / "copy" / prepared_once.name))
    see_and_name(path, judge, *BAG[case])


@pytest.mark.parametrize("case", SIGNATURES | PDF)
def test_damage_to_sign_offs_is_seen_and_named(approved, judge, case):
    see_and_name(approved, judge, *(SIGNATURES | PDF)[case])


def see_and_name(package, judge, harm, words):
    harm(package)
    (path,) = (p for p in package.parent.iterdir() if p.name.startswith("CAL"))
    found = judge(path)
    assert not found.ok
    assert found.kind == "damaged"
    assert found.exit_status == 4
    told = [f"{fault.subject}: {fault.detail}" for fault in found.faults]
    assert any(words in line for line in told), told
    assert "damaged" in found.headline


@pytest.mark.parametrize("case", BAG)
def test_damage_to_an_unsigned_package_is_seen_too(workshop, tmp_path, judge, case):
    harm, _ = BAG[case]
    package = workshop.package(tmp_path / "a", status="draft")
    harm(package)
    (path,) = (p for p in package.parent.iterdir() if p.name.startswith("CAL"))
    assert judge(path).kind == "damaged"


def test_a_package_reached_by_a_link_is_told(approved, judge, tmp_path):
    alias = tmp_path / approved.name
    alias.symlink_to(approved)
    assert any("is a link" in fault.detail for fault in judge(alias).faults)


def test_an_issued_package_stripped_of_its_signatures_is_seen(approved, judge):
    shutil.rmtree(approved / "signatures")
    found = judge(approved)
    assert (found.kind, found.ok) == ("unsigned", False)
    assert "intact, unsigned" in found.headline
    assert "no signature, though the document's status is for review" in found.headline


def test_an_empty_folder_of_signatures_is_not_a_signature(approved, judge):
    shutil.rmtree(approved / "signatures")
    (approved / "signatures").mkdir()
    assert judge(approved).kind == "damaged"


def test_another_packages_signatures_do_not_fit(approved, workshop, tmp_path, judge):
    other = workshop.package(tmp_path / "other", "approved", title="Another rotor")
    shutil.rmtree(approved / "signatures")
    shutil.copytree(other / "signatures", approved / "signatures")
    assert any("tag manifest was changed" in fault.detail for fault in judge(approved).faults)


# What follows is made by who has a key and another program: our own with its rules off.


@pytest.fixture
def lawless(monkeypatch):
    """Let signing sign whatever is asked."""
    monkeypatch.setattr(signing, "refusals", lambda *_: [])
    return monkeypatch


def told(found):
    assert not found.ok
    assert found.kind == "damaged"
    return " | ".join(fault.detail for fault in found.faults)


@pytest.mark.usefixtures("lawless")
def test_a_signed_draft_is_refused(workshop, tmp_path, judge):
    path = workshop.package(tmp_path, "prepared", status="draft")
    assert "a draft is not signed" in told(judge(path))


@pytest.mark.usefixtures("lawless")
def test_an_approval_without_a_check_is_refused(workshop, tmp_path, judge):
    path = workshop.package(tmp_path, "prepared")
    workshop.sign(path, "approved", "Cy Cedar", 1)
    assert "before it is signed as checked" in told(judge(path))


@pytest.mark.usefixtures("lawless")
def test_a_check_by_who_prepared_is_refused(workshop, tmp_path, judge):
    path = workshop.package(tmp_path, "prepared", checked=None)
    workshop.sign(path, "checked", "Ann Ash", 1)
    assert "cannot be its only checker" in told(judge(path))


@pytest.mark.usefixtures("lawless")
def test_an_approval_over_open_holds_is_refused(workshop, tmp_path, judge):
    holds = {"holds": [{"id": "H1", "text": "mass"}]}
    path = workshop.package(tmp_path, "checked", results=holds)
    workshop.sign(path, "approved", "Cy Cedar", 3, accepted_holds=())
    assert "open holds are not accepted: H1" in told(judge(path))


@pytest.mark.usefixtures("lawless")
def test_an_approval_over_a_failed_second_computation_is_refused(workshop, tmp_path, judge):
    results = {"results": [{"id": "critical", "second": {"agrees": False}}]}
    path = workshop.package(tmp_path, "approved", results=results)
    assert "does not agree for critical" in told(judge(path))


def test_a_statement_that_hides_a_failed_second_computation_is_refused(
    workshop, tmp_path, judge, lawless
):
    lawless.setattr(signing, "second_computations", lambda _: (("critical",), ()))
    results = {"results": [{"id": "critical", "second": {"agrees": False}}]}
    path = workshop.package(tmp_path, "prepared", results=results)
    assert "is not what the results say" in told(judge(path))


@pytest.mark.usefixtures("lawless")
def test_a_name_other_than_the_reports_is_refused(workshop, tmp_path, judge):
    path = workshop.package(tmp_path)
    workshop.sign(path, "prepared", "Di Dogwood")
    assert "the report names Ann Ash under prepared" in told(judge(path))


@pytest.mark.usefixtures("lawless")
def test_a_self_issued_certificate_of_another_is_refused(workshop, tmp_path, judge):
    path = workshop.package(tmp_path)
    workshop.sign(path, "prepared", "Ann Ash", identity=workshop.identity("Bo Birch"))
    assert "the self-issued identity is that of Bo Birch" in told(judge(path))


@pytest.mark.usefixtures("lawless")
def test_a_sign_off_before_the_one_it_stands_on_is_refused(workshop, tmp_path, judge):
    path = workshop.package(tmp_path, "prepared")
    workshop.sign(path, "checked", "Bo Birch", -1)
    assert "lies before that of the sign-off as prepared" in told(judge(path))


def test_a_sign_off_in_the_future_is_refused(workshop, tmp_path, judge):
    path = workshop.package(tmp_path)
    workshop.sign(path, "prepared", "Ann Ash", time=workshop.signed_time + timedelta(days=30))
    assert "is dated in the future" in told(judge(path))


def test_an_expired_certificate_is_refused(workshop, tmp_path, judge, lawless, authority):
    from reportgen.package.identity import Identity

    past = workshop.signed_time - timedelta(days=1)
    identity = authority.issue("Ann Ash", first=past - timedelta(days=9), last=past)
    lawless.setattr(Identity, "require_valid", lambda *_: None)
    path = workshop.package(tmp_path)
    workshop.sign(path, "prepared", "Ann Ash", identity=identity)
    assert "not when it was used (2026-03-02)" in told(judge(path))
    assert not judge(path, [authority.certificate]).ok


def test_an_exchanged_earlier_signature_is_refused(workshop, tmp_path, judge):
    one = workshop.package(tmp_path / "one", "checked")
    two = workshop.package(tmp_path / "two", "prepared")
    for name in ("statement.json", P7S, "report.pdf"):
        shutil.copy(two / "signatures/prepared" / name, one / "signatures/prepared" / name)
    words = told(judge(one))
    assert "stands on other earlier sign-offs than are here" in words


def sign_pdf_as(lawless, change):
    """Let the PDF be signed otherwise than the statement says."""
    honest = signing.sign_pdf

    def forged(pdf, signer, time, **how):
        return change(honest, pdf, signer, time, how)

    lawless.setattr(signing, "sign_pdf", forged)


def append_update(pdf: bytes) -> bytes:
    from io import BytesIO

    from pyhanko.pdf_utils import generic
    from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter

    writer = IncrementalPdfFileWriter(BytesIO(pdf + b"\n"))
    writer.root["/Forged"] = generic.NumberObject(1)
    writer.update_root()
    out = BytesIO()
    writer.write(out)
    return out.getvalue()


def test_a_pdf_signed_with_another_key_is_refused(workshop, tmp_path, judge, lawless):
    other = workshop.identity("Bo Birch").signer
    sign_pdf_as(lawless, lambda honest, pdf, _, time, how: honest(pdf, other, time, **how))
    path = workshop.package(tmp_path, "prepared")
    assert "signed by another key than the statement" in told(judge(path))


@pytest.mark.parametrize(
    ("key", "value", "words"),
    [
        ("name", "Somebody", "gives another name than the statement"),
        ("reason", "Prepared: nothing", "gives other words than the statement"),
        ("field", "Checked", "holds the signatures ['Checked'], expected ['Prepared']"),
    ],
)
def test_a_pdf_that_says_otherwise_is_refused(
    workshop, tmp_path, judge, lawless, key, value, words
):
    sign_pdf_as(
        lawless,
        lambda honest, pdf, signer, time, how: honest(pdf, signer, time, **(how | {key: value})),
    )
    path = workshop.package(tmp_path, "prepared")
    assert words in told(judge(path))


def test_a_pdf_that_gives_another_time_is_refused(workshop, tmp_path, judge, lawless):
    sign_pdf_as(
        lawless,
        lambda honest, pdf, signer, time, how: honest(pdf, signer, time - timedelta(days=1), **how),
    )
    path = workshop.package(tmp_path, "prepared")
    assert "gives another time than the statement" in told(judge(path))


def test_a_signed_pdf_that_is_not_the_payloads_is_refused(workshop, tmp_path, judge, lawless):
    other = workshop.pdf.replace(b"pump", b"pomp")
    assert len(other) == len(workshop.pdf)
    spoilt = bytearray(workshop.pdf)
    spoilt[20] ^= 1
    sign_pdf_as(
        lawless, lambda honest, _, signer, time, how: honest(bytes(spoilt), signer, time, **how)
    )
    path = workshop.package(tmp_path, "prepared")
    assert "does not begin with data/report.pdf" in told(judge(path))


def test_a_pdf_changed_between_report_and_signature_is_refused(workshop, tmp_path, judge, lawless):
    sign_pdf_as(
        lawless,
        lambda honest, pdf, signer, time, how: honest(append_update(pdf), signer, time, **how),
    )
    path = workshop.package(tmp_path, "prepared")
    assert "was changed between its signatures" in told(judge(path))


def test_a_pdf_with_one_signature_more_is_refused(workshop, tmp_path, judge, lawless):
    sign_pdf_as(
        lawless,
        lambda honest, pdf, signer, time, how: honest(
            honest(pdf, signer, time, **how), signer, time, **(how | {"field": "Extra"})
        ),
    )
    path = workshop.package(tmp_path, "prepared")
    assert "holds the signatures ['Prepared', 'Extra'], expected ['Prepared']" in told(judge(path))


def test_a_pdf_without_a_signature_is_refused(workshop, tmp_path, judge, lawless):
    sign_pdf_as(lawless, lambda _, pdf, *__: pdf + b"\n")
    path = workshop.package(tmp_path, "prepared")
    assert "holds the signatures [], expected ['Prepared']" in told(judge(path))


def test_a_pdf_update_that_no_reader_understands_is_refused(workshop, tmp_path, judge, lawless):
    sign_pdf_as(lawless, lambda _, pdf, *__: pdf + b"\nstartxref\n9\n%%EOF\n")
    path = workshop.package(tmp_path, "prepared")
    assert "its signatures cannot be read" in told(judge(path))
