"""Kernels for runs: the Python that runs reportgen, apart from the user's own settings.

A run must not depend on kernel specifications, IPython profiles, matplotlib settings or a
number of threads that happen to be on a computer, so each kernel gets its own.
"""

from __future__ import annotations

import contextlib
import math
import os
import queue
import sys
import tempfile
import time
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from importlib.metadata import EntryPoint
from pathlib import Path
from typing import Any

from jupyter_client.asynchronous.client import AsyncKernelClient
from jupyter_client.kernelspec import KernelSpec, KernelSpecManager, NoSuchKernel
from jupyter_client.manager import AsyncKernelManager
from jupyter_client.provisioning.factory import KernelProvisionerFactory

from reportgen.run.normalise import SCRATCH_PREFIX
from reportgen.run.template import KERNEL

_SOCKET_PATH_LIMIT = 103  # macOS holds 104 bytes with the closing null, Linux 108

KERNEL_ARGUMENTS = ["--HistoryManager.enabled=False", "--matplotlib=inline", "--log-level=50"]
"""No history, since nbclient keeps it off the disk for kernels named ``python*`` only; and the
figure backend by name: a kernel whose matplotlib was imported before it started would never
choose it, and figures would lose their pictures without a word. No log: a kernel ended at
once complains on the user's terminal of the interrupt that its manager sends first.
"""

_KEPT_BACK = (
    "PYTHONSTARTUP", "MPLBACKEND", "JPY_PARENT_PID", "JPY_SESSION_NAME", "REPORTGEN_PASSPHRASE",
)  # fmt: skip

PROVISIONER = "reportgen-warm"
"""Name of the provisioner of warm kernels among the entry points of jupyter_client."""

ONE_THREAD = dict.fromkeys(("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"), "1")
"""One thread a kernel: the last digits then do not depend on the number of cores."""


# What the installed entry point says, so that a source tree that is not installed works too.
KernelProvisionerFactory.provisioners.setdefault(
    PROVISIONER,
    EntryPoint(
        PROVISIONER, "reportgen.run.warm:WarmProvisioner", KernelProvisionerFactory.GROUP_NAME
    ),
)


@dataclass(frozen=True)
class Scratch:
    """The folder of one run; gone with all it holds when the run ends.

    Parameters
    ----------
    root
        Readable by its owner alone.
    """

    root: Path

    @property
    def work(self) -> Path:
        """Folder the kernel works in: empty, so that a template reads nothing beside its case."""
        return self.root / "work"

    @property
    def connection_file(self) -> Path:
        """File by which the kernel and its client find each other."""
        return self.root / "k.json"


@contextmanager
def scratch_folder() -> Iterator[Scratch]:
    """Make the folder of one run and take it away at the end.

    Yields
    ------
    Scratch
        The folder.
    """
    with tempfile.TemporaryDirectory(prefix=SCRATCH_PREFIX, ignore_cleanup_errors=True) as name:
        scratch = Scratch(Path(name))
        scratch.work.mkdir()
        (scratch.root / "matplotlibrc").touch()
        yield scratch


def kernel_environment(root: Path) -> dict[str, str]:
    """Give the environment of a kernel.

    Parameters
    ----------
    root
        Folder that holds an empty ``matplotlibrc``; IPython's profile goes there too.

    Returns
    -------
    dict[str, str]
        This process's environment without what would run a user's code or change figures, and
        without the passphrase of the identity, which no notebook needs.
    """
    environment = {name: value for name, value in os.environ.items() if name not in _KEPT_BACK}
    environment.update(ONE_THREAD)
    environment["PYTHONHASHSEED"] = "0"
    environment["IPYTHONDIR"] = str(root / "ipython")
    environment["MATPLOTLIBRC"] = str(root / "matplotlibrc")
    return environment


class OwnKernelSpecs(KernelSpecManager):
    """Knows one kernel, ``python3``: the interpreter that runs reportgen."""

    provisioner = ""

    def get_kernel_spec(self, kernel_name: str) -> KernelSpec:
        """Return the specification without looking at what is installed on the computer."""
        if kernel_name != KERNEL:
            raise NoSuchKernel(kernel_name)
        metadata: dict[str, Any] = {}
        if self.provisioner:
            metadata["kernel_provisioner"] = {"provisioner_name": self.provisioner, "config": {}}
        return KernelSpec(
            name=KERNEL,
            argv=[
                sys.executable,
                *("-m", "ipykernel_launcher", "-f", "{connection_file}"),
                *KERNEL_ARGUMENTS,
            ],
            display_name="Python 3",
            language="python",
            metadata=metadata,
        )


class PromptClient(AsyncKernelClient):
    """A client that is ready as soon as the kernel is.

    jupyter_client's own goes on to wait for 0.2 s of silence, about two fifths of the time of
    a short notebook, to empty the channel of outputs; nbclient passes over what belongs to no
    cell in any case.
    """

    async def wait_for_ready(self, timeout: float | None = None) -> None:
        """Wait until the kernel answers and its outputs arrive.

        Raises
        ------
        RuntimeError
            If the kernel dies first, or does not answer in ``timeout`` seconds.
        """
        deadline = math.inf if timeout is None else time.monotonic() + timeout
        while True:
            self.kernel_info()
            with contextlib.suppress(queue.Empty):
                reply = await self.shell_channel.get_msg(timeout=1)
                if reply["msg_type"] == "kernel_info_reply":
                    await self.iopub_channel.get_msg(timeout=0.2)
                    return
            if not await self.is_alive():
                raise RuntimeError("the kernel died as it started")
            if time.monotonic() > deadline:
                raise RuntimeError(f"the kernel did not answer in {timeout:g} s")


def kernel_manager(scratch: Scratch, provisioner: str = "") -> AsyncKernelManager:
    """Give the manager of one kernel that is yet to start.

    Parameters
    ----------
    scratch
        Folder of the run; sockets lie in it. Free TCP ports, which papermill's own way takes,
        can be taken by another run between finding and using them; file sockets cannot.
    provisioner
        Name of the kernel provisioner; empty for a process of its own.

    Returns
    -------
    AsyncKernelManager
        Over file sockets where the system has them and their path is short enough, else TCP.
    """
    specs = OwnKernelSpecs()
    specs.provisioner = provisioner
    manager = AsyncKernelManager(
        kernel_name=KERNEL,
        kernel_spec_manager=specs,
        connection_file=str(scratch.connection_file),
        client_class=f"{PromptClient.__module__}.{PromptClient.__qualname__}",
    )
    longest = len(os.fsencode(scratch.connection_file.with_name("k-ipc-5")))
    if sys.platform != "win32" and longest <= _SOCKET_PATH_LIMIT:
        manager.transport = "ipc"
    return manager
