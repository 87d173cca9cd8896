"""Many cases: none stops the rest, an interrupt keeps what is finished, a cluster does the same."""

from __future__ import annotations

import functools
import json
import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import psutil
import pytest

from reportgen.errors import InputError
from reportgen.run.batch import State, run_many

JOBS = '''"""Jobs that other processes can import."""
import os, time
from pathlib import Path
from reportgen.errors import InputError, Problem, RunError

def job(folder, case):
    name = case.name.split("-")[0]
    (folder / f"{case.name}.begun").write_text(str(os.getpid()))
    if name == "wrong":
        raise InputError(Problem("no mass", file=case.name))
    if name == "broken":
        raise RunError("cell 3 failed")
    if name == "bug":
        return {"ratio": 1 / 0}
    if name == "killed":
        os.kill(os.getpid(), 9)
    if name == "slow":
        time.sleep(60)
    if name == "short":
        time.sleep(0.4)
    (folder / f"{case.name}.part").write_text("whole")
    (folder / f"{case.name}.part").rename(folder / case.name)
    return {"pid": os.getpid(), "exit_status": 3 if name == "limit" else 0}

def notebook(template, case):
    from reportgen.run.execute import execute
    return execute(template, {"case": case.name}).results["case"]
'''


@pytest.fixture
def jobs(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Any:
    """Give the module of jobs, importable here and in processes started from here."""
    import importlib

    folder = tmp_path / "code"
    folder.mkdir()
    (folder / "batch_jobs.py").write_text(JOBS)
    monkeypatch.syspath_prepend(folder)
    monkeypatch.setenv("PYTHONPATH", str(folder))
    monkeypatch.delitem(sys.modules, "batch_jobs", raising=False)
    return importlib.import_module("batch_jobs")


@pytest.fixture
def job(jobs: Any, tmp_path: Path) -> Callable[[Path], dict[str, Any]]:
    return functools.partial(jobs.job, tmp_path)


def paths(text: str) -> list[Path]:
    return [Path(name) for name in text.split()]


def statuses(summary: Any) -> str:
    return " ".join(outcome.status for outcome in summary.outcomes)


@pytest.mark.parametrize("n", [1, 2])
def test_one_failing_does_not_stop_the_rest(job: Any, n: int) -> None:
    summary = run_many(job, paths("a wrong b broken bug limit"), n, warm=False)
    assert statuses(summary) == "done failed done failed failed done"
    errors = [outcome.error for outcome in summary.outcomes if outcome.error]
    assert [(error["kind"], error["message"]) for error in errors] == [
        ("InputError", "wrong: no mass"),
        ("RunError", "cell 3 failed"),
        ("ZeroDivisionError", "division by zero"),
    ]
    assert [("traceback" in error) for error in errors] == [False, False, True]


def test_a_killed_process_fails_its_own_case_only(job: Any) -> None:
    summary = run_many(job, paths("a b killed-1 c killed-2 d e"), 3, warm=False)
    assert statuses(summary) == "done done failed done failed done done"
    assert "was killed" in summary.outcomes[2].error["message"]  # type: ignore[index]


@pytest.mark.parametrize(
    ("cases", "status"),
    [("a b", 0), ("a limit", 3), ("limit wrong", 2), ("wrong limit broken", 1), ("", 0)],
)
def test_the_exit_status_is_that_of_the_gravest_case(job: Any, cases: str, status: int) -> None:
    assert run_many(job, paths(cases)).exit_status == status


def test_the_summary_is_plain_json_in_the_order_given(job: Any) -> None:
    found = json.loads(json.dumps(run_many(job, paths("b wrong a")).as_dict(), allow_nan=False))
    assert [case["case"] for case in found["cases"]] == ["b", "wrong", "a"]
    counts = {key: found[key] for key in ("format", "done", "failed", "stopped", "exit_status")}
    assert counts == {"format": 1, "done": 2, "failed": 1, "stopped": 0, "exit_status": 2}


@pytest.mark.parametrize("n", [1, 2])
def test_progress_tells_what_runs_and_what_is_left(job: Any, n: int) -> None:
    states: list[State] = []
    cases = paths("a wrong b c")
    run_many(job, cases, n, on_progress=states.append, warm=False)
    for state in states:
        assert len(state.running) <= n
        assert len(state.running) + state.done + state.failed + state.left == 4
    ended = [state.ended.case for state in states if state.ended]
    assert sorted(ended) == sorted(str(case) for case in cases)
    assert (states[-1].running, states[-1].done, states[-1].failed) == ((), 3, 1)


def test_an_interrupt_of_a_batch_in_this_process_keeps_what_is_finished(
    job: Any, tmp_path: Path
) -> None:
    def interrupt(state: State) -> None:
        if state.ended and state.ended.case == "b":
            raise KeyboardInterrupt

    summary = run_many(job, paths("a b c d"), on_progress=interrupt)
    assert summary.interrupted
    assert statuses(summary) == "done done stopped stopped"
    assert summary.exit_status == 1
    assert not (tmp_path / "c").exists()


BATCH = """import functools, json, sys
from pathlib import Path
import batch_jobs
from reportgen.run.batch import run_many
if __name__ == "__main__":
    job = functools.partial(batch_jobs.job, Path(sys.argv[1]))
    cases = [Path(name) for name in "a slow-1 b c short slow-2 d e".split()]
    print(json.dumps(run_many(job, cases, 3, warm=False).as_dict()))
"""


@pytest.mark.usefixtures("jobs")
def test_an_interrupt_at_the_terminal_leaves_finished_work_whole_and_no_process(
    tmp_path: Path,
) -> None:
    script = tmp_path / "code" / "batch_main.py"
    script.write_text(BATCH)
    process = subprocess.Popen(
        [sys.executable, str(script), str(tmp_path)],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )
    deadline = time.monotonic() + 60
    while not all((tmp_path / f"slow-{n}.begun").exists() for n in (1, 2)):
        assert time.monotonic() < deadline
        time.sleep(0.02)
    children = psutil.Process(process.pid).children(recursive=True)
    os.killpg(process.pid, signal.SIGINT)  # as a terminal does, to the whole group
    out, err = process.communicate(timeout=30)
    assert err == ""
    found = {case["case"]: case["status"] for case in json.loads(out)["cases"]}
    assert (found["a"], found["slow-1"], found["slow-2"]) == ("done", "stopped", "stopped")
    for name, status in found.items():
        assert (tmp_path / name).exists() == (status == "done"), name
    _, alive = psutil.wait_procs(children, timeout=5)
    assert alive == []


def test_processes_share_one_warm_parent(jobs: Any, template: Callable[..., Path]) -> None:
    path = template("import os; case = {**case, 'ppid': os.getppid()}")
    summary = run_many(functools.partial(jobs.notebook, path), paths("a b c d e f"), 2)
    assert statuses(summary) == "done " * 5 + "done"
    results = [outcome.result for outcome in summary.outcomes]
    assert [result["case"] for result in results] == ["a", "b", "c", "d", "e", "f"]  # type: ignore[index]
    assert len({result["ppid"] for result in results}) == 1  # type: ignore[index]


# --- a cluster ------------------------------------------------------------------------


@pytest.fixture
def cluster(jobs: Any, tmp_path: Path) -> Iterator[tuple[str, list[subprocess.Popen[bytes]]]]:
    """Start a scheduler and two worker processes on loopback, as the commands do."""
    assert jobs.__name__ == "batch_jobs"  # the workers import it by this name
    about = tmp_path / "scheduler.json"
    log = (tmp_path / "cluster.log").open("wb")
    dask = [sys.executable, "-m", "dask"]
    started = []

    def start(*arguments: str) -> subprocess.Popen[bytes]:
        process = subprocess.Popen([*dask, *arguments], stdout=log, stderr=log)
        started.append(process)
        return process

    start(
        *("scheduler", "--host", "127.0.0.1", "--port", "0", "--no-dashboard"),
        *("--scheduler-file", str(about)),
    )
    deadline = time.monotonic() + 60
    while not about.exists():
        assert time.monotonic() < deadline, (tmp_path / "cluster.log").read_text()
        time.sleep(0.05)
    time.sleep(0.1)
    address = json.loads(about.read_text())["address"]
    workers = [
        start(
            *("worker", address, "--nthreads", "1", "--no-nanny", "--no-dashboard"),
            *("--local-directory", str(tmp_path / f"worker-{n}")),
        )
        for n in (1, 2)
    ]
    try:
        yield address, workers
    finally:
        for process in reversed(started):
            process.kill()
            process.wait()
        log.close()


def test_a_cluster_runs_the_same_job_and_a_killed_worker_loses_no_case(
    job: Any, cluster: tuple[str, list[subprocess.Popen[bytes]]], tmp_path: Path
) -> None:
    address, workers = cluster
    victims: list[int] = []

    def kill_one(state: State) -> None:
        # Killed in the middle of a case, once one case is done.
        if state.done and not victims:
            deadline = time.monotonic() + 20
            while not victims and time.monotonic() < deadline:
                begun = {path.stem: path for path in tmp_path.glob("short-*.begun")}
                for name, path in begun.items():
                    owner = path.read_text()
                    if not (tmp_path / name).exists() and owner == str(workers[0].pid):
                        workers[0].kill()
                        workers[0].wait()
                        victims.append(workers[0].pid)
                        break

    names = " ".join(f"short-{n}" for n in range(8)) + " wrong limit"
    summary = run_many(job, paths(names), scheduler=address, on_progress=kill_one)
    assert victims
    assert statuses(summary) == "done " * 8 + "failed done"
    assert summary.exit_status == 2
    pids = {outcome.result["pid"] for outcome in summary.outcomes if outcome.result}
    assert workers[1].pid in pids
    assert os.getpid() not in pids


def test_no_scheduler_is_an_error_of_the_command(job: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("reportgen.run.pools._SCHEDULER_SECONDS", 1)
    with pytest.raises(InputError, match=r"no scheduler answers at 'tcp://127\.0\.0\.1:9'"):
        run_many(job, paths("a"), scheduler="tcp://127.0.0.1:9")
    with pytest.raises(InputError, match="no scheduler answers"):
        run_many(job, paths("a"), scheduler="not an address")


def test_a_cluster_without_dask_says_what_to_install(
    job: Any, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setitem(sys.modules, "distributed", None)
    with pytest.raises(InputError, match="install reportgen with its 'cluster' extra"):
        run_many(job, paths("a"), scheduler="tcp://127.0.0.1:9")
