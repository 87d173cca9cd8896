"""A process killed at any step leaves the old package or the new one, never a mixture."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

MOST = os.environ.get("KILL_POINTS", "6")
"""Points to try in each scenario; 0 tries every one."""
SCRIPT = Path(__file__).with_name("kill_points.py")


@pytest.mark.parametrize(
    ("scenario", "least"),
    [
        ("FirstWriting", 80),
        ("DraftReplaced", 80),
        ("SecondSignature", 50),
        ("FirstSignature", 50),
        ("Zipping", 10),
        ("NewIdentity", 10),
    ],
)
def test_no_kill_leaves_a_mixture(workshop, tmp_path, scenario, least):
    (tmp_path / "tiny.pdf").write_bytes(workshop.pdf)
    done = subprocess.run(
        [sys.executable, str(SCRIPT), str(tmp_path), scenario, MOST],
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    found = json.loads(done.stdout)
    assert found["broken"] == []
    assert found["points"] >= least
    assert found["tried"] >= min(6, found["points"])
