"""The limits that a case of passages states, applied to its results."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from reportgen.assess.model import Finding, Judged
from reportgen.assess.stated_limits import margin_rule, project_outcome, stated
from reportgen.criteria import (
    Critical,
    Outcome,
    amplitude_at_speed,
    balance_grade,
    clearance_share,
    project_limit,
    separation_margins,
)
from reportgen.criteria.sources import SOURCES
from reportgen.errors import ModelError

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from reportgen.assess.transient_model import Contact, SuddenRun, TransientRun
    from reportgen.case.passage import PassageCase

Applied = tuple[Outcome, str]
"""What came of a limit, and the id of the finding that it judges."""


@dataclass(frozen=True)
class Steady:
    """What of the steady whirl a case of passages may judge. SI.

    ``criticals`` are pairs of speed and amplification factor, or :class:`Critical`; ``rated`` and
    ``operating`` the largest steady amplitude at rated speed and in the operating range; the
    amplitudes are None, with ``why_not``, where there is none.
    """

    criticals: Sequence[Critical | tuple[float, float | None]]
    searched: tuple[float, float]
    operating_range: tuple[float, float]
    trip: float | None
    rated: float | None
    operating: float | None
    unbalance: float
    mass: float
    grade_speed: float
    where: str = "critical-speed"


class Judging:
    """The results of one case, ready to be held against limits."""

    def __init__(
        self,
        case: PassageCase,
        steady: Steady,
        runs: tuple[TransientRun, ...],
        sudden: SuddenRun | None,
        findings: Mapping[str, Finding],
    ) -> None:
        self.case, self.steady, self.runs = case, steady, runs
        self.sudden, self.findings = sudden, findings

    def all(self) -> tuple[Judged, ...]:
        """Return every limit of the case's list, judged, in the order of the list."""
        judged: list[Judged] = []
        for criterion in self.case.criteria:
            for outcome, of in self._apply(criterion):
                number = len(judged) + 1
                judged.append(Judged(f"C{number}", outcome, f"criterion-{number}", of))
        return tuple(judged)

    def _apply(self, criterion: Any) -> list[Applied]:
        match criterion.kind:
            case "separation margin":
                return [(o, self.steady.where) for o in self._separation(criterion)]
            case "amplitude at speed":
                return [(self._amplitude(criterion), "")]
            case "passage clearance":
                return self._clearances(criterion)
            case "time above limit":
                return self._times(criterion)
            case "drive margin":
                return self._drives(criterion)
            case "balance grade":
                return [(self._balance(criterion), "")]
            case "project limit":
                return [(project_outcome(criterion, self.findings), criterion.result)]
            case kind:
                raise ModelError(f"a passage has no result for a criterion {kind!r}")

    def _separation(self, criterion: Any) -> list[Outcome]:
        return separation_margins(
            self.steady.criticals,
            *self.steady.operating_range,
            margin_rule(criterion),
            trip=self.steady.trip,
            searched=self.steady.searched,
        )

    def _amplitude(self, criterion: Any) -> Outcome:
        rated = criterion.at == "rated"
        return amplitude_at_speed(
            self.steady.rated if rated else self.steady.operating,
            float(criterion.limit),
            measure="0-peak",
            limit_measure=criterion.measure,
            harmonic=True,
            source=stated(criterion),
            title="Steady amplitude at rated speed"
            if rated
            else "Largest steady amplitude in the operating range",
        )

    def _clearances(self, criterion: Any) -> list[Applied]:
        source = stated(criterion, SOURCES["petroleum-clearance"])
        share = float(criterion.share)

        def judge(contact: Contact, during: str) -> Outcome:
            return clearance_share(
                contact.peak,
                contact.clearance,
                sag=contact.sag,
                runout=contact.runout,
                bow=contact.bow,
                allowed=share,
                source=source,
                title=f"Clearance at {contact.name}, closest during {during}",
            )

        found: dict[str, list[Applied]] = {}
        for run in self.runs:
            for contact in run.contacts:
                outcome = judge(contact, run.name)
                if not run.crossed:
                    outcome = no_passage(outcome, run)
                found.setdefault(contact.id, []).append((outcome, f"{run.id}-contact"))
        for contact in () if self.sudden is None else self.sudden.contacts:
            outcome = judge(contact, self.sudden.name if self.sudden else "")
            found.setdefault(contact.id, []).append((outcome, "sudden-peak"))
        if found:
            return [worst(at_one) for at_one in found.values()]
        none = clearance_share(
            None, None, allowed=share, source=source, title="Clearance during the passages"
        )
        return [(none, "")]

    def _times(self, criterion: Any) -> list[Applied]:
        limit = float(criterion.limit)
        found = [(self._time(criterion, run, limit), f"{run.id}-time-above") for run in self.runs]
        return [worst(found)]

    def _time(self, criterion: Any, run: TransientRun, limit: float) -> Outcome:
        places = [p for p in run.watched if p.above is not None]
        longest = max(places, key=lambda p: p.above or 0.0, default=None)
        at = f" at {longest.name}" if longest is not None and longest.name else ""
        outcome = project_limit(
            None if longest is None else longest.above,
            limit,
            sense="at most",
            quantity="time",
            absent="the case states no limit of amplitude (limit:)",
            source=stated(criterion),
            title=f"Time above the limit of amplitude{at}, longest during {run.name}",
        )
        hangs = run.hang_state.amplitude if run.hang_state is not None else 0.0
        if run.stalled and self.case.limit is not None and hangs > float(self.case.limit.amplitude):
            reason = (
                "the rotor hangs with more than the limit of amplitude: the time is that of the "
                "calculated run and grows for as long as the drive is on"
            )
            return replace(outcome, verdict="does not meet", margin=None, reason=reason)
        return outcome

    def _drives(self, criterion: Any) -> list[Applied]:
        found: list[Applied] = []
        for run in self.runs:
            if run.drive is None or run.drive.drive is None:
                continue
            margin = None if run.drive.margin is None else run.drive.margin.margin
            quasi = run.drive.quasi_static
            if margin is None and quasi is not None and quasi < 1.0:
                margin = 1.0 / quasi - 1.0
            outcome = project_limit(
                margin,
                float(criterion.margin),
                sense="at least",
                quantity="percent",
                absent=run.reason
                or "load and steady whirl exceed the drive: whether it passes is not known",
                source=stated(criterion),
                title=f"Drive torque above the least that passes, {run.name}",
            )
            if run.stalled and outcome.verdict == "does not meet":
                outcome = replace(outcome, reason="with the drive as stated the rotor stalls")
            if run.drive.margin is None and outcome.verdict == "meets":
                outcome = replace(
                    outcome, reason="against load and steady whirl: passing takes no more torque"
                )
            found.append((outcome, f"{run.id}-drive-margin"))
        if found:
            return found
        none = project_limit(
            None,
            float(criterion.margin),
            sense="at least",
            quantity="percent",
            absent="no passage of the case is run by a drive torque",
            source=stated(criterion),
            title="Drive torque above the least that passes",
        )
        return [(none, "")]

    def _balance(self, criterion: Any) -> Outcome:
        return balance_grade(
            self.steady.unbalance,
            float(criterion.grade),
            self.steady.mass,
            self.steady.grade_speed,
            source=stated(criterion, SOURCES["balance-grade"]),
        )


_RANKS = ("does not meet", "not assessed", "meets")


def worst(found: Sequence[Applied]) -> Applied:
    """Return the outcome that decides over several runs: what fails first, then what is open."""

    def rank(one: Applied) -> tuple[int, float]:
        outcome = one[0]
        left = outcome.margin
        if left is None and outcome.value is not None and outcome.limit:
            left = 1.0 - outcome.value / outcome.limit
        return _RANKS.index(outcome.verdict), 0.0 if left is None else left

    return min(found, key=rank)


def no_passage(outcome: Outcome, run: TransientRun) -> Outcome:
    """Return a clearance judged on a run that is no passage.

    What the run itself exceeds is not met; but what it stays within says nothing of a passage.
    """
    if outcome.verdict == "does not meet":
        why = f"{outcome.reason}; " if outcome.reason else ""
        return replace(outcome, reason=f"{why}the run is no passage: {run.reason}")
    return replace(outcome, verdict="not assessed", margin=None, share_used=None, reason=run.reason)
