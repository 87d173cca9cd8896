"""The process that warm kernels are forked from: it has done the imports and waits.

Run as ``python -m reportgen.run.warm_parent SOCKET``. It stays single-threaded, with no
ZeroMQ context and no event loop, since none of these survives a fork. Each client holds one
connection for one kernel: the first line asks for the kernel, later lines send it signals,
and the end of the connection ends the kernel. The end of standard input ends everything.
"""

from __future__ import annotations

import contextlib
import gc
import importlib
import io
import json
import os
import random
import selectors
import shutil
import signal
import socket
import sys
import threading
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, NoReturn

from reportgen.run.fingerprint import code_fingerprint

PREIMPORTS = (
    "ipykernel.ipkernel",
    "ipykernel.kernelapp",
    "ipykernel.zmqshell",
    "numpy",
    "scipy.integrate",
    "scipy.linalg",
    "scipy.optimize",
    "scipy.special",
    "matplotlib.pyplot",
    "matplotlib.backends.backend_svg",
    "matplotlib_inline.backend_inline",
    "reportgen.case",
    "reportgen.criteria",
    "reportgen.rotor",
    "reportgen.sheet",
    "reportgen.study",
)


@dataclass
class _Client:
    """One connection and the kernel that lives on it."""

    connection: socket.socket
    received: bytes = b""
    pid: int = 0  # process and process group of the kernel; 0 before it is forked


@dataclass
class _Parent:
    listener: socket.socket
    fingerprint: str
    selector: selectors.BaseSelector = field(default_factory=selectors.DefaultSelector)
    clients: list[_Client] = field(default_factory=list)
    wakeup: tuple[socket.socket, socket.socket] = field(default_factory=socket.socketpair)

    def serve(self) -> None:
        """Answer until standard input ends, then end every kernel."""
        for end in self.wakeup:
            end.setblocking(False)
        signal.set_wakeup_fd(self.wakeup[1].fileno())
        signal.signal(signal.SIGCHLD, lambda *_: None)
        self.selector.register(sys.stdin.fileno(), selectors.EVENT_READ, "owner")
        self.selector.register(self.listener, selectors.EVENT_READ, "new")
        self.selector.register(self.wakeup[0], selectors.EVENT_READ, "child")
        while True:
            for key, _ in self.selector.select():
                if key.data == "owner":
                    if not os.read(sys.stdin.fileno(), 64):
                        self.end()
                        return
                elif key.data == "new":
                    self.accept()
                elif key.data == "child":
                    self.wakeup[0].recv(4096)
                    self.reap()
                elif key.data in self.clients:
                    self.read(key.data)

    def end(self) -> None:
        for client in self.clients:
            _signal(client.pid, signal.SIGKILL)

    def accept(self) -> None:
        connection, _ = self.listener.accept()
        client = _Client(connection)
        self.clients.append(client)
        self.selector.register(connection, selectors.EVENT_READ, client)

    def read(self, client: _Client) -> None:
        try:
            piece = client.connection.recv(1 << 16)
        except ConnectionError:
            piece = b""
        if not piece:
            _signal(client.pid, signal.SIGKILL)
            self.drop(client)
            return
        client.received += piece
        while b"\n" in client.received:
            line, client.received = client.received.split(b"\n", 1)
            request = json.loads(line)
            if "signal" in request:
                _signal(client.pid, request["signal"])
            elif "arguments" in request:
                self.fork(client, request)
            else:
                _send(client, {"fingerprint": self.fingerprint})

    def drop(self, client: _Client) -> None:
        self.selector.unregister(client.connection)
        client.connection.close()
        self.clients.remove(client)

    def reap(self) -> None:
        """Tell each client whose kernel has ended how it ended."""
        while True:
            try:
                pid, status = os.waitpid(-1, os.WNOHANG)
            except ChildProcessError:
                return
            if not pid:
                return
            for client in self.clients:
                if client.pid == pid:
                    client.pid = 0
                    _send(client, {"exit": os.waitstatus_to_exitcode(status)})

    def fork(self, client: _Client, request: dict[str, Any]) -> None:
        parent = os.getpid()
        pid = os.fork()
        if pid:
            # Both sides set the group, so that it exists whoever comes first.
            with contextlib.suppress(OSError):
                os.setpgid(pid, pid)
            client.pid = pid
            _send(client, {"pid": pid})
            return
        try:
            with contextlib.suppress(OSError):
                os.setpgid(0, 0)
            self.forget()
            become_kernel(request, parent)
        except BaseException:
            sys.excepthook(*sys.exc_info())
        finally:
            os._exit(1)

    def forget(self) -> None:
        """Let go, in the child, of all that is the parent's."""
        signal.set_wakeup_fd(-1)
        signal.signal(signal.SIGCHLD, signal.SIG_DFL)
        self.selector.close()
        self.listener.close()
        for end in self.wakeup:
            end.close()
        for client in self.clients:
            client.connection.close()
        nothing = os.open(os.devnull, os.O_RDONLY)
        os.dup2(nothing, sys.stdin.fileno())
        os.close(nothing)


def become_kernel(request: dict[str, Any], parent: int) -> NoReturn:
    """Turn this forked process into the kernel asked for; never comes back.

    Parameters
    ----------
    request
        ``arguments`` of the kernel's command line, ``cwd``, ``env``.
    parent
        Process whose end must end this one. Said outright: the kernel's own default was read
        from the environment when the parent did its imports.
    """
    os.environ.clear()
    os.environ.update(request["env"])
    if request.get("cwd"):
        os.chdir(request["cwd"])
    reseed()
    from ipykernel.kernelapp import IPKernelApp

    sys.argv = ["ipykernel_launcher", *request["arguments"]]
    app = IPKernelApp.instance(parent_handle=parent)
    app.initialize(request["arguments"])  # type: ignore[no-untyped-call]
    app.start()  # type: ignore[no-untyped-call]
    sys.exit(0)


def reseed() -> None:
    """Give this process random numbers of its own, not a copy of its parent's."""
    import numpy as np

    random.seed()
    np.random.seed()


def warm_up() -> None:
    """Import what templates use and draw once, so that fonts and parsers are loaded.

    A module that cannot be imported is left to the template, which will say so.
    """
    for name in PREIMPORTS:
        with contextlib.suppress(Exception):
            importlib.import_module(name)
    with contextlib.suppress(Exception):
        from matplotlib.figure import Figure

        figure = Figure()
        axes = figure.subplots()
        axes.plot([0, 1], [0, 1], label=r"$\omega_\mathrm{cr}$")
        axes.legend()
        for kind in ("svg", "png"):
            figure.savefig(io.BytesIO(), format=kind)


def require_forkable() -> None:
    """Refuse to serve with what a fork would break.

    Raises
    ------
    RuntimeError
        If another thread runs or a ZeroMQ context exists.
    """
    import zmq

    tasks = Path("/proc/self/task")
    threads = len(list(tasks.iterdir())) if tasks.is_dir() else threading.active_count()
    if threads != 1:
        raise RuntimeError(f"{threads} threads run after the imports; a fork would lose them")
    contexts = [thing for thing in gc.get_objects() if type(thing) is zmq.Context]
    if contexts:
        raise RuntimeError("a ZeroMQ context exists after the imports")


def _signal(pid: int, number: int) -> None:
    if pid:
        with contextlib.suppress(ProcessLookupError, PermissionError):
            os.killpg(pid, number)


def _send(client: _Client, message: dict[str, Any]) -> None:
    with contextlib.suppress(OSError):  # a client that went away needs no answer
        client.connection.sendall(json.dumps(message).encode() + b"\n")


def main() -> None:
    """Take the listening socket's path from the command line, warm up, and serve."""
    fingerprint = code_fingerprint()
    warm_up()
    require_forkable()
    gc.freeze()
    with socket.socket(socket.AF_UNIX) as listener:
        listener.bind(sys.argv[1])
        listener.listen(64)
        print("ready", flush=True)
        silence = os.open(os.devnull, os.O_WRONLY)
        os.dup2(silence, sys.stdout.fileno())
        os.close(silence)
        _Parent(listener, fingerprint).serve()
    # The owner may have died without a chance to do it.
    shutil.rmtree(Path(sys.argv[1]).parent, ignore_errors=True)


if __name__ == "__main__":
    main()
