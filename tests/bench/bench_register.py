"""Time to list 2,000 packages, half of them with the results of a passage (280 kB each).

Run with ``pytest tests/bench/bench_register.py -o python_files='bench_*.py'``.
"""

from __future__ import annotations

import json

import pytest

from reportgen.archive.register import read_register
from reportgen.archive.register_page import write_register
from reportgen.package.bag import bag_files, sha512
from reportgen.package.statement import ROLES, Statement

COUNT = 2000


def results(number: int) -> bytes:
    """Give results as long as those of a real report, the series last as a run writes them."""
    points = 7000 if number % 2 else 300
    series = {"speed": [0.1234567 * n for n in range(points)], "amplitude": [1e-6] * points}
    found = {
        "format": 1,
        "document": {
            "number": f"CAL-{number // 2:04}",
            "revision": "AB"[number % 2],
            "title": f"Lateral vibration of invented rotor {number // 2}",
            "status": "for review",
            "date": f"2026-03-0{1 + number % 2}",
        },
        "results": [
            {"id": f"result-{n}", "value": 1.0, "second": {"agrees": True}} for n in range(15)
        ],
        "criteria": [{"title": "Separation margin", "verdict": "meets"}] * 5,
        "holds": [{"id": "H1", "text": "Rotor mass preliminary"}],
        "series": {"response": series},
    }
    return (json.dumps(found, indent=1) + "\n").encode()


@pytest.fixture(scope="module")
def archive(tmp_path_factory, workshop):
    folder = tmp_path_factory.mktemp("archive")
    one = workshop.package(folder / "made", "prepared") / "signatures/prepared/statement.json"
    like = Statement.from_bytes(one.read_bytes())
    for number in range(COUNT):
        package = folder / "archive" / f"{number // 100}" / f"CAL-{number // 2:04}_{number % 2}"
        payload = {"results.json": results(number), "report.html": b"x", "report.pdf": b"x"}
        files = bag_files(payload, {})
        for role in ROLES:
            fields = {**vars(like), "role": role}
            fields["tag_manifest"] = sha512(files["tagmanifest-sha512.txt"])
            files[f"signatures/{role}/statement.json"] = Statement(**fields).to_bytes()
        for name, content in files.items():
            place = package / name
            place.parent.mkdir(parents=True, exist_ok=True)
            place.write_bytes(content)
    return folder / "archive"


def test_register_of_2000_packages(benchmark, archive, tmp_path):
    def register():
        entries = read_register(archive)
        write_register(archive, entries, tmp_path / "register.html", tmp_path / "register.csv")
        return entries

    entries = benchmark.pedantic(register, rounds=3, warmup_rounds=1)
    assert len(entries) == COUNT
    assert not [entry for entry in entries if entry.fault]
    assert sum(bool(entry.superseded_by) for entry in entries) == COUNT / 2
    assert len(entries[0].sign_offs) == 3


def test_reading_the_same_results_as_they_stand(benchmark, archive):
    """What the bytes cost alone: each results.json read and hashed once, nothing parsed."""
    files = sorted(archive.rglob("results.json"))
    benchmark.pedantic(lambda: [sha512(f.read_bytes()) for f in files], rounds=3, warmup_rounds=1)
