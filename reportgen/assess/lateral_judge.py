"""The limits that a lateral case states, applied to its results."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from reportgen.assess.model import Finding, Judged
from reportgen.assess.stated_limits import project_outcome, stated
from reportgen.criteria import (
    SOURCES,
    Outcome,
    balance_grade,
    bearing_load,
    bearing_load_share,
    shaft_stress,
)

if TYPE_CHECKING:
    from collections.abc import Mapping

    from reportgen.assess.lateral_model import SupportFindings
    from reportgen.assess.lateral_whirl import Whirl

_WHERE = {
    "separation margin": "criticals",
    "amplitude at speed": "probes",
    "clearance": "clearances",
    "logarithmic decrement": "stability",
}


class Judging:
    """The results of one case, ready to be held against limits."""

    def __init__(
        self,
        whirl: Whirl,
        supports: tuple[SupportFindings, ...],
        stress: tuple[float, float | None],
        findings: Mapping[str, Finding],
        mass: float,
    ) -> None:
        self.whirl, self.supports, self.stress = whirl, supports, stress
        self.findings, self.mass = findings, mass

    def all(self) -> tuple[Judged, ...]:
        """Return every limit of the case's list, judged, in the order of the list."""
        judged: list[Judged] = []
        for criterion in self.whirl.case.criteria:
            of = _WHERE.get(criterion.kind, "")
            for outcome in self._apply(criterion):
                number = len(judged) + 1
                judged.append(Judged(f"C{number}", outcome, f"criterion-{number}", of))
        return tuple(judged)

    def _apply(self, criterion: Any) -> list[Outcome]:
        match criterion.kind:
            case "bearing load":
                return [self._bearing(criterion, one) for one in self.supports if one.static]
            case "shaft stress":
                return [self._stress(criterion)]
            case "balance grade":
                return [self._balance(criterion)]
            case "project limit":
                return [project_outcome(criterion, self.findings, harmonic=True)]
            case _:
                return self.whirl.apply(criterion)

    def _bearing(self, criterion: Any, one: SupportFindings) -> Outcome:
        if criterion.share is not None:
            return bearing_load_share(
                one.largest,
                one.static,
                allowed=float(criterion.share),
                source=stated(criterion),
                title=f"Rotating force against static load, {one.name}",
            )
        return bearing_load(
            one.static,
            one.largest,
            float(criterion.limit),
            source=stated(criterion),
            title=f"Load of {one.name}, static and rotating together",
        )

    def _stress(self, criterion: Any) -> Outcome:
        whirl, sag = self.stress
        return shaft_stress(
            whirl,
            sag,
            float(criterion.limit),
            concentration=float(criterion.concentration or 1.0),
            source=stated(criterion),
        )

    def _balance(self, criterion: Any) -> Outcome:
        amounts = [
            sum(float(plane.amount or 0.0) for plane in one.planes)
            for one in self.whirl.case.unbalance_cases
            if one.rule is None
        ]
        return balance_grade(
            max(amounts, default=None),
            float(criterion.grade),
            self.mass,
            self.whirl.high,
            source=stated(criterion, SOURCES["balance-grade"]),
        )
