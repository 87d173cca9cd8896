"""Time to write, sign and verify a package of 5 MB, beside hashing the same bytes once.

Run with ``pytest tests/bench/bench_packages.py -o python_files='bench_*.py'``.
"""

from __future__ import annotations

import hashlib
import itertools
import random

import pytest

from reportgen.archive.verify import verify_package
from reportgen.package.write import write_package

SIZE = 5_000_000


@pytest.fixture(scope="module")
def payload(workshop):
    noise = random.Random(417).randbytes(SIZE)
    return workshop.payload() | {"report.html": noise[: SIZE // 2], "big.bin": noise[SIZE // 2 :]}


@pytest.fixture
def package(payload, tmp_path):
    return write_package(tmp_path, "CAL-0417_B", payload, {})


def test_hashing_once(benchmark, payload):
    benchmark(lambda: [hashlib.sha512(content).hexdigest() for content in payload.values()])


def test_writing(benchmark, payload, tmp_path):
    count = itertools.count()
    benchmark(lambda: write_package(tmp_path / str(next(count)), "CAL-0417_B", payload, {}))


def test_signing(benchmark, payload, tmp_path, workshop):
    count = itertools.count()

    def fresh():
        return (write_package(tmp_path / str(next(count)), "CAL-0417_B", payload, {}),), {}

    benchmark.pedantic(
        lambda path: workshop.sign(path, "prepared", "Ann Ash"), setup=fresh, rounds=15
    )


def test_verifying_one_sign_off(benchmark, package, workshop):
    workshop.sign(package, "prepared", "Ann Ash")
    assert benchmark(lambda: verify_package(package)).ok


def test_verifying_three_sign_offs(benchmark, package, workshop):
    people = (("prepared", "Ann Ash"), ("checked", "Bo Birch"), ("approved", "Cy Cedar"))
    for hours, (role, person) in enumerate(people):
        workshop.sign(package, role, person, hours)
    assert benchmark(lambda: verify_package(package)).ok
