"""The commands of HOW-TO-CHECK.txt, run as they are printed, in the order they are printed.

Sources: bash, GNU coreutils, grep, OpenSSL and Poppler on this machine judge the package;
nothing of ours takes part.

Obtained: judged by general-purpose tools.
"""

from __future__ import annotations

import re
import shutil
import subprocess
from pathlib import Path

BASH = shutil.which("bash") or "bash"


def commands(package: Path) -> dict[str, str]:
    """Give the indented lines of each numbered step."""
    text = (package / "data" / "HOW-TO-CHECK.txt").read_text(encoding="utf-8")
    steps = re.split(r"(?m)^(?=\d\. [A-Z])", text)[1:]
    found = {}
    for step in steps:
        lines = [line[5:] for line in step.splitlines() if line.startswith("     ")]
        if lines:
            found[step[0]] = "\n".join(lines)
    return found


def run(package: Path, script: str, role: str = "prepared") -> subprocess.CompletedProcess[str]:
    script = script.replace("S=signatures/prepared", f"S=signatures/{role}")
    return subprocess.run(
        [BASH, "-e", "-o", "pipefail", "-c", script],
        cwd=package,
        capture_output=True,
        text=True,
        check=False,
    )


def test_every_command_succeeds_on_every_sign_off(approved):
    steps = commands(approved)
    assert sorted(steps) == ["1", "2", "3", "4", "5"]
    for role in ("prepared", "checked", "approved"):
        done = run(approved, "\n".join(steps.values()), role)
        assert done.returncode == 0, done.stderr
        assert "FAILED" not in done.stdout
        assert done.stderr.count("CMS Verification successful") == 2
        assert "Signature is Valid" in done.stdout
        assert "Digest Mismatch" not in done.stdout
        digest = re.search(
            rf"(?m)^([0-9a-f]{{128}})  signatures/{role}/statement.json$", done.stdout
        )
        assert digest is not None
        assert f"{role}; statement.json SHA-512 {digest[1]}" in done.stdout


def test_the_package_is_not_changed_by_the_commands(approved, judge):
    run(approved, "\n".join(commands(approved).values()))
    assert judge(approved).ok


def test_step_one_prints_the_same_count_twice_and_another_after_an_addition(approved):
    step = commands(approved)["1"]
    counts = run(approved, step).stdout.split()[-2:]
    assert counts[0] == counts[1]
    (approved / "data" / "more.txt").write_text("x")
    counts = run(approved, step).stdout.split()[-2:]
    assert counts[0] != counts[1]


def test_the_commands_see_a_changed_file(approved):
    (approved / "data" / "report.html").write_text("changed")
    done = run(approved, commands(approved)["1"])
    assert done.returncode != 0
    assert "data/report.html: FAILED" in done.stdout


def test_the_commands_see_a_changed_signature(approved):
    other = approved / "signatures" / "prepared" / "tagmanifest-sha512.txt.p7s"
    other.write_bytes(other.read_bytes()[:-4] + b"\0\0\0\0")
    steps = commands(approved)
    assert run(approved, steps["2"] + "\n" + steps["3"]).returncode != 0
