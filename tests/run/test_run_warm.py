"""Warm kernels behave as plain ones, end when they should, and give way to plain ones."""

from __future__ import annotations

import base64
import os
import shutil
import signal
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import psutil
import pytest
from jupyter_client.manager import KernelManager
from jupyter_client.provisioning.factory import KernelProvisionerFactory

from reportgen.run import fingerprint, kernels, warm
from reportgen.run.execute import execute
from reportgen.run.kernels import PROVISIONER, Scratch, kernel_manager, scratch_folder
from reportgen.run.warm import WarmParent, WarmProvisioner, WarmUnavailableError

Write = Callable[..., Path]

pytestmark = pytest.mark.usefixtures("still_code")


@pytest.fixture(scope="module", autouse=True)
def still_code() -> Iterator[None]:
    """Keep parents alive through these tests even if someone edits the package meanwhile."""
    warm.close_warm()
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(warm, "code_fingerprint", lambda: warm._fingerprint_of(parent_address()))
        yield


def parent_address() -> str:
    return warm._current.own.address if warm._current.own else ""


def told(path: Path, case: dict[str, Any] | None = None, **options: Any) -> Any:
    return execute(path, case or {}, **options).results["case"]


WHO = "import os, sys; case = {'pid': os.getpid(), 'ppid': os.getppid()}"


def gone(pid: int, seconds: float = 5.0) -> bool:
    """Wait for a process to be no more (a zombie of an init that does not reap is no more)."""
    deadline = time.monotonic() + seconds
    while time.monotonic() < deadline:
        try:
            if psutil.Process(pid).status() == psutil.STATUS_ZOMBIE:
                return True
        except psutil.NoSuchProcess:
            return True
        time.sleep(0.02)
    return False


def test_kernels_are_forked_from_one_parent_and_are_never_shared(template: Write) -> None:
    path = template(WHO)
    one, other = told(path), told(path)
    assert one["ppid"] == other["ppid"] != os.getpid()
    assert one["pid"] != other["pid"]
    path = template(
        "import builtins\ncase = {'seen': hasattr(builtins, 'mark')}; builtins.mark = 1"
    )
    assert [told(path), told(path)] == [{"seen": False}] * 2


def test_what_templates_use_is_imported_before_the_fork(template: Write) -> None:
    look = """import sys
names = ("scipy.special", "matplotlib.pyplot", "reportgen.sheet")
case = [name in sys.modules for name in names]"""
    assert told(template(look)) == [True] * 3


def test_figures_keep_their_pictures(template: Write) -> None:
    figure = "import matplotlib.pyplot as plt\nplt.plot([1, 2]);"
    pictures = []
    for kernel in ("warm", "plain"):
        done = execute(template(figure), {}, kernel=kernel)  # type: ignore[arg-type]
        (output,) = done.notebook.cells[3].outputs
        pictures.append(base64.b64decode(output.data["image/png"]))
    assert pictures[0].startswith(b"\x89PNG")
    assert pictures[0] == pictures[1]


def test_unseeded_random_numbers_differ_and_seeded_ones_do_not(template: Write) -> None:
    draw = """import random, uuid
import numpy as np
free = [random.random(), float(np.random.rand()), str(uuid.uuid4())]
random.seed(1); np.random.seed(1)
case = {"free": free, "seeded": [random.random(), float(np.random.rand())]}"""
    one, other = told(template(draw)), told(template(draw))
    assert [a == b for a, b in zip(one["free"], other["free"], strict=True)] == [False] * 3
    assert one["seeded"] == other["seeded"]


def test_the_parent_has_one_thread_and_no_socket_library_at_work(template: Write) -> None:
    pid = told(template(WHO))["ppid"]
    parent = psutil.Process(pid)
    assert parent.num_threads() == 1
    open_sockets = {connection.laddr for connection in parent.net_connections("inet")}
    assert open_sockets == set()


def test_a_parent_that_cannot_be_forked_safely_does_not_serve(tmp_path: Path) -> None:
    code = """import sys, threading, time
from reportgen.run import warm_parent
warm_parent.PREIMPORTS = ()
if sys.argv[2] == "thread":
    threading.Thread(target=time.sleep, args=(60,), daemon=True).start()
else:
    import zmq; context = zmq.Context(); context.socket(zmq.PUB).close(); context.term()
    kept = zmq.Context()
warm_parent.main()"""
    for kind, reason in (("thread", "2 threads run"), ("zmq", "ZeroMQ context")):
        done = subprocess.run(
            [sys.executable, "-c", code, str(tmp_path / kind), kind],
            env={**os.environ, **kernels.ONE_THREAD},
            stdin=subprocess.DEVNULL,
            capture_output=True,
            text=True,
            check=False,
        )
        assert done.returncode == 1
        assert done.stdout == ""
        assert reason in done.stderr


def test_file_sockets_are_used_and_tcp_where_their_path_is_too_long(tmp_path: Path) -> None:
    with scratch_folder() as scratch:
        assert kernel_manager(scratch).transport == "ipc"
    long = tmp_path / ("x" * 100)
    assert kernel_manager(Scratch(long)).transport == "tcp"


def test_a_run_works_over_tcp_too(template: Write, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(kernels, "_SOCKET_PATH_LIMIT", 0)
    for kernel in ("warm", "plain"):
        assert told(template(), {"a": 1}, kernel=kernel) == {"a": 1}


def parallel_code(path: Path) -> str:
    return f"""import sys, json, concurrent.futures as cf
from pathlib import Path
from reportgen.run.execute import execute
def one(n):
    return execute(Path({str(path)!r}), {{"n": n}}).results["case"]["n"]
with cf.ThreadPoolExecutor(3) as pool:
    print(json.dumps(list(pool.map(one, range(6)))))"""


def test_runs_side_by_side_do_not_meet(template: Write) -> None:
    done = subprocess.run(
        [sys.executable, "-c", parallel_code(template())],
        capture_output=True,
        text=True,
        check=True,
    )
    assert (done.stdout, done.stderr) == (f"{list(range(6))}\n", "")


def test_a_change_of_code_starts_a_new_parent(
    template: Write, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = template(WHO)
    before = told(path)["ppid"]
    assert told(path)["ppid"] == before
    current = fingerprint.code_fingerprint
    monkeypatch.setattr(warm, "code_fingerprint", lambda: "changed")
    assert told(path)["ppid"] != before
    assert gone(before)
    monkeypatch.setattr(warm, "code_fingerprint", current)


def test_a_parent_that_died_is_replaced(template: Write) -> None:
    path = template(WHO)
    before = told(path)["ppid"]
    os.kill(before, signal.SIGKILL)
    assert gone(before)
    assert told(path)["ppid"] != before


SLEEPER = """import sys, time
from pathlib import Path
from reportgen.run.execute import execute
execute(Path(sys.argv[1]), {}, kernel=sys.argv[2])"""


@pytest.fixture
def sleeper(template: Write, tmp_path: Path) -> Iterator[Callable[[str], Any]]:
    """Start a process whose kernel sleeps; gives the process, its kernel and kernel's parent."""
    mark = tmp_path / "mark"
    say = f"import os, time, pathlib\nt = pathlib.Path({str(mark)!r} + '.part')\n"
    say += f"t.write_text(f'{{os.getpid()}} {{os.getppid()}}'); t.rename({str(mark)!r})\n"
    path = template(say + "time.sleep(300)")
    started: list[subprocess.Popen[bytes]] = []
    place = tempfile.mkdtemp(prefix="rt-")  # short, for the sockets in it

    def start(kernel: str) -> tuple[subprocess.Popen[bytes], int, int]:
        process = subprocess.Popen(
            [sys.executable, "-c", SLEEPER, str(path), kernel],
            env={**os.environ, "TMPDIR": place},
            stderr=subprocess.DEVNULL,
        )
        process.place = Path(place)  # type: ignore[attr-defined]
        started.append(process)
        deadline = time.monotonic() + 60
        while not mark.exists():
            assert time.monotonic() < deadline
            assert process.poll() is None
            time.sleep(0.05)
        pid, parent = (int(number) for number in mark.read_text().split())
        return process, pid, parent

    yield start
    for process in started:
        process.kill()
        process.wait()
    shutil.rmtree(place)


@pytest.mark.parametrize("kernel", ["warm", "plain"])
def test_kernels_do_not_outlive_a_killed_run(sleeper: Callable[[str], Any], kernel: str) -> None:
    process, pid, parent = sleeper(kernel)
    process.kill()
    process.wait()
    assert gone(pid)
    assert gone(parent)


def test_kernels_do_not_outlive_a_killed_parent(sleeper: Callable[[str], Any]) -> None:
    process, pid, parent = sleeper("warm")
    os.kill(parent, signal.SIGKILL)
    assert gone(pid)
    assert process.wait(20) == 1  # the run ends with an error and does not hang


def test_an_interrupted_run_leaves_no_process_and_no_folder_behind(
    sleeper: Callable[[str], Any],
) -> None:
    process, pid, parent = sleeper("warm")
    process.send_signal(signal.SIGINT)
    assert process.wait(20) != 0
    assert gone(pid)
    assert gone(parent)
    assert list(process.place.iterdir()) == []


@pytest.mark.parametrize("reason", ["no fork", "no start"])
def test_a_plain_kernel_is_the_fallback(
    template: Write, monkeypatch: pytest.MonkeyPatch, reason: str
) -> None:
    warm.close_warm()
    if reason == "no fork":
        monkeypatch.delattr(os, "fork")
    else:
        monkeypatch.setattr(warm, "_PARENT_MODULE", "reportgen.no_such_module")
    with pytest.raises(WarmUnavailableError):
        WarmParent()
    assert told(template(WHO))["ppid"] == os.getpid()


def test_the_provisioner_serves_any_kernel_specification_that_names_it(tmp_path: Path) -> None:
    """A notebook server that knows nothing of reportgen gets a warm kernel by its name."""
    factory = KernelProvisionerFactory.instance()
    assert factory.provisioners[PROVISIONER].load() is WarmProvisioner
    specs = kernels.OwnKernelSpecs()
    specs.provisioner = PROVISIONER
    manager = KernelManager(kernel_spec_manager=specs, transport="ipc")
    manager.connection_file = str(tmp_path / "k.json")
    manager.start_kernel(cwd=str(tmp_path))
    client = manager.client()
    client.start_channels()
    try:
        client.wait_for_ready(timeout=30)
        found: list[Any] = []
        client.execute_interactive(
            "import os; print(os.getppid(), os.getcwd())",
            output_hook=lambda message: found.append(message["content"].get("text")),
            timeout=30,
        )
        text = next(text for text in found if text)
        assert text.split() == [str(warm._current.own.pid), str(tmp_path)]  # type: ignore[union-attr]
        manager.restart_kernel(now=True)
        client.wait_for_ready(timeout=30)
        assert manager.is_alive()
    finally:
        client.stop_channels()
        manager.shutdown_kernel(now=True)
    assert not manager.is_alive()
