"""Warm kernels: forked from a process that has done its imports, where the system can.

The provisioner is an ordinary one of jupyter_client, so that any kernel specification for
this interpreter may name it; whenever a warm kernel cannot be had, it starts a plain one.
"""

from __future__ import annotations

import atexit
import contextlib
import json
import os
import socket
import subprocess
import sys
import tempfile
import threading
from pathlib import Path
from typing import Any, cast

from jupyter_client.connect import KernelConnectionInfo
from jupyter_client.provisioning.local_provisioner import LocalProvisioner

from reportgen.run.fingerprint import code_fingerprint
from reportgen.run.kernels import kernel_environment
from reportgen.run.normalise import SCRATCH_PREFIX

_START_SECONDS = 60.0  # the imports of a cold disk
_ANSWER_SECONDS = 20.0  # a fork, on a busy computer
_LAUNCHER = ["-m", "ipykernel_launcher"]
_PARENT_MODULE = "reportgen.run.warm_parent"


class WarmUnavailableError(Exception):
    """No warm kernel can be had; a plain one will do."""


def can_fork() -> bool:
    """Tell whether warm kernels are possible here.

    Returns
    -------
    bool
        False on Windows, which has no fork, and on macOS, whose system libraries do not
        promise to work after one.
    """
    return hasattr(os, "fork") and hasattr(socket, "AF_UNIX") and sys.platform != "darwin"


class ForkedKernel:
    """A kernel forked by a warm parent, with the manners of :class:`subprocess.Popen`.

    Parameters
    ----------
    connection
        Connection to the parent; its end, for whatever reason, ends the kernel.
    request
        What :func:`reportgen.run.warm_parent.become_kernel` takes.
    """

    stdin = stdout = stderr = None

    def __init__(self, connection: socket.socket, request: dict[str, Any]) -> None:
        self._connection = connection
        self._received = b""
        self.returncode: int | None = None
        self._send(request)
        self.pid = int(self._receive(_ANSWER_SECONDS)["pid"])

    def poll(self) -> int | None:
        """Return the exit status, or None while the kernel lives."""
        if self.returncode is None:
            with contextlib.suppress(TimeoutError, BlockingIOError):
                self.wait(0.0)
        return self.returncode

    def wait(self, timeout: float | None = None) -> int:
        """Wait for the kernel's end and return its exit status; TimeoutError if it lives on."""
        if self.returncode is None:
            try:
                self.returncode = int(self._receive(timeout)["exit"])
            except WarmUnavailableError:
                self.returncode = -9  # the parent is gone, and its kernels with it
            self._connection.close()
        return self.returncode

    def send_signal(self, number: int) -> None:
        """Send a signal to the kernel and its children."""
        if self.poll() is None:
            with contextlib.suppress(WarmUnavailableError):
                self._send({"signal": int(number)})

    def terminate(self) -> None:
        """Ask the kernel to end."""
        self.send_signal(15)

    def kill(self) -> None:
        """End the kernel."""
        self.send_signal(9)

    def _send(self, message: dict[str, Any]) -> None:
        try:
            self._connection.settimeout(_ANSWER_SECONDS)
            self._connection.sendall(json.dumps(message).encode() + b"\n")
        except OSError as error:
            raise WarmUnavailableError(str(error)) from error

    def _receive(self, timeout: float | None) -> dict[str, Any]:
        self._connection.settimeout(timeout)
        while b"\n" not in self._received:
            try:
                piece = self._connection.recv(4096)
            except (TimeoutError, BlockingIOError):
                raise
            except OSError as error:
                raise WarmUnavailableError(str(error)) from error
            if not piece:
                raise WarmUnavailableError("the warm parent has gone")
            self._received += piece
        line, self._received = self._received.split(b"\n", 1)
        answer: dict[str, Any] = json.loads(line)
        return answer


class WarmParent:
    """The warm parent process that this process started; it ends with its owner.

    Raises
    ------
    WarmUnavailableError
        If the system has no fork, or the parent cannot start or cannot be forked safely.
    """

    def __init__(self) -> None:
        if not can_fork():
            raise WarmUnavailableError("this system does not fork")
        self.owner = os.getpid()
        self._folder = tempfile.TemporaryDirectory(
            prefix=SCRATCH_PREFIX, ignore_cleanup_errors=True
        )
        root = Path(self._folder.name)
        (root / "matplotlibrc").touch()
        self.address = str(root / "warm")
        # A session of its own: an interrupt at the terminal is for the owner to handle.
        self._process = subprocess.Popen(
            [sys.executable, "-m", _PARENT_MODULE, self.address],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            env=kernel_environment(root),
            start_new_session=True,
        )
        self.pid = self._process.pid
        assert self._process.stdout is not None
        ready = self._process.stdout.readline()
        self._process.stdout.close()
        if ready.strip() != b"ready":
            self.close()
            raise WarmUnavailableError("the warm parent did not start")

    def alive(self) -> bool:
        """Tell whether the process runs."""
        return self._process.poll() is None

    def close(self) -> None:
        """End the parent and with it its kernels; does nothing in a forked copy of the owner."""
        if os.getpid() != self.owner:
            return
        assert self._process.stdin is not None
        with contextlib.suppress(OSError):
            self._process.stdin.close()
        try:
            self._process.wait(5)
        except subprocess.TimeoutExpired:
            self._process.kill()
            self._process.wait()
        self._folder.cleanup()


class _Current:
    """The parent in use by this process: its own, or one lent by the process that made it."""

    def __init__(self) -> None:
        self.lock = threading.Lock()
        self.own: WarmParent | None = None
        self.lent = ""

    def address(self) -> str:
        """Give the address of a parent whose code is today's, starting one where needed."""
        with self.lock:
            if self.lent and _fingerprint_of(self.lent) == code_fingerprint():
                return self.lent
            if self.own is not None and self.own.owner != os.getpid():
                self.own = None
            if self.own is not None and not (
                self.own.alive() and _fingerprint_of(self.own.address) == code_fingerprint()
            ):
                self.own.close()
                self.own = None
            if self.own is None:
                self.own = WarmParent()
                atexit.register(self.own.close)
            return self.own.address

    def close(self) -> None:
        with self.lock:
            if self.own is not None:
                self.own.close()
                atexit.unregister(self.own.close)
                self.own = None


_current = _Current()


def lend() -> str:
    """Start a warm parent, if need be, for worker processes to share.

    Returns
    -------
    str
        Address to hand to :func:`borrow` in each worker; empty where there is none to be had.
    """
    try:
        return _current.address()
    except WarmUnavailableError:
        return ""


def borrow(address: str) -> None:
    """Use the warm parent of another process of this computer as long as it answers.

    Parameters
    ----------
    address
        From :func:`lend`; empty for none.
    """
    _current.lent = address


def close_warm() -> None:
    """End this process's own warm parent, if it has one."""
    _current.close()


def _connect(address: str) -> socket.socket:
    connection = socket.socket(socket.AF_UNIX)
    connection.settimeout(_ANSWER_SECONDS)
    try:
        connection.connect(address)
    except OSError as error:
        connection.close()
        raise WarmUnavailableError(str(error)) from error
    return connection


def _fingerprint_of(address: str) -> str:
    """Ask a parent for the state of the code it imported; empty if it does not answer."""
    try:
        with _connect(address) as connection:
            connection.sendall(b"{}\n")
            answer = connection.makefile("rb").readline()
        return str(json.loads(answer)["fingerprint"])
    except (WarmUnavailableError, OSError, ValueError):
        return ""


class WarmProvisioner(LocalProvisioner):
    """Provisioner of warm kernels for this interpreter; of plain ones for all else.

    Named ``reportgen-warm`` among the entry points ``jupyter_client.kernel_provisioners``.
    """

    async def launch_kernel(self, cmd: list[str], **kwargs: Any) -> KernelConnectionInfo:
        """Fork the kernel, or start it where that cannot be."""
        if cmd[:3] == [sys.executable, *_LAUNCHER]:
            try:
                forked = self._fork(cmd[3:], kwargs)
            except (WarmUnavailableError, TimeoutError) as reason:
                self.log.debug("Starting a plain kernel: %s", reason)
            else:
                self.process = cast(Any, forked)
                self.pid = forked.pid
                self.pgid = None  # signals go through the parent, which knows who still lives
                self.cwd = kwargs.get("cwd")
                return self.connection_info
        return await super().launch_kernel(cmd, **kwargs)

    async def kill(self, restart: bool = False) -> None:
        """Kill the kernel and wait the moment it takes, which saves its manager a poll."""
        await super().kill(restart)
        process: object = self.process
        if isinstance(process, ForkedKernel):
            with contextlib.suppress(TimeoutError):
                process.wait(1.0)

    @staticmethod
    def _fork(arguments: list[str], options: dict[str, Any]) -> ForkedKernel:
        request = {
            "arguments": arguments,
            "cwd": options.get("cwd"),
            "env": options.get("env", dict(os.environ)),
        }
        connection = _connect(_current.address())
        try:
            return ForkedKernel(connection, request)
        except BaseException:
            connection.close()
            raise
