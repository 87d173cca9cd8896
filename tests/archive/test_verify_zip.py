"""A package in a zip: read strictly, refused before anything is taken out."""

from __future__ import annotations

import io
import shutil
import stat
import struct
import subprocess
import zipfile
from pathlib import Path

import pytest

from reportgen.archive.verify_zip import read_zip_bytes
from reportgen.errors import PackageError
from reportgen.package.contents import read_folder
from reportgen.package.zipped import zip_bytes, zip_package

NAME = "CAL-0417_B"


@pytest.fixture(scope="session")
def zipped(approved_once: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    return zip_package(approved_once, tmp_path_factory.mktemp("zip") / f"{NAME}.zip")


def test_the_zip_of_a_package_is_judged_as_the_package(zipped, approved_once, judge):
    assert judge(zipped) == judge(approved_once)
    assert judge(zipped).ok


def test_a_zip_is_the_same_bytes_each_time(zipped, approved, tmp_path):
    for path in approved.rglob("*"):
        path.touch()
    again = zip_package(approved, tmp_path / "again.zip")
    assert again.read_bytes() == zipped.read_bytes()


def test_a_zip_may_have_any_file_name(zipped, tmp_path, judge):
    other = Path(shutil.copy(zipped, tmp_path / "from the client (1).zip"))
    assert judge(other).ok


def test_pythons_zipfile_and_unzip_read_it(zipped, tmp_path, judge):
    with zipfile.ZipFile(zipped) as archive:
        assert archive.testzip() is None
        names = archive.namelist()
        assert names == sorted(names)
        assert {entry.compress_type for entry in archive.infolist()} == {zipfile.ZIP_STORED}
    unzip = shutil.which("unzip") or "unzip"
    subprocess.run([unzip, "-q", str(zipped), "-d", str(tmp_path)], check=True)
    assert judge(tmp_path / NAME).ok


def test_the_default_place_is_beside_the_package(approved):
    assert zip_package(approved) == approved.parent / f"{NAME}.zip"
    (approved.parent / f"{NAME}.zip").write_bytes(b"old")
    assert zipfile.is_zipfile(zip_package(approved))
    assert sorted(p.name for p in approved.parent.iterdir()) == [NAME, f"{NAME}.zip"]


@pytest.mark.parametrize(
    "harm",
    [
        lambda p: (p / "data/x").symlink_to("/etc/passwd"),
        lambda p: (p / "data/empty").mkdir(),
        lambda p: (p / "data/a\\b").touch(),
    ],
)
def test_what_a_zip_cannot_hold_truly_is_refused(approved, harm):
    harm(approved)
    with pytest.raises(PackageError, match="damaged package is not zipped"):
        zip_package(approved)


def entry(name, mode=stat.S_IFREG | 0o644, compress=zipfile.ZIP_STORED):
    made = zipfile.ZipInfo(name, (1980, 1, 1, 0, 0, 0))
    made.create_system, made.external_attr, made.compress_type = 3, mode << 16, compress
    return made


def make(*entries):
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w") as archive:
        for info, content in entries:
            archive.writestr(info, content, compress_type=info.compress_type)
    return out.getvalue()


GOOD = (entry(f"{NAME}/bagit.txt"), b"x")


def twice():
    with pytest.warns(UserWarning, match="Duplicate name"):
        return make(GOOD, GOOD)


def spoofed(name: str) -> bytes:
    """Give a zip with a name that Python would not write; lengths are kept."""
    plain = "Q" * len(name.encode())
    return make(GOOD, (entry(plain), b"x")).replace(plain.encode(), name.encode())


def encrypted() -> bytes:
    content = bytearray(make(GOOD))
    for signature, offset in ((b"PK\x03\x04", 6), (b"PK\x01\x02", 8)):
        content[content.index(signature) + offset] |= 1
    return bytes(content)


def overlapping() -> bytes:
    """Give a zip whose directory names one stored entry many times (a bomb by overlap)."""
    content = make((entry(f"{NAME}/a"), bytes(5000)))
    start, end = content.index(b"PK\x01\x02"), content.index(b"PK\x05\x06")
    one = content[start:end]
    many = b"".join(one.replace(f"{NAME}/a".encode(), f"{NAME}/{c}".encode()) for c in "abcdefgh")
    tail = struct.pack("<4s4H2LH", b"PK\x05\x06", 0, 0, 8, 8, len(many), start, 0)
    return content[:start] + many + tail


DANGEROUS = {
    "leads out": (lambda: spoofed(f"{NAME}/../../evil"), "path part '..'"),
    "absolute": (lambda: spoofed("/etc/evil"), "absolute path"),
    "a drive": (lambda: spoofed("C:/evil"), "one of the characters"),
    "a backslash": (lambda: spoofed(f"{NAME}\\..\\evil"), "characters|backslash"),
    "a zero byte": (lambda: spoofed(f"{NAME}/a\0b"), "zero byte|control"),
    "there twice": (twice, "more than once"),
    "collides": (lambda: make(GOOD, (entry(f"{NAME}/BAGIT.TXT"), b"")), "collides with"),
    "a link": (
        lambda: make(GOOD, (entry(f"{NAME}/data/x", stat.S_IFLNK | 0o777), b"/etc/passwd")),
        "a link or special file",
    ),
    "a device": (
        lambda: make(GOOD, (entry(f"{NAME}/data/x", stat.S_IFBLK | 0o777), b"")),
        "a link or special file",
    ),
    "a folder entry": (lambda: make(GOOD, (entry(f"{NAME}/data/"), b"")), "folder entry"),
    "compressed": (
        lambda: make((entry(f"{NAME}/a", compress=zipfile.ZIP_DEFLATED), bytes(50_000_000))),
        "is compressed",
    ),
    "a bomb by overlap": (overlapping, "a bomb|Overlapped"),
    "encrypted": (encrypted, "is encrypted"),
    "two folders": (lambda: make(GOOD, (entry("OTHER/a"), b"")), "one folder only"),
    "no folder": (lambda: make((entry("a.txt"), b"")), "one folder only"),
    "empty": (make, "is empty"),
    "no zip": (lambda: b"PK\x03\x04 no zip", "no intact zip"),
    "nothing": (lambda: b"", "no intact zip"),
    "too many": (
        lambda: make(*((entry(f"{NAME}/{i}"), b"") for i in range(10_001))),
        "more than 10000 entries",
    ),
}


@pytest.mark.parametrize("case", DANGEROUS)
def test_a_dangerous_zip_is_refused_before_anything_is_read(case, tmp_path, judge):
    make_it, words = DANGEROUS[case]
    path = tmp_path / f"{NAME}.zip"
    path.write_bytes(make_it())
    found = judge(path)
    assert found.kind == "damaged"
    assert not found.ok
    details = " | ".join(f"{fault.detail}" for fault in found.faults)
    assert any(word in details for word in words.split("|")), details
    assert read_zip_bytes(NAME, path.read_bytes()).files == {}
    assert [p.name for p in tmp_path.iterdir()] == [path.name]


def repacked(files, **how):
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w") as archive:
        for name in how.get("order", sorted)(files):
            info = entry(f"{NAME}/{name}")
            how.get("change", lambda _: None)(info)
            archive.writestr(info, files[name])
        archive.comment = how.get("comment", b"")
    return out.getvalue()


@pytest.mark.parametrize(
    ("how", "same"),
    [
        ({}, True),
        ({"order": lambda files: sorted(files, reverse=True)}, False),
        ({"comment": b"hello"}, False),
        ({"change": lambda info: setattr(info, "date_time", (2026, 3, 2, 0, 0, 0))}, False),
        ({"change": lambda info: setattr(info, "extra", b"\x99\x99\x02\x00ab")}, False),
        ({"change": lambda info: setattr(info, "comment", b"note")}, False),
    ],
)
def test_a_zip_that_is_not_the_packages_own_is_told(approved_once, tmp_path, judge, how, same):
    contents = read_folder(approved_once)
    path = tmp_path / f"{NAME}.zip"
    path.write_bytes(repacked(contents.files, **how))
    assert judge(path).ok is same
    if not same:
        assert "unpack it and verify the folder" in judge(path).headline


@pytest.mark.parametrize("where", ["before", "after"])
def test_bytes_around_the_zip_are_seen(zipped, tmp_path, judge, where):
    content = zipped.read_bytes()
    path = tmp_path / f"{NAME}.zip"
    path.write_bytes(b"hidden" + content if where == "before" else content + b"hidden")
    assert not judge(path).ok


def test_a_package_damaged_before_zipping_is_damaged_in_the_zip(approved_once, tmp_path, judge):
    files = dict(read_folder(approved_once).files)
    files["data/report.html"] += b" "
    path = tmp_path / f"{NAME}.zip"
    path.write_bytes(zip_bytes(NAME, files))
    assert "data/report.html: changed" in judge(path).headline
