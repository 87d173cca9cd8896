"""The README says what is there: commands, templates, sources, statuses, the top level."""

from __future__ import annotations

import ast
import re
import subprocess
from pathlib import Path

import pytest

from reportgen.cli import EXIT_STATUS, parser
from reportgen.criteria.sources import SOURCES
from reportgen.resources import templates

ROOT = Path(__file__).parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
TOP = {"README.md", "DEVELOPERS.md", "pyproject.toml", "LICENSE"}
FOLDERS = {"templates", "reportgen", "tests", "cases"}


def rows(heading: str) -> list[list[str]]:
    """Return the table under a heading, without its head."""
    part = README.split(f"## {heading}\n")[1].split("\n## ")[0]
    lines = [line for line in part.splitlines() if line.startswith("|")]
    return [[cell.strip() for cell in line.strip("|").split("|")] for line in lines[2:]]


def test_the_readme_opens_with_the_job_in_one_paragraph() -> None:
    first = README.split("\n\n")[1]
    assert first.startswith("An engineer who answers for rotating machines")


def test_every_source_of_a_limit_is_listed_as_the_code_has_it() -> None:
    stated = [row[:5] for row in rows("Sources of limits and methods")]
    expected = [[s.standard, s.clause, s.edition or "–", s.used, s.basis] for s in SOURCES.values()]
    assert stated == expected


def test_every_command_is_listed() -> None:
    actions = [a for a in parser()._actions if a.dest == "command"]
    assert actions[0].choices is not None
    listed = set(re.findall(r"^\| `reportgen (\w+)", README, flags=re.M))
    assert listed == set(actions[0].choices)


def test_every_template_is_listed() -> None:
    assert {row[0].strip("`") for row in rows("Templates")} == set(templates())


@pytest.mark.parametrize("status", re.findall(r"^  (\d)  (.*)$", EXIT_STATUS, flags=re.M))
def test_every_exit_status_is_listed(status: tuple[str, str]) -> None:
    assert f"| {status[0]} | {status[1]}" in README


def test_the_top_level_holds_what_it_must_and_no_more() -> None:
    listed = subprocess.run(
        ["git", "ls-files"], cwd=ROOT, capture_output=True, text=True, check=True
    ).stdout.splitlines()
    tops = {line.split("/")[0] for line in listed}
    assert {name for name in tops if not name.startswith(".")} == TOP | FOLDERS


def test_files_named_in_the_readme_exist() -> None:
    for target in re.findall(r"\]\(([^)#:]+)\)", README):
        assert (ROOT / target).is_file(), target
    for case in re.findall(r"cases/[\w-]+\.yaml", README):
        assert (ROOT / case).is_file(), case


def test_every_outside_check_has_its_row_and_says_how_its_values_were_obtained() -> None:
    folder = Path(__file__).parent / "outside"
    table = README.split("<!-- outside checks -->")[1].split("<!-- end of outside checks -->")[0]
    lines = [line for line in table.splitlines() if line.startswith("| ")][2:]
    assert len(lines) >= 50
    for file in sorted(folder.glob("test_*.py")):
        tree = ast.parse(file.read_text("utf-8"))
        tests = [node.name for node in tree.body if isinstance(node, ast.FunctionDef)]
        mine = [line for line in lines if f"(`{file.name}`)" in line]
        assert "Obtained: " in (ast.get_docstring(tree) or ""), file.name
        assert all(line.rstrip(" |").rsplit("| ", 1)[1] for line in mine)
        for test in tests:
            if test.startswith("test_"):
                words = f"| {test.removeprefix('test_').replace('_', ' ')} |"
                assert any(words in line for line in mine), f"{file.name}: {test}"
