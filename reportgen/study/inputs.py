"""What varies in a study: the givens of a case with a tolerance."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.case.changes import Place, is_given, path_of, with_value
from reportgen.study.sampling import Floats, spread

if TYPE_CHECKING:
    from reportgen.case import Case


@dataclass(frozen=True)
class Varied:
    """One given with a tolerance.

    Parameters
    ----------
    place
        In the resolved case.
    title
        In print.
    value, half_width
        In SI.
    distribution
        ``uniform`` or ``normal``.
    quantity
        Key of :data:`reportgen.units.QUANTITIES`.
    given
        As resolved.
    """

    place: Place
    title: str
    value: float
    half_width: float
    distribution: str
    quantity: str
    given: Mapping[str, Any]

    @property
    def path(self) -> str:
        """The place in print."""
        return path_of(self.place)


def varied_of(case: Case) -> tuple[Varied, ...]:
    """Return what varies in a case: every given with a tolerance and a distribution."""
    resolved = case.resolved()
    places = {path_of(place): (place, value) for place, value in _givens(resolved, ())}
    out = []
    for path, title, given, quantity in case.givens():
        if given.half_width > 0.0 and given.distribution != "none":
            place, value = places[path]
            out.append(
                Varied(place, title, given.si, given.half_width, given.distribution, quantity,
                       value)
            )  # fmt: skip
    return tuple(out)


def _givens(part: Any, at: Place) -> Iterator[tuple[Place, Mapping[str, Any]]]:
    if is_given(part):
        yield at, part
    elif isinstance(part, Mapping):
        for key, value in part.items():
            yield from _givens(value, (*at, key))
    elif isinstance(part, (list, tuple)):
        for index, value in enumerate(part):
            yield from _givens(value, (*at, index))


def values_of(varied: Sequence[Varied], unit: Floats) -> Floats:
    """Return values in SI, shape (n, d), from points of the unit cube of that shape."""
    columns = [
        spread(unit[:, i], v.value, v.half_width, v.distribution) for i, v in enumerate(varied)
    ]
    return np.stack(columns, axis=1)


def case_with(
    resolved: Mapping[str, Any], places: Sequence[Place], values: Sequence[float]
) -> dict[str, Any]:
    """Return a resolved case with these values, in SI, in place of those given."""
    out: dict[str, Any] = dict(resolved)
    for place, value in zip(places, values, strict=True):
        at: Any = out
        for part in place:
            at = at[part]
        # the value is exact: the tolerance that it was drawn from is used up
        exact = {**at, "si": float(value), "tolerance": None, "distribution": "none"}
        out = with_value(out, place, exact)
    return out
