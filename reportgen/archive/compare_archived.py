"""Comparing packages by what they hold, where their cases cannot be calculated again here."""

from __future__ import annotations

import json
from collections.abc import Mapping
from typing import Any

from reportgen.archive.compare import Side
from reportgen.assess.by_template import has_assessment
from reportgen.assess.comparison import Comparison, compare, compare_assessments
from reportgen.assess.model import Assessment, Finding, Judged
from reportgen.criteria import Outcome
from reportgen.errors import InputError, PackageError, Problem
from reportgen.units import QUANTITIES


def compared(old: Side, new: Side) -> tuple[Comparison, str]:
    """Compare two sides, computed where they can be, else as they are archived.

    Returns
    -------
    comparison
        Of the cases; without drivers where they cannot be computed.
    note
        What to say of that; empty where both were computed.

    Raises
    ------
    InputError
        If they are of different templates, or cannot be computed and one is no package.
    ModelError
        If the methods do not cover one of them.
    PackageError
        If archived results cannot be read.
    """
    template = old.case.template
    if has_assessment(template) or template != new.case.template:
        return compare(old.case, new.case), ""
    if old.results is None or new.results is None:
        found = f"a case of {template} cannot be calculated outside its report"
        raise InputError(Problem(found, "run both and compare their packages"))
    archived = [assessment_of(json.loads(side.files["results.json"])) for side in (old, new)]
    calc = compare_assessments(old.case, new.case, *archived, apart=False)
    note = (
        f"a case of {template} cannot be calculated outside its report: the archived headline "
        "results are compared as they are, and nothing is said of what drives them"
    )
    return calc, note


def assessment_of(results: Mapping[str, Any]) -> Assessment:
    """Return the findings and judged limits that a ``results.json`` holds.

    Raises
    ------
    PackageError
        If it does not hold them.
    """
    try:
        return Assessment(
            findings=tuple(_finding(one) for one in results["results"]),
            judged=tuple(_judged(one) for one in results["criteria"]),
        )
    except (KeyError, TypeError, ValueError) as error:
        raise PackageError(f"results.json cannot be compared: {error}") from error


def _finding(one: Mapping[str, Any]) -> Finding:
    if one["quantity"] not in QUANTITIES:
        raise ValueError(f"no quantity {one['quantity']!r}")
    value = None if one["value"] is None else float(one["value"])
    return Finding(
        id=one["id"],
        title=one["title"],
        symbol=one["symbol"],
        value=value,
        quantity=one["quantity"],
        method=one["method"],
        where=one["where"],
        measure=one["measure"],
    )


def _judged(one: Mapping[str, Any]) -> Judged:
    outcome = Outcome(
        title=one["title"],
        value=one["value"],
        limit=one["limit"],
        sense=one["sense"],
        margin=None if one["margin"] is None else float(one["margin"]),
        share_used=None,
        verdict=one["verdict"],
        reason=one["reason"],
        how="",
        how_latex="",
        source=one["source"],
        clause=one["clause"],
        edition="",
        basis="project",
        quantity="percent",
    )
    return Judged(one["id"], outcome, one["where"])
