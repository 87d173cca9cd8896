"""Writing packages: whole or not at all, never over an issued one."""

from __future__ import annotations

import json
import os
import subprocess
import sys
import tempfile
from pathlib import Path

import pytest

from reportgen.errors import DiskError, PackageError
from reportgen.package import disk
from reportgen.package.changes import field_changes, payload_changes
from reportgen.package.write import read_payload, require_place, write_package

INFO = {"External-Identifier": "CAL-0417"}


def leftovers(folder: Path) -> list[str]:
    return [p.name for p in folder.iterdir() if p.name.startswith(".")]


def test_the_folder_holds_the_payload(workshop, tmp_path):
    payload = workshop.payload()
    path = write_package(tmp_path / "new", "CAL-0417_B", payload, INFO)
    assert path == tmp_path / "new" / "CAL-0417_B"
    assert read_payload(path) == payload
    assert leftovers(path.parent) == []


def test_two_writings_give_the_same_bytes(workshop, tmp_path):
    one, two = workshop.package(tmp_path / "one"), workshop.package(tmp_path / "two")
    files = sorted(p.relative_to(one) for p in one.rglob("*") if p.is_file())
    assert [(two / p).read_bytes() for p in files] == [(one / p).read_bytes() for p in files]


def test_the_same_package_again_is_kept_and_said(workshop, tmp_path):
    path = workshop.package(tmp_path, "prepared")
    signature = (path / "signatures/prepared/tagmanifest-sha512.txt.p7s").stat().st_mtime_ns
    told = []
    again = write_package(tmp_path, path.name, workshop.payload(), INFO, report=told.append)
    assert again == path
    assert told == ["CAL-0417_B: the same package is there already; kept as it is"]
    after = (path / "signatures/prepared/tagmanifest-sha512.txt.p7s").stat().st_mtime_ns
    assert after == signature


def test_an_issued_revision_is_never_overwritten(workshop, tmp_path):
    path = workshop.package(tmp_path)
    changed = workshop.payload()
    changed["inputs.json"] = b'{"rotor": {"mass": {"si": 63.0, "unit": "kg"}}}'
    changed["extra.csv"] = b"1"
    del changed["case.yaml"]
    before = read_payload(path)
    with pytest.raises(PackageError) as caught:
        write_package(tmp_path, path.name, changed, INFO, replace_draft=True)
    words = str(caught.value)
    assert "inputs.json: rotor.mass.si: 62.0 → 63.0" in words
    assert "extra.csv: only in the new run" in words
    assert "case.yaml: only in the package" in words
    assert "raise the revision" in words
    assert read_payload(path) == before
    assert leftovers(tmp_path) == []


def test_a_draft_is_replaced_when_asked_only(workshop, tmp_path, judge):
    path = workshop.package(tmp_path, status="draft")
    changed = workshop.payload(status="draft", title="Another title")
    with pytest.raises(PackageError, match="it is a draft"):
        write_package(tmp_path, path.name, changed, INFO)
    told = []
    write_package(tmp_path, path.name, changed, INFO, replace_draft=True, report=told.append)
    assert read_payload(path) == changed
    assert told == ["CAL-0417_B: the draft that was there is replaced"]
    assert judge(path).ok
    assert leftovers(tmp_path) == []


def test_a_draft_can_become_an_issue(workshop, tmp_path):
    path = workshop.package(tmp_path, status="draft")
    issued = workshop.payload(status="for issue")
    write_package(tmp_path, path.name, issued, INFO, replace_draft=True)
    assert read_payload(path) == issued


def test_a_draft_that_somebody_signed_is_not_replaced(workshop, tmp_path):
    path = workshop.package(tmp_path, status="draft")
    (path / "signatures").mkdir()
    with pytest.raises(PackageError, match="never overwritten"):
        write_package(
            tmp_path, path.name, workshop.payload(status="for issue"), INFO, replace_draft=True
        )


@pytest.mark.parametrize("kind", ["file", "folder"])
def test_what_is_no_package_is_left_alone(workshop, tmp_path, kind):
    place = tmp_path / "CAL-0417_B"
    if kind == "file":
        place.write_text("mine")
    else:
        place.mkdir()
        (place / "mine.txt").write_text("mine")
    with pytest.raises(PackageError, match="move it away"):
        write_package(tmp_path, place.name, workshop.payload(), INFO, replace_draft=True)
    assert (place if kind == "file" else place / "mine.txt").read_text() == "mine"


@pytest.mark.parametrize("name", ["", ".", "..", "a/b", "../x", ".hidden", "con", "a%b"])
def test_a_name_that_leads_elsewhere_is_refused(workshop, tmp_path, name):
    with pytest.raises(PackageError):
        write_package(tmp_path / "out", name, workshop.payload(), INFO)
    assert not (tmp_path / "out").exists()


def test_nothing_appears_when_the_first_signature_fails(workshop, tmp_path):
    def fail(_: Path) -> None:
        raise PackageError("no key")

    with pytest.raises(PackageError, match="no key"):
        write_package(tmp_path, "CAL-0417_B", workshop.payload(), INFO, finish=fail)
    assert list(tmp_path.iterdir()) == []


def test_a_first_signature_is_there_from_the_first_moment(workshop, tmp_path, judge):
    path = write_package(
        tmp_path,
        "CAL-0417_B",
        workshop.payload(),
        INFO,
        finish=lambda folder: workshop.sign(folder, "prepared", "Ann Ash"),
    )
    assert [signer.role for signer in judge(path).signers] == ["prepared"]


def test_what_would_be_refused_after_a_calculation_is_refused_before_it(workshop, tmp_path):
    payload = workshop.payload()
    known = {name: payload[name] for name in ("case.yaml", "inputs.json")}
    require_place(tmp_path / "not" / "there", "CAL-0417_B", known)
    assert list(tmp_path.iterdir()) == []
    path = workshop.package(tmp_path, "prepared")
    require_place(tmp_path, path.name, known)
    other = known | {"inputs.json": b'{"rotor": {"mass": {"si": 63.0, "unit": "kg"}}}'}
    with pytest.raises(PackageError, match=r"raise the revision(.|\n)*rotor.mass.si: 62.0 → 63.0"):
        require_place(tmp_path, path.name, other)
    draft = workshop.package(tmp_path, status="draft", revision="C")
    require_place(tmp_path, draft.name, other, replace_draft=True)
    (tmp_path / "file").write_text("")
    with pytest.raises(DiskError, match="a file is where a folder should be"):
        require_place(tmp_path / "file" / "out", "CAL-0417_B", known)


LIMITED = """
import json, resource, sys
from pathlib import Path
from reportgen.errors import DiskError, PackageError
from reportgen.package.write import write_package
limit, folder = int(sys.argv[1]), Path(sys.argv[2])
payload = {"results.json": b"{}", "big.bin": bytes(200_000), "small.txt": b"x"}
resource.setrlimit(resource.RLIMIT_FSIZE, (limit, limit))
try:
    write_package(folder, "CAL-0417_B", payload, {})
except PackageError as error:
    print(error)
else:
    print("written")
"""


@pytest.mark.parametrize("limit", [0, 1, 50, 1_000, 100_000, 199_999, 200_000])
def test_a_disk_that_fills_leaves_nothing(tmp_path, limit):
    # The system's limit on a file's size stops the write in the kernel, as a full disk
    # or a quota does; it needs no mount and no rights.
    done = subprocess.run(
        [sys.executable, "-c", LIMITED, str(limit), str(tmp_path)],
        capture_output=True,
        text=True,
        check=True,
    )
    if limit == 200_000:
        assert done.stdout.strip() == "written"
        assert [p.name for p in tmp_path.iterdir()] == ["CAL-0417_B"]
    else:
        assert "the disk is full" in done.stdout
        assert list(tmp_path.iterdir()) == []


def test_a_folder_that_cannot_be_written_is_one_clear_error(workshop):
    folder = Path(tempfile.mkdtemp())
    folder.chmod(0o555)
    user = os.geteuid()
    if user == 0:
        os.seteuid(65534)  # root may write anywhere
    try:
        with pytest.raises(PackageError, match="cannot be written to"):
            write_package(folder, "CAL-0417_B", workshop.payload(), INFO)
        with pytest.raises(DiskError, match="cannot be written to"):
            require_place(folder / "out", "CAL-0417_B", {})
    finally:
        if user == 0:
            os.seteuid(0)
        assert list(folder.iterdir()) == []
        folder.rmdir()


RACE = """
import sys
from pathlib import Path
from reportgen.errors import DiskError, PackageError
from reportgen.package.write import write_package
folder, own = Path(sys.argv[1]), sys.argv[2].encode()
payload = {"results.json": b"{}", **{f"{i}.txt": own * 1000 for i in range(20)}}
print("ready", flush=True)
sys.stdin.readline()
try:
    write_package(folder, "CAL-0417_B", payload, {}, report=lambda s: print("kept"))
except PackageError as error:
    print("refused")
else:
    print("done")
"""


@pytest.mark.parametrize("same", [True, False])
def test_two_runs_into_one_folder_leave_one_whole_package(tmp_path, same):
    runs = [
        subprocess.Popen(
            [sys.executable, "-c", RACE, str(tmp_path), "a" if same else str(n)],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            text=True,
        )
        for n in range(4)
    ]
    for run in runs:
        assert run.stdout is not None
        assert run.stdout.readline() == "ready\n"
    words = []
    for run in runs:
        assert run.stdin is not None
        run.stdin.write("go\n")
        run.stdin.flush()
    for run in runs:
        words.append(run.communicate()[0])
    assert all(run.returncode == 0 for run in runs)
    assert sum("refused" in word for word in words) == (0 if same else 3)
    assert [p.name for p in tmp_path.iterdir()] == ["CAL-0417_B"]
    contents = set(read_payload(tmp_path / "CAL-0417_B").values()) - {b"{}"}
    assert len(contents) == 1


def test_what_a_killed_run_left_is_cleared_and_what_a_living_one_writes_is_not(workshop, tmp_path):
    dead = subprocess.Popen([sys.executable, "-c", ""])
    dead.wait()
    living = subprocess.Popen([sys.executable, "-c", "input()"], stdin=subprocess.PIPE)
    folders = [
        tmp_path / f".CAL-0417_B.{disk._here()}-{pid}-00000000.part"
        for pid in (dead.pid, living.pid)
    ]
    for folder in folders:
        folder.mkdir()
    workshop.package(tmp_path)
    living.communicate(b"\n")
    assert [folder.exists() for folder in folders] == [False, True]


def test_the_changes_name_fields_that_were_added_removed_and_changed():
    old = {"a": 1, "b": [1, 2], "c": {"d": "x"}}
    new = {"a": 1.0, "b": [1, 3, 4], "e": None}
    assert list(field_changes(old, new)) == [
        ("a", "1", "1.0"),
        ("b[1]", "2", "3"),
        ("b[2]", "absent", "4"),
        ("c", '{"d": "x"}', "absent"),
        ("e", "absent", "null"),
    ]


def test_many_changes_are_cut_with_their_number():
    old = {"inputs.json": json.dumps({str(i): 0 for i in range(40)}).encode()}
    new = {"inputs.json": json.dumps({str(i): 1 for i in range(40)}).encode()}
    lines = payload_changes(old, new)
    assert lines[-2:] == ["inputs.json: and 28 more fields", "inputs.json: changed"]


class TestWhereNamesCannotBeExchanged:
    """Not every system and drive can exchange two names in one step."""

    @pytest.fixture(autouse=True)
    def _no_exchange(self, monkeypatch):
        monkeypatch.setattr(disk, "_exchange", lambda *_: False)

    def test_a_draft_is_replaced(self, workshop, tmp_path, judge):
        path = workshop.package(tmp_path, status="draft")
        changed = workshop.payload(status="draft", title="Another title")
        write_package(tmp_path, path.name, changed, INFO, replace_draft=True)
        assert read_payload(path) == changed
        assert judge(path).ok
        assert leftovers(tmp_path) == []

    def test_the_old_draft_comes_back_if_the_new_one_cannot_be_moved(self, workshop, tmp_path):
        path = workshop.package(tmp_path, status="draft")
        before = read_payload(path)
        with pytest.raises(OSError, match="No such file"):
            disk.swap_into_place(tmp_path / "not there", path)
        assert read_payload(path) == before

    def test_a_kill_between_the_two_renames_is_put_right(self, workshop, tmp_path):
        path = workshop.package(tmp_path, status="draft")
        before = read_payload(path)
        path.rename(tmp_path / f".{path.name}.old")
        disk.clear_leftovers(tmp_path, path.name)
        assert read_payload(path) == before
