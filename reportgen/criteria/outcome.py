"""A limit applied to a number, and what came of it."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from reportgen.criteria.check import finite
from reportgen.criteria.sources import Basis, Source

Sense = Literal["at most", "at least"]
Verdict = Literal["meets", "does not meet", "not assessed"]
Measure = Literal["0-peak", "peak-to-peak", "r.m.s.", "none"]

# A speed of 1000 r/min turned to rad/s and back is off by the last bits; a value that
# differs from its limit by less than this share of it is equal to it.
ROUNDING = 1e-9


@dataclass(frozen=True)
class Outcome:
    """How a calculation stands to one limit.

    Parameters
    ----------
    title
        What is judged, in words.
    value, limit
        In SI; None where there is none.
    sense
        ``at most`` or ``at least``: on which side of the limit the value must lie.
    margin
        Share of the limit that is left, negative where the limit is not met; None where
        it has no meaning (nothing assessed, or a limit of zero).
    share_used
        Share of the limit that is used, 1 at the limit; None as for ``margin``.
    verdict
        ``meets``, ``does not meet`` or ``not assessed``.
    reason
        Why, where the numbers alone do not say it; never empty for ``not assessed``.
    how, how_latex
        How the limit was computed, in words and as a formula (LaTeX without delimiters,
        empty where there is none).
    source, clause, edition
        Where the limit is taken from.
    basis
        ``read``, ``from memory``, ``common practice`` or ``project``.
    quantity
        Key of the reader's-unit table.
    measure
        Which amplitude ``value`` and ``limit`` are; ``none`` where they are not amplitudes.
    """

    title: str
    value: float | None
    limit: float | None
    sense: Sense
    margin: float | None
    share_used: float | None
    verdict: Verdict
    reason: str
    how: str
    how_latex: str
    source: str
    clause: str
    edition: str
    basis: Basis
    quantity: str
    measure: Measure = "none"

    @property
    def caution(self) -> str:
        """What the reader must do about the source; empty where nothing is asked."""
        if self.basis == "from memory":
            return (
                f"The rule is from memory; check it against {self.source} in the edition you hold."
            )
        return ""


@dataclass(frozen=True)
class Limit:
    """A limit before anything is judged by it: how it was made and where it is from."""

    title: str
    sense: Sense
    quantity: str
    source: Source
    how: str = ""
    how_latex: str = ""
    measure: Measure = "none"

    def judge(
        self, value: float, limit: float, *, reason: str = "", strictly: bool = False
    ) -> Outcome:
        """Compare ``value`` with ``limit``.

        Parameters
        ----------
        value, limit
            In SI, of one quantity and one amplitude measure.
        reason
            What the reader must know beside the numbers.
        strictly
            Whether a value equal to the limit fails it (contact, a critical speed on the
            end of the operating range).

        Raises
        ------
        ModelError
            If either is not finite.
        """
        value, limit = finite(f"value of {self.title}", value), finite("limit", limit)
        room = limit - value if self.sense == "at most" else value - limit
        if abs(room) <= ROUNDING * abs(limit):
            room = 0.0
        met = room > 0.0 or (room == 0.0 and not strictly)
        return self._outcome(
            value,
            limit,
            margin=_share(room, abs(limit)),
            used=self._used(value, limit),
            verdict="meets" if met else "does not meet",
            reason=reason,
        )

    def not_assessed(
        self, reason: str, *, value: float | None = None, limit: float | None = None
    ) -> Outcome:
        """Say why nothing is judged; what is known of value and limit is kept."""
        if value is not None:
            value = finite(f"value of {self.title}", value)
        if limit is not None:
            limit = finite("limit", limit)
        return self._outcome(
            value, limit, margin=None, used=None, verdict="not assessed", reason=reason
        )

    def met_for_want_of(self, reason: str) -> Outcome:
        """Say that the limit is met because what it limits does not exist, and why."""
        return self._outcome(None, None, margin=None, used=None, verdict="meets", reason=reason)

    def _used(self, value: float, limit: float) -> float | None:
        over, under = (value, limit) if self.sense == "at most" else (limit, value)
        used = _share(over, under)
        return None if used is None or used < 0.0 else used

    def _outcome(
        self,
        value: float | None,
        limit: float | None,
        *,
        margin: float | None,
        used: float | None,
        verdict: Verdict,
        reason: str,
    ) -> Outcome:
        return Outcome(
            title=self.title,
            value=value,
            limit=limit,
            sense=self.sense,
            margin=margin,
            share_used=used,
            verdict=verdict,
            reason=reason,
            how=self.how,
            how_latex=self.how_latex,
            source=self.source.standard,
            clause=self.source.clause,
            edition=self.source.edition,
            basis=self.source.basis,
            quantity=self.quantity,
            measure=self.measure,
        )


def _share(part: float, whole: float) -> float | None:
    if whole == 0.0:
        return None
    quotient = part / whole
    return quotient if math.isfinite(quotient) else None
