"""A run is believed only where the kernel itself said that every cell ended."""

from __future__ import annotations

import json
import os
from collections.abc import Callable
from pathlib import Path

import nbformat
import pytest
from nbformat.v4 import new_code_cell

from reportgen.errors import CellError, RunError
from reportgen.run.execute import execute

Write = Callable[..., Path]

KINDS = pytest.mark.parametrize("kernel", ["warm", "plain"])


def failure(path: Path, **options: object) -> CellError:
    with pytest.raises(CellError) as caught:
        execute(path, {}, **options)  # type: ignore[arg-type]
    return caught.value


@KINDS
def test_the_case_reaches_the_template_and_the_results_come_back(
    template: Write, kernel: str
) -> None:
    case = {"rotor": {"mass": {"si": 62.0}}, "list": [1, None, True], "text": "ζ = 0.02"}
    progress: list[tuple[int, int]] = []
    done = execute(
        template("twice = 2"),
        case,
        kernel=kernel,  # type: ignore[arg-type]
        progress=lambda ended, total: progress.append((ended, total)),
    )
    assert done.results == {"case": case}
    assert [cell.state for cell in done.cells] == ["done"] * 4
    assert [cell.number for cell in done.cells] == [2, 2, 3, 4]
    assert progress == [(1, 4), (2, 4), (3, 4), (4, 4)]
    assert done.notebook.metadata["reportgen"]["template"]["name"] == "tiny.ipynb"


@KINDS
def test_a_failing_cell_is_named_and_what_ran_is_kept(template: Write, kernel: str) -> None:
    error = failure(template("before = 1", "\n# mass\n1 / 0"), kernel=kernel)
    assert (error.template, error.number, error.line) == ("tiny.ipynb", 4, "# mass")
    assert (error.name, error.message) == ("ZeroDivisionError", "division by zero")
    partial = nbformat.reads(error.partial.decode(), as_version=4)
    assert [cell.execution_count for cell in partial.cells[1:]] == [1, 2, 3, 4, None]
    assert str(error) == "tiny.ipynb, cell 4 (# mass): ZeroDivisionError: division by zero"


@KINDS
def test_a_cell_that_takes_too_long_is_named(template: Write, kernel: str) -> None:
    error = failure(template("while True: pass"), kernel=kernel, timeout=1.5)
    assert (error.number, error.name, error.message) == (3, "TimeoutError", "not ended after 1.5 s")
    # papermill calls the cells after it completed; ours never ran.
    partial = nbformat.reads(error.partial.decode(), as_version=4)
    assert partial.cells[-1].execution_count is None


def test_the_time_is_that_of_all_cells_together(template: Write) -> None:
    sleep = "import time; time.sleep(0.8)"
    error = failure(template(sleep, sleep, sleep), timeout=1.2)
    assert (error.number, error.name) == (4, "TimeoutError")


@KINDS
@pytest.mark.parametrize("end", ["os._exit(0)", "os.kill(os.getpid(), 9)"])
def test_a_cell_whose_kernel_dies_is_named(template: Write, kernel: str, end: str) -> None:
    error = failure(template(f"import os; {end}"), kernel=kernel)
    assert (error.number, error.name) == (3, "dead kernel")
    assert json.loads(error.partial)["cells"][-1]["execution_count"] is None


def test_leaving_by_system_exit_is_no_success(template: Write) -> None:
    error = failure(template("raise SystemExit(0)"))
    assert (error.number, error.name) == (3, "SystemExit")


def test_a_cell_tagged_to_be_skipped_did_not_run(template: Write) -> None:
    skipped = new_code_cell("x = 1", metadata={"tags": ["skip-execution"]})
    error = failure(template(skipped))
    assert (error.number, error.name) == (3, "not run")
    assert "skip-execution" in error.message


def test_a_cell_that_is_allowed_to_fail_still_failed(template: Write) -> None:
    allowed = new_code_cell("1 / 0", metadata={"tags": ["raises-exception"]})
    assert failure(template(allowed)).name == "ZeroDivisionError"


def test_an_empty_cell_counts_for_nothing(template: Write) -> None:
    done = execute(template("  \n", "x = 1"), {})
    assert [cell.state for cell in done.cells] == ["done", "done", "empty", "done", "done"]


def test_a_syntax_error_is_named(template: Write) -> None:
    assert failure(template("x = (")).name == "SyntaxError"


GIVE = 'display({"application/vnd.reportgen.results+json": %s}, raw=True)'
SHOW = "from IPython.display import display\n"


@pytest.mark.parametrize(
    ("cells", "name"),
    [
        (["x = 1"], "no results"),
        ([SHOW + GIVE % "{}" + "\n" + GIVE % "{}"], "results twice"),
        ([SHOW + GIVE % "{}", GIVE % "{}"], "results twice"),
        ([SHOW + GIVE % "{}", "x = 1"], "no results"),
        ([SHOW + GIVE % "[1]"], "no results"),
    ],
)
def test_results_come_once_and_last(template: Write, cells: list[str], name: str) -> None:
    assert failure(template(*cells, end=False)).name == name


def test_a_kernel_does_not_work_in_the_users_folder_nor_with_the_users_settings(
    template: Write, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    startup = tmp_path / "ipython" / "profile_default" / "startup"
    startup.mkdir(parents=True)
    (startup / "50-mine.py").write_text("intruder = True")
    (tmp_path / "matplotlibrc").write_text("lines.linewidth: 77")
    monkeypatch.setenv("IPYTHONDIR", str(tmp_path / "ipython"))
    monkeypatch.setenv("MATPLOTLIBRC", str(tmp_path))
    monkeypatch.chdir(tmp_path)
    look = """import os, matplotlib
case = {"intruder": "intruder" in globals(), "files": os.listdir(),
        "width": matplotlib.rcParams["lines.linewidth"], "hash": os.environ["PYTHONHASHSEED"]}"""
    for kernel in ("warm", "plain"):
        done = execute(template(look), {}, kernel=kernel)  # type: ignore[arg-type]
        expected = {"intruder": False, "files": [], "width": 1.5, "hash": "0"}
        assert done.results["case"] == expected


def test_nothing_is_left_of_a_run(
    template: Write, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    place = tmp_path / "t"
    place.mkdir()
    monkeypatch.setattr("tempfile.tempdir", str(place))
    given = "import os; case = {'pid': os.getpid()}"
    for kernel in ("warm", "plain"):
        pid = execute(template(given), {}, kernel=kernel).results["case"]["pid"]  # type: ignore[arg-type]
        with pytest.raises(ProcessLookupError):
            os.kill(pid, 0)
    assert [path for path in place.iterdir() if (path / "work").exists()] == []


def test_a_case_that_is_not_plain_data_is_refused_before_any_kernel(template: Write) -> None:
    with pytest.raises(RunError, match=r"case\.mass: nan is not a finite number"):
        execute(template(), {"mass": float("nan")})


def test_a_cell_error_survives_the_way_between_processes(template: Write) -> None:
    import pickle

    error = failure(template("1 / 0"))
    again = pickle.loads(pickle.dumps(error))
    assert (str(again), again.partial) == (str(error), error.partial)
