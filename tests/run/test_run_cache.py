"""A run is taken as done only if nothing that can change its report differs."""

from __future__ import annotations

import concurrent.futures
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from reportgen.run import fingerprint
from reportgen.run.cache import RunStore, run_key
from reportgen.run.fingerprint import code_digest, code_fingerprint

GIVEN: dict[str, Any] = {
    "inputs": {"case.yaml": "aa", "tables/stations.csv": "bb"},
    "template": "cc",
    "code": "dd",
    "versions": {"python": "3.11.7", "packages": [{"name": "numpy", "version": "2.4.6"}]},
}


def test_the_key_does_not_depend_on_order() -> None:
    turned = {**GIVEN, "inputs": dict(reversed(GIVEN["inputs"].items()))}
    assert run_key(**turned) == run_key(**GIVEN)


@pytest.mark.parametrize(
    "change",
    [
        {"inputs": {"case.yaml": "aa"}},
        {"inputs": {"case.yaml": "aa", "tables/stations.csv": "bc"}},
        {"inputs": {"case.yaml": "aa", "tables/other.csv": "bb"}},
        {"inputs": {"case.yaml": "bb", "tables/stations.csv": "aa"}},
        {"template": "ce"},
        {"code": "de"},
        {"versions": {**GIVEN["versions"], "python": "3.11.8"}},
    ],
)
def test_any_change_gives_another_key(change: dict[str, Any]) -> None:
    assert run_key(**{**GIVEN, **change}) != run_key(**GIVEN)


def test_this_process_stands_for_code_and_versions_unless_given() -> None:
    from reportgen.run.environment import environment

    whole = run_key({}, "t", code=code_digest(), versions=environment())
    assert run_key({}, "t") == whole


def key(number: int) -> str:
    return f"{number:064x}"


def test_what_was_recorded_is_found_and_nothing_else(tmp_path: Path) -> None:
    store = RunStore(tmp_path / "store")
    assert store.look_up(key(1)) is None
    store.record(key(1), {"package": "CAL-0417_B"})
    assert store.look_up(key(1)) == {"package": "CAL-0417_B"}
    assert store.look_up(key(2)) is None
    store.record(key(1), {"package": "CAL-0417_C"})
    assert store.look_up(key(1)) == {"package": "CAL-0417_C"}
    store.forget(key(1))
    store.forget(key(1))
    assert store.look_up(key(1)) is None


@pytest.mark.parametrize("damage", [b"", b"{", b"[1]", b'{"key": "0", "entry": {}}', b"\xff"])
def test_a_damaged_entry_is_no_entry(tmp_path: Path, damage: bytes) -> None:
    store = RunStore(tmp_path)
    store.record(key(1), {"a": 1})
    (path,) = tmp_path.rglob("*.json")
    path.write_bytes(damage)
    assert store.look_up(key(1)) is None
    store.record(key(1), {"a": 2})
    assert store.look_up(key(1)) == {"a": 2}


def test_an_entry_put_under_another_key_is_no_entry(tmp_path: Path) -> None:
    store = RunStore(tmp_path)
    store.record(key(1), {"a": 1})
    (path,) = tmp_path.rglob("*.json")
    path.with_name(f"{key(2)}.json").write_bytes(path.read_bytes())
    assert store.look_up(key(2)) is None


@pytest.mark.parametrize("odd", ["", "../../etc/passwd", "A" * 64, "a" * 63])
def test_only_a_key_is_taken_as_a_key(tmp_path: Path, odd: str) -> None:
    with pytest.raises(ValueError, match="not a key"):
        RunStore(tmp_path).record(odd, {})


def test_many_writers_and_readers_at_once_see_whole_entries_only(tmp_path: Path) -> None:
    store = RunStore(tmp_path)
    entries = [{"writer": n, "text": str(n) * 10_000} for n in range(8)]

    def use(entry: dict[str, Any]) -> bool:
        store.record(key(1), entry)
        return all(store.look_up(key(1)) in entries for _ in range(20))

    with concurrent.futures.ThreadPoolExecutor(8) as pool:
        assert all(pool.map(use, entries))
    assert [path.suffix for path in tmp_path.rglob("*") if path.is_file()] == [".json"]


@pytest.fixture
def package(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    (tmp_path / "rotor").mkdir()
    (tmp_path / "rotor" / "a.py").write_text("x = 1\n")
    monkeypatch.setattr(fingerprint, "_PACKAGE", tmp_path)
    return tmp_path


def rewrite(root: Path) -> None:
    (root / "rotor" / "a.py").write_text("x = 2\n")


def add(root: Path) -> None:
    (root / "b.py").write_text("")


def rename(root: Path) -> None:
    (root / "rotor" / "a.py").rename(root / "rotor" / "b.py")


@pytest.mark.parametrize("change", [rewrite, add, rename])
@pytest.mark.parametrize("measure", [code_fingerprint, code_digest])
def test_a_change_of_code_shows(
    package: Path, change: Callable[[Path], None], measure: Callable[[], str]
) -> None:
    before = measure()
    assert measure() == before
    change(package)
    assert measure() != before


def test_the_digest_is_of_content_alone(package: Path) -> None:
    before = code_digest()
    path = package / "rotor" / "a.py"
    path.touch()
    (package / "__pycache__").mkdir()
    (package / "__pycache__" / "a.pyc").write_bytes(b"x")
    assert code_digest() == before
