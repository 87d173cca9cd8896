"""A comparison in words, as its report and the console tell it."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Any

from reportgen import units
from reportgen.case.base import walk
from reportgen.case.changes import Change, is_given, is_table
from reportgen.sheet.blocks import Inline

if TYPE_CHECKING:
    from reportgen.assess.comparison import Comparison, Driver, Quantity

_MOST_TOLD = 4
_CRITERION = re.compile(r"criteria\[(\d+)\]")


def titles_of(calc: Comparison) -> dict[str, str]:
    """Return the titles of the givens of both cases by path, limits with their criterion."""
    found: dict[str, str] = {}
    for case in (calc.old_case, calc.new_case):
        for path, title, _ in walk(case):
            number = _CRITERION.match(path)
            found[path] = f"{title} of criterion {number[1]}" if number else title
    return found


def title_of(change: Change, titles: dict[str, str]) -> str:
    """Return what a change is about: a given's title, else its path."""
    return titles.get(change.path, change.path)


def shown(value: Any) -> str:
    """Return one side of a change in words."""
    if value is None or value == [] or value == ():
        return "–"
    if is_given(value):
        return str(value["as_given"])
    if is_table(value):
        return f"table {value['file']}"
    if isinstance(value, (dict, list, tuple)):
        return f"{len(value)} entries" if not isinstance(value, dict) else "stated"
    return str(value)


def stepped(old: float, new: float, quantity: str, system: units.System) -> str:
    """Return a change as a share of the old value, or as it is where that is zero."""
    if old:
        return signed((new - old) / abs(old), "percent", system)
    return signed(new - old, quantity, system)


def signed(value: float, quantity: str, system: units.System) -> str:
    """Return a value with its sign."""
    words = units.show(value, quantity, system, 3)
    return f"+{words}" if value > 0 else words


def change_of(q: Quantity, system: units.System) -> str:
    """Return how much a quantity moved, as a share where it can be one."""
    if q.relative is not None:
        return signed(q.relative, "percent", system)
    if q.change is None:
        return "new" if q.old is None else "gone"
    return signed(q.change, q.quantity, system)


def ranking(calc: Comparison, q: Quantity) -> list[tuple[float, Driver]]:
    """Return the inputs that move a quantity with their shares, largest first."""
    known = [(share, d) for d in calc.drivers if (share := d.share(q)) is not None]
    known.sort(key=lambda pair: -abs(pair[0]))
    return [(share, d) for share, d in known if abs(share) > 5e-4]


def driver_title(driver: Driver, titles: dict[str, str]) -> str:
    """Return an input in words; several taken together name the section that holds them."""
    if len(driver.changes) == 1:
        return title_of(driver.changes[0], titles)
    return f"{driver.path} ({len(driver.changes)} changes together)"


def conclusion(calc: Comparison) -> list[Inline]:
    """Return in a few sentences what changed, what moved, what flipped and what drives it."""
    inputs = sum(change.counts for change in calc.changes)
    parts: list[Inline] = [
        f"From {_names(calc)} {_count(inputs, 'input')} and {_count(len(calc.moved), 'result')} "
        "changed. "
    ]
    titles = titles_of(calc)
    stated = [one for one in calc.flipped if all(one.verdicts)]
    for one in stated[:_MOST_TOLD]:
        before, after = one.verdicts
        parts += [
            {"ref": "verdicts", "text": one.title},
            f" went from “{before}” to “{after}”",
        ]
        margin = next((q for q in calc.quantities if q.id == f"margin: {one.title}"), None)
        driver = calc.driver_of(margin) if margin is not None else None
        if driver is not None:
            title = driver_title(driver, titles)
            parts.append(f", driven most by {title[:1].lower()}{title[1:]}")
        parts.append(". ")
    if len(stated) > _MOST_TOLD:
        parts.append(f"{len(stated) - _MOST_TOLD} more verdicts changed. ")
    if not stated:
        parts.append("No verdict changed. " if calc.judgements else "No criterion is stated. ")
    for which, words in ((0, "new"), (1, "no longer stated")):
        count = sum(1 for one in calc.flipped if not one.verdicts[which])
        if count:
            verb = "is" if count == 1 else "are"
            parts.append(f"{count} criteri{'on' if count == 1 else 'a'} {verb} {words}. ")
    return parts


def _names(calc: Comparison) -> str:
    old, new = (case.document for case in (calc.old_case, calc.new_case))
    if old.number == new.number:
        return f"revision {old.revision} to revision {new.revision}"
    return f"{old.number} revision {old.revision} to {new.number} revision {new.revision}"


def _count(number: int, what: str) -> str:
    return f"{number or 'no'} {what}{'' if number == 1 else 's'}"
