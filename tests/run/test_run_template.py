"""A template that cannot take a case is refused, and told why, before a kernel starts."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from nbformat.v4 import new_code_cell

from reportgen.errors import InputError
from reportgen.run.execute import execute
from reportgen.run.template import read_template

Write = Callable[..., Path]


def fault(path: Path) -> str:
    with pytest.raises(InputError) as caught:
        execute(path, {})
    (problem,) = caught.value.problems
    assert problem.file == path.name
    return str(problem)


def test_a_good_template_is_known_by_the_digest_of_its_file(template: Write) -> None:
    path = template()
    found = read_template(path)
    assert found.name == "tiny.ipynb"
    assert found.digest == hashlib.sha512(path.read_bytes()).hexdigest()


def test_a_template_that_is_not_there(tmp_path: Path) -> None:
    assert "cannot be read: No such file" in fault(tmp_path / "none.ipynb")


@pytest.mark.parametrize(
    ("content", "reason"),
    [
        (b"", "not a notebook"),
        (b"\x89PNG\r\n\xff\xfe", "not a notebook"),
        (b"[" * 100_000, "not a notebook"),
        (b"[1]", "notebook format none"),
        (b'{"nbformat": 3}', "notebook format 3"),
        (b'{"nbformat": 4, "nbformat_minor": 5}', "not a valid notebook"),
        (b'{"nbformat": 4, "nbformat_minor": 4, "metadata": {}, "cells": [1]}', "not a valid"),
    ],
)
def test_a_file_that_is_no_notebook(tmp_path: Path, content: bytes, reason: str) -> None:
    path = tmp_path / "odd.ipynb"
    path.write_bytes(content)
    assert reason in fault(path)


@pytest.mark.parametrize(
    ("kernelspec", "reason"),
    [
        ({"name": "ir", "display_name": "R"}, "kernel 'ir'"),
        ({"name": "mine", "display_name": "Mine", "language": "python"}, "kernel 'mine'"),
        (None, "no kernel is named"),
    ],
)
def test_another_kernel_is_refused(template: Write, kernelspec: Any, reason: str) -> None:
    path = template()
    raw = json.loads(path.read_text())
    raw["metadata"] = {"kernelspec": kernelspec} if kernelspec else {}
    path.write_text(json.dumps(raw))
    assert f"{reason}; choose the kernel 'python3'" in fault(path)


def test_a_template_without_a_parameters_cell(template: Write) -> None:
    path = template()
    path.write_text(path.read_text().replace('"parameters"', '"other"'))
    assert "no parameters cell; tag the one cell that sets 'case'" in fault(path)


def test_a_second_parameters_cell_would_undo_the_case(template: Write) -> None:
    second = new_code_cell("case = {'demo': 1}", metadata={"tags": ["parameters"]})
    assert "cells 2, 3 are tagged 'parameters'" in fault(template(second))


def test_an_injected_cell_elsewhere_would_undo_the_case(template: Write) -> None:
    stray = new_code_cell("case = {}", metadata={"tags": ["injected-parameters"]})
    assert "does not follow the parameters cell" in fault(template("x = 1", stray))


def test_a_parameters_cell_that_does_not_set_the_case(template: Write) -> None:
    assert "does not set 'case'" in fault(template(parameters="cases = {}"))


def test_an_executed_template_takes_a_new_case(template: Write) -> None:
    injected = new_code_cell("case = {'old': 1}", metadata={"tags": ["injected-parameters"]})
    assert execute(template(injected), {"new": 2}).results == {"case": {"new": 2}}


def test_a_notebook_without_cell_ids_runs(template: Write) -> None:
    path = template()
    raw = json.loads(path.read_text())
    raw["nbformat_minor"] = 4
    for cell in raw["cells"]:
        del cell["id"]
    path.write_text(json.dumps(raw))
    assert execute(path, {"a": 1}).results == {"case": {"a": 1}}


def test_braces_in_a_templates_name_are_only_a_name(template: Write) -> None:
    assert execute(template(name="{x} {0}.ipynb"), {"a": 1}).results == {"case": {"a": 1}}
