"""Two revisions of a calculation: what changed, what moved, and which input moved it."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from reportgen.assess.by_template import assess_case, curves_of
from reportgen.assess.cautions import NOT_ASSESSED
from reportgen.assess.model import Assessment
from reportgen.case import from_resolved
from reportgen.case.changes import Change, Place, changes, path_of, value_at, with_value
from reportgen.errors import InputError, ModelError

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from reportgen.case import Case

ROUNDING = 1e-9
"""Results that differ by a smaller share of the larger are the same: processors round."""
ARCHIVED = 1e-6
"""Share within which a result computed again must be the archived one; the second
computations ask for no less."""


@dataclass(frozen=True)
class Quantity:
    """One number that is compared: a finding, or the value, limit or margin of a criterion.

    Parameters
    ----------
    id
        Of the finding, or ``margin: `` and the criterion's title.
    title, symbol, quantity, measure
        As of a finding.
    old, new
        In SI; None where it does not exist.
    """

    id: str
    title: str
    symbol: str
    quantity: str
    measure: str
    old: float | None
    new: float | None

    @property
    def change(self) -> float | None:
        """New less old; None where one of them is missing."""
        return None if self.old is None or self.new is None else self.new - self.old

    @property
    def relative(self) -> float | None:
        """Change as a share of the old value, None where that is zero or missing."""
        return self.change / abs(self.old) if self.change is not None and self.old else None

    @property
    def moved(self) -> bool:
        """Whether old and new differ by more than rounding, or one of them is missing."""
        if self.old is None or self.new is None:
            return self.old is not self.new
        return abs(self.new - self.old) > ROUNDING * max(abs(self.old), abs(self.new))


@dataclass(frozen=True)
class Judgement:
    """One criterion in both revisions; a verdict is empty where the revision lacks it."""

    title: str
    old: Any  # Outcome | None
    new: Any

    @property
    def verdicts(self) -> tuple[str, str]:
        """Old and new verdict."""
        return (self.old.verdict if self.old else "", self.new.verdict if self.new else "")

    @property
    def flipped(self) -> bool:
        """Whether the verdict is another, or the criterion came or went."""
        return self.verdicts[0] != self.verdicts[1]


@dataclass(frozen=True)
class Driver:
    """What one changed input does to each quantity, alone.

    Parameters
    ----------
    place
        Of the input in the case.
    changes
        The changes taken over with it: one, or several that only make sense together.
    alone
        Change of each quantity, by its id, with the old case and this input new; None where
        the quantity does not exist then.
    last
        The same with the new case, less the new case with this input old.
    """

    place: Place
    changes: tuple[Change, ...]
    alone: Mapping[str, float | None]
    last: Mapping[str, float | None]

    @property
    def path(self) -> str:
        """The place in print."""
        return path_of(self.place) or "the case as a whole"

    def share(self, quantity: Quantity) -> float | None:
        """Return the mean of both ways over the whole change; None where it is not known."""
        alone, last = self.alone.get(quantity.id), self.last.get(quantity.id)
        if alone is None or last is None or not quantity.change:
            return None
        return 0.5 * (alone + last) / quantity.change


@dataclass(frozen=True)
class ArchiveCheck:
    """A package's results against the same case computed now.

    Parameters
    ----------
    compared
        Number of results.
    differing
        Title of each that differs, with archived and computed value in SI.
    verdicts
        Titles of criteria whose verdict is another.
    """

    compared: int
    differing: tuple[tuple[str, float | None, float | None], ...]
    verdicts: tuple[str, ...]

    @property
    def agrees(self) -> bool:
        """Whether every archived result and verdict was found again."""
        return not self.differing and not self.verdicts


@dataclass(frozen=True, kw_only=True)
class Comparison(Assessment):
    """Two revisions side by side; findings and judged limits are those of the new one."""

    old_case: Case
    new_case: Case
    old: Assessment
    new: Assessment
    changes: tuple[Change, ...]
    quantities: tuple[Quantity, ...]
    judgements: tuple[Judgement, ...]
    drivers: tuple[Driver, ...]

    @property
    def moved(self) -> tuple[Quantity, ...]:
        """Findings that moved; margins of criteria stand with the verdicts."""
        return tuple(q for q in self.quantities if q.moved and not q.id.startswith("margin: "))

    @property
    def flipped(self) -> tuple[Judgement, ...]:
        """Criteria whose verdict changed."""
        return tuple(j for j in self.judgements if j.flipped)

    def driver_of(self, quantity: Quantity) -> Driver | None:
        """Return the input that moves a quantity most, None where nothing does or is known."""
        known = [(abs(s), d) for d in self.drivers if (s := d.share(quantity)) is not None]
        best = max(known, key=lambda pair: pair[0], default=None)
        return best[1] if best and best[0] > 0 else None

    def curves(self) -> list[tuple[str, NDArray[Any], NDArray[Any]]]:
        """Return the response curves of both, named by revision: name, speed, amplitude."""
        out = []
        for calc, case in ((self.old, self.old_case), (self.new, self.new_case)):
            revision = f"revision {case.document.revision}"
            for name, speed, size in curves_of(calc):
                out.append((f"{name}, {revision}" if name else revision, speed, size))
        return out


def compare(old_case: Case, new_case: Case) -> Comparison:
    """Compute both cases, and every mixture of them that tells inputs apart.

    Raises
    ------
    InputError, ModelError
        If the cases are of different templates, or the methods do not cover one of them.
    """
    if old_case.template != new_case.template:
        raise ModelError(
            f"a case of {old_case.template} cannot be compared with one of {new_case.template}"
        )
    old, new = assess_case(old_case), assess_case(new_case)
    return compare_assessments(old_case, new_case, old, new)


def compare_assessments(
    old_case: Case, new_case: Case, old: Assessment, new: Assessment, *, apart: bool = True
) -> Comparison:
    """Compare two assessments; ``apart`` says whether to compute what tells inputs apart."""
    found = changes(old_case.resolved(), new_case.resolved())
    before, after = _numbers(old), _numbers(new)
    quantities = tuple(
        replace(after.get(key) or before[key], old=_value(before, key), new=_value(after, key))
        for key in dict.fromkeys([*after, *before])
    )
    drivers = tuple(_drivers(old_case, new_case, found, before, after)) if apart else ()
    return Comparison(
        # where a finding is computed is told by the new revision's own report
        findings=tuple(replace(f, where="moved") for f in new.findings),
        judged=new.judged,
        cautions=new.cautions,
        not_assessed=new.not_assessed or NOT_ASSESSED,
        old_case=old_case,
        new_case=new_case,
        old=old,
        new=new,
        changes=tuple(found),
        quantities=quantities,
        judgements=tuple(_judgements(old, new)),
        drivers=drivers,
    )


def _numbers(calc: Assessment) -> dict[str, Quantity]:
    """Return findings and margins of criteria by id; ``new`` holds the value."""
    found = {
        f.id: Quantity(f.id, f.title, f.symbol, f.quantity, f.measure, None, f.value)
        for f in calc.findings
    }
    for title, outcome in _by_title(calc).items():
        key = f"margin: {title}"
        found[key] = Quantity(key, title, "", "percent", "none", None, outcome.margin)
    return found


def _value(numbers: Mapping[str, Quantity], key: str) -> float | None:
    return numbers[key].new if key in numbers else None


def _by_title(calc: Assessment) -> dict[str, Any]:
    """Return the outcomes by title; a second of one title is numbered."""
    seen: Counter[str] = Counter()
    out = {}
    for judged in calc.judged:
        title = judged.outcome.title
        seen[title] += 1
        out[title if seen[title] == 1 else f"{title} ({seen[title]})"] = judged.outcome
    return out


def _judgements(old: Assessment, new: Assessment) -> Iterator[Judgement]:
    before, after = _by_title(old), _by_title(new)
    for title in dict.fromkeys([*after, *before]):
        yield Judgement(title, before.get(title), after.get(title))


def _drivers(
    old_case: Case,
    new_case: Case,
    found: Iterable[Change],
    before: Mapping[str, Quantity],
    after: Mapping[str, Quantity],
) -> list[Driver]:
    """Return what each changed input does: one at a time into the old case, out of the new.

    A change that makes no case of its own (one of two alternatives, a speed above the next)
    is taken together with all others of the section that holds it.
    """
    old, new = old_case.resolved(), new_case.resolved()
    counting = [change for change in found if change.counts]
    left, drivers = list(counting), list[Driver]()
    while left:
        place = left[0].place
        while True:
            into = _computed(with_value(old, place, value_at(new, place)))
            out_of = _computed(with_value(new, place, value_at(old, place)))
            if (into is not None and out_of is not None) or not place:
                break
            place = place[:-1]
        taken = tuple(c for c in counting if c.place[: len(place)] == place)
        left = [c for c in left if c not in taken]
        drivers = [d for d in drivers if d.place[: len(place)] != place]
        alone, last = _difference(into or {}, before), _difference(after, out_of or {})
        drivers.append(Driver(place, taken, alone=alone, last=last))
    return drivers


def _computed(resolved: Mapping[str, Any]) -> dict[str, Quantity] | None:
    try:
        return _numbers(assess_case(from_resolved(resolved)))
    except (InputError, ModelError):
        return None


def _difference(
    one: Mapping[str, Quantity], other: Mapping[str, Quantity]
) -> dict[str, float | None]:
    out: dict[str, float | None] = {}
    for key in dict.fromkeys([*one, *other]):
        a, b = _value(one, key), _value(other, key)
        out[key] = None if a is None or b is None else a - b
    return out


def check_archived(
    results: Mapping[str, float | None], verdicts: Mapping[str, str], calc: Assessment
) -> ArchiveCheck:
    """Compare a package's results with the same case computed now."""
    differing: list[tuple[str, float | None, float | None]] = []
    for key, value in results.items():
        if key not in calc:
            differing.append((key, value, None))
            continue
        finding = calc[key]
        if not _same(value, finding.value):
            differing.append((finding.title, value, finding.value))
    now = {title: outcome.verdict for title, outcome in _by_title(calc).items()}
    other = tuple(title for title, verdict in verdicts.items() if now.get(title) != verdict)
    return ArchiveCheck(len(results), tuple(differing), other)


def _same(one: float | None, other: float | None) -> bool:
    if one is None or other is None:
        return one is other
    return math.isclose(one, other, rel_tol=ARCHIVED, abs_tol=0.0)
