"""A tolerance study as a whole: shares, margins, sensitivities, the worst rotor, checks."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, cast

import numpy as np

from reportgen.assess.cautions import CAUTIONS, NOT_ASSESSED, Caution
from reportgen.assess.model import Assessment, Finding, Judged, SecondComputation
from reportgen.case import from_resolved
from reportgen.criteria.shares import Interval, failing_share, share_interval
from reportgen.criteria.sources import project_source
from reportgen.study.evaluate import (
    Mapper,
    Model,
    Outcomes,
    aligned,
    checked_of,
    judged_of,
)
from reportgen.study.indices import Sensitivity, sensitivity
from reportgen.study.inputs import Varied, case_with, values_of, varied_of
from reportgen.study.one_mass import FAILS, OPEN
from reportgen.study.sampling import Floats, design

if TYPE_CHECKING:
    from reportgen.case import Case
    from reportgen.case.tolerances import StudyCase

_DISTRIBUTIONS = Caution(
    "Tolerances as distributions",
    "The shares hold for inputs that are independent and spread within their tolerances as "
    "stated. How parts are really spread is seldom known: the shares compare designs and rank "
    "tolerances; they are no count of machines that will be built.",
)


@dataclass(frozen=True)
class Share:
    """Samples that do not meet a criterion.

    Parameters
    ----------
    title
        Of the criterion.
    failing, assessed, open
        Numbers of samples; open ones could not be assessed.
    interval
        Confidence interval of the share; None where nothing was assessed.
    """

    title: str
    failing: int
    assessed: int
    open: int
    interval: Interval | None

    @property
    def value(self) -> float | None:
        """Share of the assessed samples."""
        return self.failing / self.assessed if self.assessed else None


@dataclass(frozen=True)
class Worst:
    """The sampled rotor with the least margin against one criterion.

    Parameters
    ----------
    sample
        Its number, from 1.
    values
        In SI, in the order of what varies.
    margin
        Its margin.
    """

    sample: int
    values: Floats
    margin: float


@dataclass(frozen=True, kw_only=True)
class Study(Assessment):
    """A tolerance study.

    ``outcomes`` holds samples A then B, shape (criteria, 2n); ``values`` their inputs in SI,
    shape (2n, d). ``nominal`` is the case as it stands.
    """

    model: Model
    nominal: tuple[Judged, ...]
    varied: tuple[Varied, ...]
    values: Floats
    outcomes: Outcomes
    shares: tuple[Share, ...]
    any_share: Share
    sensitivities: tuple[Sensitivity, ...]
    worst: tuple[Worst | None, ...]
    samples: int
    evaluations: int
    confidence: float

    @property
    def titles(self) -> tuple[str, ...]:
        """Titles of the criteria."""
        return self.model.titles

    def worst_of(self) -> int | None:
        """Return the criterion whose worst rotor has the least margin of all."""
        known = [(w.margin, i) for i, w in enumerate(self.worst) if w is not None]
        return min(known)[1] if known else None


def run_study(case: StudyCase, mapper: Mapper | None = None) -> Study:
    """Draw rotors from the tolerances of a case, judge each, and say what drives the margins.

    Parameters
    ----------
    case
        The study.
    mapper
        What spreads the work, as the built-in ``map`` does; it changes no number.

    Raises
    ------
    ModelError
        If the methods do not cover the case as it stands.
    """
    inner, plan = case.of.case, case.sampling
    varied = varied_of(inner)
    resolved = inner.resolved()
    model = Model.of(resolved, [v.place for v in varied])
    drawn = design(plan.method, plan.samples, len(varied), plan.seed)
    values = values_of(varied, drawn.all())
    outcomes = model.outcomes(values, mapper)
    both = Outcomes(outcomes.margin[:, : 2 * plan.samples], outcomes.verdict[:, : 2 * plan.samples])
    confidence = 0.01 * float(plan.confidence.removesuffix(" %"))
    shares = tuple(
        _share(title, both.verdict[i], confidence, plan.interval)
        for i, title in enumerate(model.titles)
    )
    any_share = _share("any criterion", _any(both), confidence, plan.interval)
    worst = tuple(_worst(both.margin[i], values) for i in range(len(model.titles)))
    nominal = judged_of(inner)
    again = _independent(case, model, varied, mapper)
    findings = (
        *_share_findings(shares, any_share, again),
        *_margin_findings(model, inner, worst, varied),
    )
    return Study(
        findings=findings,
        judged=_judged(case, (*shares, any_share), confidence),
        cautions=(_DISTRIBUTIONS, *CAUTIONS),
        not_assessed=NOT_ASSESSED,
        model=model,
        nominal=nominal,
        varied=varied,
        values=values[: 2 * plan.samples],
        outcomes=both,
        shares=shares,
        any_share=any_share,
        sensitivities=tuple(
            _sensitivity(row, plan.samples, confidence, plan.seed) for row in outcomes.margin
        ),
        worst=worst,
        samples=plan.samples,
        evaluations=len(values),
        confidence=confidence,
    )


def _any(outcomes: Outcomes) -> Any:
    """Return verdicts on all criteria together: one that fails decides, open ones leave open."""
    fails = (outcomes.verdict == FAILS).any(axis=0)
    unknown = (outcomes.verdict == OPEN).any(axis=0) & ~fails
    return np.where(fails, FAILS, np.where(unknown, OPEN, 1))


def _share(title: str, verdict: Any, confidence: float, method: Any) -> Share:
    failing, unknown = int((verdict == FAILS).sum()), int((verdict == OPEN).sum())
    assessed = len(verdict) - unknown
    interval = share_interval(failing, assessed, confidence, method) if assessed else None
    return Share(title, failing, assessed, unknown, interval)


def _worst(margin: Floats, values: Floats) -> Worst | None:
    if np.isnan(margin).all():
        return None
    at = int(np.nanargmin(margin))
    return Worst(at + 1, values[at], float(margin[at]))


def _sensitivity(margin: Floats, samples: int, confidence: float, seed: int) -> Sensitivity:
    a, b, mixed = np.split(margin, [samples, 2 * samples])
    return sensitivity(a, b, mixed.reshape(-1, samples), confidence, seed)


def _independent(
    case: StudyCase, model: Model, varied: tuple[Varied, ...], mapper: Mapper | None
) -> Outcomes:
    """Judge an independent random sample, another generator's: a check on the design."""
    count = 2 * case.sampling.samples if model.at_once else case.sampling.samples
    rng = np.random.Generator(np.random.Philox(case.sampling.seed))
    unit = np.clip(rng.random((count, len(varied))), 2.0**-53, 1.0 - 2.0**-53)
    return model.outcomes(values_of(varied, unit), mapper)


def _share_findings(shares: tuple[Share, ...], any_share: Share, again: Outcomes) -> list[Finding]:
    rows = [*again.verdict, _any(again)]
    found = []
    for number, (share, verdict) in enumerate(zip((*shares, any_share), rows, strict=True), 1):
        last = share is any_share
        second = None
        failing, assessed = int((verdict == FAILS).sum()), int((verdict != OPEN).sum())
        if share.value is not None and assessed:
            second = SecondComputation(
                f"{assessed} random samples",
                failing / assessed,
                _apart(share, failing, assessed),
                "4 standard errors of both",
            )
        what = "any criterion" if last else share.title
        found.append(
            Finding(
                id="share-any" if last else f"share-C{number}",
                title=f"Share of rotors that fail: {what}",
                symbol="p" if last else f"p_{{{number}}}",
                value=share.value,
                quantity="percent",
                method="count of sampled rotors",
                where="shares",
                note="" if share.assessed else "no sample could be assessed",
                second=second,
            )
        )
    return found


def _apart(share: Share, failing: int, assessed: int) -> float:
    """Return how far two estimates of a share may lie apart, relative to the first.

    Four standard errors of the difference, with one success and one failure added to either
    count so that none of them is zero (Agresti & Coull 1998).
    """
    pairs = ((share.failing, share.assessed), (failing, assessed))
    variance = 0.0
    for hits, count in pairs:
        p = (hits + 1) / (count + 2)
        variance += p * (1 - p) / count
    first = share.value or 0.0
    apart = 4.0 * math.sqrt(variance)
    return apart / first if first else apart


def _margin_findings(
    model: Model, inner: Case, worst: tuple[Worst | None, ...], varied: tuple[Varied, ...]
) -> list[Finding]:
    """Return nominal and worst margins, each with its second computation."""
    middle = model.outcomes(np.array([[v.value for v in varied]])).margin[:, 0]
    stated = _Checked(model, inner)
    found = []
    for number, title in enumerate(model.titles):
        value = float(middle[number])
        found.append(
            stated.margin(
                number,
                f"nominal-margin-C{number + 1}",
                f"Margin as stated, without tolerances: {title}",
                f"M_{{{number + 1}}}",
                None if math.isnan(value) else value,
            )
        )
        one = worst[number]
        if one is not None:
            case = from_resolved(case_with(model.resolved, model.places, list(one.values)))
            found.append(
                _Checked(model, case).margin(
                    number,
                    f"worst-margin-C{number + 1}",
                    f"Least margin of the sampled rotors: {title}",
                    rf"M_{{{number + 1},\min}}",
                    one.margin,
                )
            )
    return found


class _Checked:
    """Margins of one case, computed a second time."""

    def __init__(self, model: Model, case: Case) -> None:
        judged, self.how, self.tolerance, self.because = checked_of(case)
        self.outcomes = aligned(judged, model.titles)

    def margin(
        self, number: int, name: str, title: str, symbol: str, value: float | None
    ) -> Finding:
        """Return the finding of one margin; what is worst stands on page one."""
        second = None
        if value is not None:
            outcome = self.outcomes[number]
            again = None if outcome is None else outcome.margin
            # a margin is a difference of near numbers: compare as shares of the limit
            second = SecondComputation(
                self.how,
                math.nan if again is None else again,
                self.tolerance / max(abs(value), 1e-12),
                f"{self.tolerance:g} of the limit: {self.because}",
            )
        return Finding(
            id=name,
            title=title,
            symbol=symbol,
            value=value,
            quantity="percent",
            method="closed forms on arrays, or each sample judged",
            where="margins",
            note="" if value is not None else "there is no margin",
            headline=name.startswith("worst"),
            second=second,
        )


def _judged(case: StudyCase, shares: tuple[Share, ...], confidence: float) -> tuple[Judged, ...]:
    judged: list[Judged] = []
    for criterion in case.criteria:
        for share in _meant(criterion.of, shares):
            number = len(judged) + 1
            last = share is shares[-1]
            outcome = failing_share(
                share.failing,
                share.assessed,
                float(criterion.limit),
                confidence=confidence,
                method=case.sampling.interval,
                source=project_source(criterion.source, criterion.clause or ""),
                title=f"Rotors that fail: {share.title}",
            )
            of = "share-any" if last else f"share-C{shares.index(share) + 1}"
            judged.append(Judged(f"C{number}", outcome, f"criterion-{number}", of))
    return tuple(judged)


def _meant(of: str | None, shares: tuple[Share, ...]) -> tuple[Share, ...]:
    if of is None:
        return shares[:-1]
    if of == "any criterion":
        return shares[-1:]
    return tuple(share for share in shares if share.title == of)


def worst_settings(study: Study, criterion: int) -> Mapping[str, tuple[float, str, str]]:
    """Return the worst rotor's values by path: SI value, quantity, value with its SI unit."""
    one = study.worst[criterion]
    if one is None:
        return {}
    out = {}
    for v, value in zip(study.varied, one.values, strict=True):
        unit = cast("str", v.given["unit"])
        text = repr(float(value)) if unit == "1" else f"{float(value)!r} {unit}"
        out[v.path] = (float(value), v.quantity, text)
    return out
