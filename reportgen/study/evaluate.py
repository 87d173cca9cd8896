"""Margins and verdicts of many rotors: one piece of work, done anywhere, put together in order.

A piece is a plain function of plain data, so that any map function may spread the pieces: the
built-in ``map``, that of a pool of processes, or a Dask client's. How the points are cut into
pieces depends on their number alone, so that the numbers do not depend on who computes them.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from functools import partial
from typing import Any

import numpy as np

from reportgen.assess.by_template import assess_case, judge_case
from reportgen.assess.model import Judged
from reportgen.case import Case, from_resolved
from reportgen.case.changes import Place
from reportgen.case.lateral import LateralCase
from reportgen.criteria import Outcome
from reportgen.errors import InputError, ModelError
from reportgen.study import stations
from reportgen.study.inputs import case_with
from reportgen.study.one_mass import FAILS, MEETS, OPEN, Many, Verdicts, uncovered
from reportgen.study.sampling import Floats

Mapper = Callable[[Callable[[Floats], "Outcomes"], Iterable[Floats]], Iterable["Outcomes"]]
"""What spreads the pieces: like the built-in ``map``, its results in the order given."""

AT_ONCE, ONE_BY_ONE = 4096, 8
"""Points in a piece: where a whole array is judged at once, and where each is a run."""
_CODES = {"meets": MEETS, "does not meet": FAILS, "not assessed": OPEN}


@dataclass(frozen=True)
class Outcomes:
    """How samples stand to each criterion.

    Parameters
    ----------
    margin
        Share of the limit that is left, shape (criteria, samples); NaN where there is none.
    verdict
        1 meets, 0 does not meet, -1 not assessed; of the same shape.
    """

    margin: Floats
    verdict: Verdicts


@dataclass(frozen=True)
class Model:
    """A case with places whose values vary.

    Parameters
    ----------
    resolved
        The case.
    places
        What varies, one for each column of the values.
    titles
        Of the criteria, as the case itself is judged.
    """

    resolved: Mapping[str, Any]
    places: tuple[Place, ...]
    titles: tuple[str, ...]

    @classmethod
    def of(cls, resolved: Mapping[str, Any], places: Sequence[Place]) -> Model:
        """Judge the case as it stands, and take its criteria from that."""
        titles = tuple(one.outcome.title for one in judged_of(from_resolved(resolved)))
        return cls(resolved, tuple(places), titles)

    @property
    def at_once(self) -> bool:
        """Whether all samples of a piece are judged at once, by closed forms."""
        return self.resolved["template"] == "one-mass-whirl" and not uncovered(self.resolved)

    def outcomes(self, values: Floats, mapper: Mapper | None = None) -> Outcomes:
        """Return how samples stand to each criterion.

        Parameters
        ----------
        values
            In SI, shape (samples, places).
        mapper
            What spreads the work; the built-in ``map`` if none is given.
        """
        size = AT_ONCE if self.at_once else ONE_BY_ONE
        pieces = [values[at : at + size] for at in range(0, len(values), size)]
        done = list((mapper or map)(partial(judged_piece, self), pieces))
        return Outcomes(
            np.concatenate([piece.margin for piece in done], axis=1),
            np.concatenate([piece.verdict for piece in done], axis=1),
        )


def judged_of(case: Case) -> tuple[Judged, ...]:
    """Judge one case as a study does: leanly where it is by stations, else as its report does.

    Raises
    ------
    ModelError
        If the methods do not cover the case's values.
    """
    if isinstance(case, LateralCase):
        return stations.judge(case)
    return judge_case(case)


def checked_of(case: Case) -> tuple[tuple[Judged, ...], str, float, str]:
    """Judge one case a second time: outcomes, how, tolerance as a share of a limit, and why."""
    if isinstance(case, LateralCase):
        finer = stations.judge(case, 4 * stations.SPEEDS)
        return finer, "response at four times as many speeds", 1e-3, "peaks between speeds"
    return assess_case(case).judged, "whole assessment of that rotor", 1e-5, "passages to 10⁻⁶"


def judged_piece(model: Model, values: Floats) -> Outcomes:
    """Judge one piece of the samples, shape (samples, places)."""
    if model.at_once:
        columns = {place: values[:, i] for i, place in enumerate(model.places)}
        found = Many(model.resolved, columns).judge()
        return Outcomes(np.stack([m for m, _ in found]), np.stack([v for _, v in found]))
    rows = [_judged_one(model, row) for row in values]
    return Outcomes(
        np.stack([margin for margin, _ in rows], axis=1),
        np.stack([verdict for _, verdict in rows], axis=1),
    )


def _judged_one(model: Model, row: Floats) -> tuple[Floats, Verdicts]:
    """Judge one sample; what cannot be computed is left open, it neither meets nor fails."""
    margin = np.full(len(model.titles), np.nan)
    verdict = np.full(len(model.titles), OPEN, np.int8)
    try:
        case = from_resolved(case_with(model.resolved, model.places, list(row)))
        judged = judged_of(case)
    except (InputError, ModelError):
        return margin, verdict
    for i, outcome in enumerate(aligned(judged, model.titles)):
        if outcome is None:
            continue
        verdict[i] = _CODES[outcome.verdict]
        if outcome.margin is not None:
            margin[i] = outcome.margin
    return margin, verdict


def aligned(judged: Iterable[Judged], titles: Iterable[str]) -> list[Outcome | None]:
    """Return the outcome of each title, None where there is none; equal titles in their order."""
    left = [one.outcome for one in judged]
    out: list[Outcome | None] = []
    for title in titles:
        found = next((outcome for outcome in left if outcome.title == title), None)
        if found is not None:
            left = [outcome for outcome in left if outcome is not found]
        out.append(found)
    return out


SCHEDULER, WORKERS = "REPORTGEN_SCHEDULER", "REPORTGEN_WORKERS"


@contextmanager
def mapper_from_environment() -> Iterator[Mapper | None]:
    """Give what spreads a study that a notebook runs: a cluster, processes, or nothing.

    ``REPORTGEN_SCHEDULER`` names a Dask scheduler, ``REPORTGEN_WORKERS`` a number of processes
    of this computer. They change how long a study takes, and none of its numbers.

    Raises
    ------
    InputError
        If dask.distributed is not installed or the scheduler does not answer.
    """
    address, workers = os.environ.get(SCHEDULER, ""), os.environ.get(WORKERS, "")
    if address:
        with _client(address) as client:
            yield dask_mapper(client)
    elif workers.isdecimal() and int(workers) > 1:
        from concurrent.futures import ProcessPoolExecutor
        from multiprocessing import get_context

        with ProcessPoolExecutor(int(workers), mp_context=get_context("spawn")) as pool:
            yield pool.map
    else:
        yield None


def _client(address: str) -> Any:
    from reportgen.errors import Problem

    try:
        import distributed
    except ImportError:
        found = "dask.distributed is not installed"
        raise InputError(Problem(found, "pip install 'reportgen[cluster]'")) from None
    try:
        client: Any = distributed.Client
        return client(address, timeout=10, set_as_default=False)
    except (OSError, TimeoutError, ValueError) as error:
        found = f"no scheduler answers at {address}"
        raise InputError(Problem(found, f"start one, or unset {SCHEDULER}")) from error


def dask_mapper(client: Any) -> Mapper:
    """Return a map function that spreads the pieces over the workers of a Dask client."""

    def spread(function: Callable[[Floats], Outcomes], pieces: Iterable[Floats]) -> Any:
        futures = client.map(function, list(pieces), pure=False)
        return client.gather(futures)

    return spread
