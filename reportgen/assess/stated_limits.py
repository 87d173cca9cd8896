"""What every assessment does with a limit of the case: its source, its rule, a project's own."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from reportgen.criteria import AmplificationMargin, FlatMargin, MarginRule, Outcome, project_limit
from reportgen.criteria.sources import SOURCES, Source, cited, project_source
from reportgen.errors import ModelError

if TYPE_CHECKING:
    from collections.abc import Mapping

    from reportgen.assess.model import Finding


def stated(criterion: Any, ours: Source | None = None) -> Source:
    """Return the source as the case states it, with what we know of it."""
    source, clause = criterion.source or "", criterion.clause or ""
    if ours is None:
        return project_source(source or "not stated in the case", clause)
    return cited(ours, standard=source, clause=clause)


def margin_rule(criterion: Any) -> MarginRule:
    """Return the separation rule that a criterion of the case names."""
    if criterion.rule == "flat":
        margin = float(criterion.margin)
        return FlatMargin(margin, margin, stated(criterion))
    return AmplificationMargin(stated(criterion, SOURCES["petroleum-separation"]))


def project_outcome(
    criterion: Any, findings: Mapping[str, Finding], *, harmonic: bool = False
) -> Outcome:
    """Judge a result by its id against a project's own limit.

    ``harmonic`` tells that the whirl is steady, so that measures may be converted; that of a
    passage never is.

    Raises
    ------
    ModelError
        If the calculation has no result of that id.
    """
    finding = findings.get(criterion.result)
    if finding is None:
        raise ModelError(
            f"a project limit names the result {criterion.result!r}, which this calculation "
            f"does not have; it has {', '.join(findings)}"
        )
    return project_limit(
        finding.value,
        criterion.limit_si(finding.quantity),
        sense=criterion.sense,
        quantity=finding.quantity,
        measure=finding.measure,
        limit_measure=criterion.measure or finding.measure,
        harmonic=harmonic and "passage" not in finding.id,
        absent=finding.note or "the result does not exist",
        source=stated(criterion),
        title=finding.title,
    )
