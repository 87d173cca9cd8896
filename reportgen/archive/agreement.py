"""A calculation against its repetition, result by result and file by file."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping
from dataclasses import asdict, dataclass
from typing import Any, Literal

Kind = Literal["identical", "within tolerance", "differs"]

TOLERANCE = 1e-6
"""Relative difference that another platform or library version leaves room for.

Every headline result is converged to 1e-8 or better by its own method; rounding and the order of
sums in another linear algebra library move it by far less than this, a changed method by more."""
_VERDICT = "verdict"


@dataclass(frozen=True)
class Compared:
    """One result or criterion, then and now; values in SI, None where there is none."""

    id: str
    title: str
    then: float | str | None
    now: float | str | None
    difference: float | None
    kind: Kind


@dataclass(frozen=True)
class Agreement:
    """What a repetition came to.

    Parameters
    ----------
    results
        Every result and criterion of either calculation.
    files
        Names of payload files with whether their bytes are the same.
    reasons
        What is not the same about the two: versions, platform, template.
    """

    results: tuple[Compared, ...]
    files: tuple[tuple[str, bool], ...]
    reasons: tuple[str, ...]

    @property
    def kind(self) -> Kind:
        """``identical`` only where every payload file has the same bytes."""
        if any(one.kind == "differs" for one in self.results):
            return "differs"
        same = all(equal for _, equal in self.files)
        return "identical" if same else "within tolerance"

    @property
    def headline(self) -> str:
        """The outcome in one line."""
        if self.kind == "identical":
            return "identical: the repetition gives every file of the payload byte for byte"
        if self.kind == "within tolerance":
            return (
                f"within tolerance: every result within {TOLERANCE:g} relative, every verdict "
                "the same"
            )
        count = sum(one.kind == "differs" for one in self.results)
        return f"differs: {count} of {len(self.results)} results or verdicts are not those archived"

    def to_json(self) -> dict[str, Any]:
        """Give the outcome as plain JSON values."""
        return {
            "kind": self.kind,
            "headline": self.headline,
            "tolerance": TOLERANCE,
            "results": [asdict(one) for one in self.results],
            "files": dict(self.files),
            "reasons": list(self.reasons),
        }


def agreement(then: Mapping[str, bytes], now: Mapping[str, bytes]) -> Agreement:
    """Compare two payloads: files by name, without the leading ``data/``."""
    old, new = json.loads(then["results.json"]), json.loads(now["results.json"])
    names = sorted({*then, *now})
    files = tuple((name, then.get(name) == now.get(name)) for name in names)
    return Agreement((*_results(old, new), *_verdicts(old, new)), files, tuple(_reasons(then, now)))


def _results(old: Any, new: Any) -> list[Compared]:
    then = {one["id"]: one for one in old["results"]}
    now = {one["id"]: one for one in new["results"]}
    found = []
    for name in [*then, *(n for n in now if n not in then)]:
        title = (then.get(name) or now[name])["title"]
        if name not in then or name not in now:
            words = [None if name not in side else side[name]["value"] for side in (then, now)]
            found.append(Compared(name, title, words[0], words[1], None, "differs"))
            continue
        found.append(_value(name, title, then[name]["value"], now[name]["value"]))
    return found


def _value(name: str, title: str, then: float | None, now: float | None) -> Compared:
    if then == now:
        return Compared(name, title, then, now, 0.0, "identical")
    if then is None or now is None:
        return Compared(name, title, then, now, None, "differs")
    gap = abs(now - then) / abs(then) if then else math.inf
    return Compared(
        name, title, then, now, gap, "within tolerance" if gap <= TOLERANCE else "differs"
    )


def _verdicts(old: Any, new: Any) -> list[Compared]:
    then = {one["id"]: one for one in old["criteria"]}
    now = {one["id"]: one for one in new["criteria"]}
    found = []
    for name in [*then, *(n for n in now if n not in then)]:
        title = (then.get(name) or now[name])["title"]
        a, b = (side.get(name, {}).get(_VERDICT) for side in (then, now))
        kind: Kind = "identical" if a == b else "differs"
        found.append(Compared(name, title, a, b, None, kind))
    return found


def _reasons(then: Mapping[str, bytes], now: Mapping[str, bytes]) -> list[str]:
    """Say what is not the same about template, program, platform and packages."""
    reasons = []
    if then.get("template.ipynb") != now.get("template.ipynb"):
        reasons.append("the template is not the archived one")
    old, new = (json.loads(side.get("environment.json", b"{}")) for side in (then, now))
    if old.get("code_sha512") != new.get("code_sha512"):
        reasons.append("the program's code is not that of the archived calculation")
    for key, words in (("python", "Python"), ("platform", "platform"), ("blas", "linear algebra"),
                       ("simd", "instruction set")):  # fmt: skip
        if old.get(key) != new.get(key):
            reasons.append(f"{words}: {_short(old.get(key))} then, {_short(new.get(key))} now")
    versions = [{p["name"]: p["version"] for p in side.get("packages", [])} for side in (old, new)]
    changed = [
        f"{name} {versions[0].get(name, 'absent')} → {versions[1].get(name, 'absent')}"
        for name in sorted({*versions[0], *versions[1]})
        if versions[0].get(name) != versions[1].get(name)
    ]
    if changed:
        more = f" and {len(changed) - 12} more" if len(changed) > 12 else ""
        reasons.append("packages: " + ", ".join(changed[:12]) + more)
    return reasons


def _short(value: Any) -> str:
    if isinstance(value, dict):
        return " ".join(str(part) for part in value.values())[:80]
    if isinstance(value, list):
        return " ".join(map(str, value))[:80]
    return str(value)
