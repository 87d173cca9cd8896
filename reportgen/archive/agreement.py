"""A calculation against its repetition, result by result and file by file."""

from __future__ import annotations

import json
import math
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import asdict, dataclass
from typing import Any, Literal

from reportgen.errors import PackageError, VerificationError
from reportgen.package.bag import PAYLOAD
from reportgen.package.intact import read_results

Kind = Literal["identical", "within tolerance", "differs"]

TOLERANCE = 1e-6
"""Relative difference that another platform or library version leaves room for.

Every headline result is converged to 1e-8 or better by its own method; rounding and the order of
sums in another linear algebra library move it by far less than this, a changed method by more.
Curves are archived with nine digits; theirs is held against the largest value of each array. What
is exactly zero, such as a share or a time, must be so again."""

_WORST: tuple[Kind, ...] = ("differs", "within tolerance", "identical")
_MOST_NAMED = 12


@dataclass(frozen=True)
class Compared:
    """One result, criterion or curve, then and now.

    Parameters
    ----------
    id, title
        As archived.
    then, now
        Value in SI, verdict, or None where there is none.
    difference
        Largest relative difference of the numbers in it; None where it has no meaning.
    kind
        Whether they are identical to the last digit, within tolerance, or differ.
    """

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
        Every result, criterion and curve of either calculation.
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
        kinds = {one.kind for one in self.results}
        if not all(same for _, same in self.files):
            kinds.add("within tolerance")
        return next((kind for kind in _WORST if kind in kinds), "identical")

    @property
    def headline(self) -> str:
        """The outcome in one line."""
        count = len(self.results)
        if self.kind == "identical":
            return "identical: the repetition gives every file of the payload byte for byte"
        if self.kind == "differs":
            wrong = sum(one.kind == "differs" for one in self.results)
            return (
                f"differs: {wrong} of {count} results, verdicts and curves are not those archived"
            )
        if all(one.kind == "identical" for one in self.results):
            changed = sum(not same for _, same in self.files)
            return (
                f"within tolerance: all {count} results, verdicts and curves are the same to the "
                f"last digit; other bytes changed in {changed} of {len(self.files)} files"
            )
        return (
            f"within tolerance: every result and curve within {TOLERANCE:g} relative, every "
            "verdict the same"
        )

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
    """Compare two payloads: files by name, without the leading ``data/``.

    Raises
    ------
    VerificationError
        If one of them does not hold what a run writes.
    """
    try:
        old, new = (read_results({PAYLOAD + name: c for name, c in side.items()})
                    for side in (then, now))  # fmt: skip
        names = sorted({*then, *now})
        return Agreement(
            (*_results(old, new), *_verdicts(old, new), *_curves(old, new)),
            tuple((name, then.get(name) == now.get(name)) for name in names),
            tuple(_reasons(then, now, old, new)),
        )
    except PackageError as error:
        raise VerificationError(str(error)) from error
    except (KeyError, TypeError, ValueError, AttributeError, RecursionError) as error:
        what = f"{type(error).__name__}: {error}"
        raise VerificationError(f"the package does not hold what a run writes ({what})") from error


def _results(old: Any, new: Any) -> Iterator[Compared]:
    for name, title, then, now in _pairs(old["results"], new["results"]):
        values = [_optional(side, "value") for side in (then, now)]
        gap, kind = _gap([values[0]], [values[1]])
        if then is None or now is None or _second(then) is not _second(now):
            kind = "differs"
        yield Compared(name, title, values[0], values[1], gap, kind)


def _second(one: Any) -> bool | None:
    """Say whether the second computation agreed; None where there is none."""
    second = one.get("second")
    return None if second is None else second["agrees"] is True


def _verdicts(old: Any, new: Any) -> Iterator[Compared]:
    for name, title, then, now in _pairs(old["criteria"], new["criteria"]):
        words = [None if side is None else str(side["verdict"]) for side in (then, now)]
        gap, kind = _worst(
            _gap([_optional(then, key)], [_optional(now, key)]) for key in ("value", "limit")
        )
        if words[0] != words[1]:
            kind = "differs"
        yield Compared(name, title, words[0], words[1], gap, kind)


def _curves(old: Any, new: Any) -> Iterator[Compared]:
    """Compare curves that are read out at as many points; of others :func:`_reasons` tells."""
    then, now = old.get("series", {}), new.get("series", {})
    for name in sorted({*then, *now}):
        one, other = (dict(_leaves(side.get(name))) for side in (then, now))
        if not _same_points(one, other):
            continue
        gap, kind = _worst(_gap(one[key], other[key]) for key in one)
        yield Compared(f"curve {name}", f"Data of {name}", None, None, gap, kind)


def _same_points(one: Mapping[str, list[Any]], other: Mapping[str, list[Any]]) -> bool:
    lengths = [{key: len(values) for key, values in side.items()} for side in (one, other)]
    return bool(one) and lengths[0] == lengths[1]


def _leaves(value: Any, path: str = "") -> Iterator[tuple[str, list[Any]]]:
    """Give the arrays in a curve's data by their place; single values as arrays of one."""
    if isinstance(value, dict):
        for key in sorted(value):
            yield from _leaves(value[key], f"{path}.{key}")
    elif isinstance(value, list) and any(isinstance(one, dict | list) for one in value):
        for number, one in enumerate(value):
            yield from _leaves(one, f"{path}[{number}]")
    elif value is not None:
        yield path, value if isinstance(value, list) else [value]


def _gap(then: list[Any], now: list[Any]) -> tuple[float | None, Kind]:
    """Hold two arrays of one length together: largest difference over the largest value."""
    if then == now:
        return (0.0 if any(_number(one) for one in then) else None), "identical"
    largest = scale = 0.0
    for one, other in zip(then, now, strict=True):
        if _number(one) and _number(other):
            largest, scale = max(largest, abs(other - one)), max(scale, abs(one), abs(other))
        elif one != other:
            return None, "differs"
    gap = largest / scale if scale else math.inf
    return gap, "within tolerance" if gap <= TOLERANCE else "differs"


def _worst(found: Iterable[tuple[float | None, Kind]]) -> tuple[float | None, Kind]:
    """Give the largest gap and the worst kind of several."""
    gaps, kinds = zip(*found, strict=True)
    known = [gap for gap in gaps if gap is not None]
    return max(known, default=None), next(kind for kind in _WORST if kind in kinds)


def _number(value: Any) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool) and math.isfinite(value)


def _optional(side: Any, key: str) -> Any:
    return None if side is None else side.get(key)


def _pairs(old: Iterable[Any], new: Iterable[Any]) -> Iterator[tuple[str, str, Any, Any]]:
    """Give id, title and both sides of what either has; None for a side that has it not."""
    then, now = ({str(one["id"]): one for one in side} for side in (old, new))
    for name in {**then, **now}:
        title = str({**now, **then}[name]["title"])
        yield name, title, then.get(name), now.get(name)


def _reasons(
    then: Mapping[str, bytes], now: Mapping[str, bytes], old: Any, new: Any
) -> Iterator[str]:
    """Say what is not the same about template, program, platform, packages and curves."""
    if then.get("template.ipynb") != now.get("template.ipynb"):
        yield "the template is not the archived one"
    one, other = (json.loads(side.get("environment.json", b"{}")) for side in (then, now))
    if one.get("code_sha512") != other.get("code_sha512"):
        yield "the program's code is not that of the archived calculation"
    for key, words in (("python", "Python"), ("platform", "platform"), ("blas", "linear algebra"),
                       ("simd", "instruction set")):  # fmt: skip
        if one.get(key) != other.get(key):
            yield f"{words}: {_short(one.get(key))} then, {_short(other.get(key))} now"
    versions, digests = (
        [{p["name"]: p.get(key) for p in side.get("packages", [])} for side in (one, other)]
        for key in ("version", "record_sha256")
    )
    changed = [
        f"{name} {versions[0].get(name, 'absent')} → {versions[1].get(name, 'absent')}"
        for name in sorted({*versions[0], *versions[1]})
        if versions[0].get(name) != versions[1].get(name)
    ]
    if changed:
        yield "packages: " + _listed(changed)
    rebuilt = [
        name
        for name in sorted({*versions[0]} & {*versions[1]})
        if versions[0][name] == versions[1][name] and digests[0][name] != digests[1][name]
    ]
    if rebuilt:
        yield "packages of the same version with other files: " + _listed(rebuilt)
    curves = [side.get("series", {}) for side in (old, new)]
    names = sorted({*curves[0], *curves[1]})
    other_points = [
        name for name in names
        if not _same_points(*(dict(_leaves(side.get(name))) for side in curves))
    ]  # fmt: skip
    if other_points:
        yield "curves read out at other points, so that they were not compared: " + _listed(
            other_points
        )


def _listed(names: list[str]) -> str:
    more = f" and {len(names) - _MOST_NAMED} more" if len(names) > _MOST_NAMED else ""
    return ", ".join(names[:_MOST_NAMED]) + more


def _short(value: Any) -> str:
    if isinstance(value, dict):
        return " ".join(str(part) for part in value.values())[:80]
    if isinstance(value, list):
        return " ".join(map(str, value))[:80]
    return str(value)
