"""Kills a process at every step of writing and signing and looks at what it left.

Run by test_kill_points.py in a process of its own (it forks, which a process with threads
must not). Each step is one audited system call (open, mkdir, rename, link, remove, …), the
moment between making a file and filling it, or a flush; the child kills itself there with
SIGKILL, which nothing can catch or clean up after. Arguments: a folder that holds
tiny.pdf, the scenario, and the most points to try, spread evenly (0: every point).
Prints one JSON object: how many points there are and were tried, and what was broken.
"""

from __future__ import annotations

import json
import os
import shutil
import signal
import sys
from collections.abc import Callable
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any

from reportgen.archive.verify import verify_package
from reportgen.errors import PackageError
from reportgen.package.identity import self_issued_identity
from reportgen.package.sign import sign_package
from reportgen.package.write import read_payload, write_package
from reportgen.package.zipped import zip_package

TIME = datetime(2026, 3, 2, 10, 0, tzinfo=UTC)
CALLS = ("open", "os.", "shutil.", "ctypes.")
NAME = "CAL-0417_B"


class Killer:
    """Ends this process at the n-th step."""

    def __init__(self, point: int) -> None:
        self.point = point
        self.steps = 0

    def step(self) -> None:
        self.steps += 1
        if self.steps == self.point:
            os.kill(os.getpid(), signal.SIGKILL)

    def audit(self, event: str, _: Any) -> None:
        if event.startswith(CALLS):
            self.step()

    def before(self, call: Callable[..., Any]) -> Callable[..., Any]:
        def stepped(*given: Any, **named: Any) -> Any:
            self.step()
            return call(*given, **named)

        return stepped


def killed_at(point: int, work: Callable[[], object]) -> tuple[bool, int]:
    """Run ``work`` in a child killed at a step; else say how many steps there were."""
    reading, writing = os.pipe()
    child = os.fork()
    if child == 0:
        killer = Killer(point)
        os.fdopen = killer.before(os.fdopen)  # the file is there and empty
        os.fsync = killer.before(os.fsync)
        sys.addaudithook(killer.audit)
        try:
            work()
            os.write(writing, str(killer.steps).encode())
        finally:
            os._exit(0)
    os.close(writing)
    steps = os.read(reading, 20)
    os.close(reading)
    _, status = os.waitpid(child, 0)
    return os.WIFSIGNALED(status), int(steps or 0)


class Scenario:
    """One thing that is done, and what may be there if it was cut off."""

    def __init__(self, base: Path) -> None:
        self.base = base
        self.folder = base / "out"
        self.pdf = (base / "tiny.pdf").read_bytes()
        self.people = {
            role: self_issued_identity(name, folder=base / "identities", now=TIME)
            for role, name in (("prepared", "Ann Ash"), ("checked", "Bo Birch"))
        }

    def payload(self, status: str = "for review", mass: float = 62.0) -> dict[str, bytes]:
        document = {"number": "CAL-0417", "revision": "B", "status": status}
        results = {"format": 1, "document": document, "results": [], "holds": []}
        return {
            "results.json": json.dumps(results).encode(),
            "inputs.json": json.dumps({"mass": mass}).encode(),
            "report.pdf": self.pdf,
        }

    def write(self, **changes: Any) -> Path:
        self.last = self.payload(**changes)
        return write_package(
            self.folder,
            NAME,
            self.last,
            {},
            replace_draft=True,
            finish=None if changes.get("status") == "draft" else self.first_signature,
        )

    def first_signature(self, package: Path) -> None:
        self.sign(package, "prepared")

    def sign(self, package: Path, role: Any) -> None:
        hours = timedelta(hours=1 if role == "prepared" else 2)
        who = self.people[role]
        sign_package(package, role, who, "with care", who.name, time=TIME + hours)

    def before(self) -> None:
        """Make what is there at the start."""

    def work(self) -> None:
        """Do what is cut off."""
        raise NotImplementedError

    def fault(self) -> str:
        """Say what is broken after a kill; empty if nothing is."""
        raise NotImplementedError

    def again(self) -> str:
        """Do it again without a kill, and say what is broken then."""
        self.work()
        write_package(self.folder, NAME, self.last, {})  # kept as it is; clears what was left
        if left := [p.name for p in self.folder.rglob(".*")]:
            return f"left over: {left}"
        return self.fault() or ("" if self.complete() else "not complete after another run")

    def complete(self) -> bool:
        return verify_package(self.folder / NAME).ok

    def start(self) -> None:
        shutil.rmtree(self.folder, ignore_errors=True)
        self.folder.mkdir()
        self.before()

    def run(self, most: int) -> dict[str, Any]:
        self.start()
        self.work()  # so that imports at first use are no steps
        self.start()
        _, points = killed_at(0, self.work)
        stride = max(1, points // most) if most else 1
        tried = range(1, points + 1, stride)
        broken = []
        for point in tried:
            self.start()
            killed, _ = killed_at(point, self.work)
            fault = "" if killed else "was not killed"
            for look in (self.fault, self.again):
                try:
                    fault = fault or look()
                except Exception as error:
                    fault = f"{type(error).__name__}: {error}"
            if fault:
                broken.append([point, fault])
        return {"points": points, "tried": len(tried), "broken": broken}


class FirstWriting(Scenario):
    def work(self) -> None:
        self.write()

    def fault(self) -> str:
        if not (self.folder / NAME).exists():
            return ""
        found = verify_package(self.folder / NAME)
        return "" if found.ok and len(found.signers) == 1 else found.headline


class DraftReplaced(Scenario):
    def before(self) -> None:
        self.write(status="draft", mass=1.0)

    def work(self) -> None:
        self.write(mass=2.0)

    def fault(self) -> str:
        found = verify_package(self.folder / NAME)
        masses = json.loads(read_payload(self.folder / NAME)["inputs.json"])["mass"]
        whole = {(1.0, 0), (2.0, 1)}
        return "" if found.ok and (masses, len(found.signers)) in whole else found.headline


class SecondSignature(Scenario):
    def before(self) -> None:
        self.write()

    def work(self) -> None:
        if len(verify_package(self.folder / NAME).signers) == 1:
            self.sign(self.folder / NAME, "checked")

    def fault(self) -> str:
        found = verify_package(self.folder / NAME)
        return "" if found.ok and len(found.signers) in (1, 2) else found.headline

    def complete(self) -> bool:
        return len(verify_package(self.folder / NAME).signers) == 2


class FirstSignature(SecondSignature):
    """The first signature, on a package that was written without one."""

    def before(self) -> None:
        self.last = self.payload()
        write_package(self.folder, NAME, self.last, {})

    def work(self) -> None:
        if not (self.folder / NAME / "signatures").exists():
            self.sign(self.folder / NAME, "prepared")

    def fault(self) -> str:
        found = verify_package(self.folder / NAME)
        return "" if found.kind in ("unsigned", "self-issued") else found.headline

    def complete(self) -> bool:
        return verify_package(self.folder / NAME).ok


class Zipping(Scenario):
    def before(self) -> None:
        self.write()
        zip_package(self.folder / NAME)
        self.sign(self.folder / NAME, "checked")

    def work(self) -> None:
        zip_package(self.folder / NAME)

    def fault(self) -> str:
        found = verify_package(self.folder / f"{NAME}.zip")
        return "" if found.ok else found.headline

    def again(self) -> str:
        self.work()
        found = verify_package(self.folder / f"{NAME}.zip")
        return "" if len(found.signers) == 2 else "the zip is not the new one"


class NewIdentity(Scenario):
    def work(self) -> None:
        self_issued_identity("Di Dogwood", folder=self.folder / "keys", now=TIME)

    def fault(self) -> str:
        for path in self.folder.glob("keys/*.p12"):
            if path.stat().st_mode & 0o077:
                return "a key that others can read"
        return ""

    def again(self) -> str:
        made = self_issued_identity("Di Dogwood", folder=self.folder / "keys", now=TIME)
        return "" if made.name == "Di Dogwood" else "another identity"


def main() -> None:
    base = Path(sys.argv[1])
    kinds = [FirstWriting, DraftReplaced, SecondSignature, FirstSignature, Zipping, NewIdentity]
    kind = next(kind for kind in kinds if kind.__name__ == sys.argv[2])
    try:
        print(json.dumps(kind(base).run(int(sys.argv[3]))))
    except PackageError as error:
        sys.exit(str(error))


if __name__ == "__main__":
    main()
