"""The architecture as a test: imports run downward only, and the mechanics stay pure."""

from __future__ import annotations

import ast
import subprocess
import sys
from pathlib import Path

import pytest

import reportgen

ROOT = Path(reportgen.__file__).parent
FLOORS = [
    {"errors", "resources", "__init__"},
    {"rotor"},
    {"criteria"},
    {"units"},
    {"case"},
    {"assess"},
    {"sheet"},
    {"study"},
    {"publish"},
    {"package"},
    {"archive"},
    {"run"},
    {"commands"},
    {"cli"},
]
HEIGHT = {name: height for height, names in enumerate(FLOORS) for name in names}
MODULES = sorted(ROOT.rglob("*.py"))


def floor_of(path: Path) -> str:
    return path.relative_to(ROOT).parts[0].removesuffix(".py")


def imports(path: Path) -> set[str]:
    """Every module that a file imports, at whatever depth it does so."""
    found: set[str] = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: relative import"
            found.add(str(node.module))
            found |= {f"{node.module}.{alias.name}" for alias in node.names}
    return found


def test_every_module_stands_on_a_floor() -> None:
    assert {floor_of(path) for path in MODULES} <= set(HEIGHT)


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(ROOT)))
def test_imports_run_downward_only(path: Path) -> None:
    height = HEIGHT[floor_of(path)]
    for name in imports(path):
        parts = name.split(".")
        if parts[0] != "reportgen" or len(parts) == 1 or parts[1] not in HEIGHT:
            continue
        assert HEIGHT[parts[1]] <= height, f"{path.name} imports {name} from a floor above"


@pytest.mark.parametrize("floor", ["rotor", "criteria"])
def test_mechanics_and_limits_import_only_numpy_and_scipy(floor: str) -> None:
    allowed = {"numpy", "scipy", "reportgen"} | set(sys.stdlib_module_names)
    for path in (ROOT / floor).rglob("*.py"):
        outside = {name.split(".")[0] for name in imports(path)} - allowed
        assert not outside, f"{path.name} imports {outside}"


def test_help_imports_neither_numpy_nor_papermill() -> None:
    code = (
        "import sys, reportgen.cli as c\n"
        "try: c.main(['--help'])\n"
        "except SystemExit as end: assert end.code == 0\n"
        "heavy = {'numpy', 'scipy', 'papermill', 'pydantic', 'matplotlib', 'nbconvert'}\n"
        "loaded = heavy & set(sys.modules)\n"
        "assert not loaded, loaded\n"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    assert "exit status" in done.stdout
