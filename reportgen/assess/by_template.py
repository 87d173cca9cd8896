"""The assessment of a case by its template, for comparisons and studies."""

from __future__ import annotations

from importlib import import_module
from importlib.util import find_spec
from typing import TYPE_CHECKING, Any, cast

import numpy as np

from reportgen.errors import ModelError

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from reportgen.assess.model import Assessment, Judged
    from reportgen.case import Case

_HOMES = {
    "one-mass-whirl": "reportgen.assess.one_mass",
    "lateral-review": "reportgen.assess.lateral",
    "transient-passage": "reportgen.assess.transient",
}
"""The module whose ``assess`` calculates a case of the template, where there is one."""


def has_assessment(template: str) -> bool:
    """Tell whether cases of a template can be calculated without their notebook."""
    home = _HOMES.get(template)
    return home is not None and find_spec(home) is not None


def assess_case(case: Case) -> Assessment:
    """Calculate and judge a case of any template that has an assessment.

    Raises
    ------
    ModelError
        If the methods do not cover the case's values, or the template has no assessment.
    """
    if not has_assessment(case.template):
        raise ModelError(f"a case of {case.template} cannot be calculated outside its report")
    home = import_module(_HOMES[case.template])
    assess = cast("Callable[[Any], Assessment]", home.assess)
    return assess(case)


def judge_case(case: Case) -> tuple[Judged, ...]:
    """Return the judged limits of a case alone.

    A module that can judge without second computations has a ``judge`` for it.

    Raises
    ------
    ModelError
        As :func:`assess_case`.
    """
    if has_assessment(case.template):
        judge = getattr(import_module(_HOMES[case.template]), "judge", None)
        if judge is not None:
            return cast("tuple[Judged, ...]", judge(case))
    return assess_case(case).judged


def curves_of(calc: Assessment) -> list[tuple[str, NDArray[np.float64], NDArray[np.float64]]]:
    """Return the response curves of an assessment.

    Returns
    -------
    list
        Name (empty for a sole curve), speed [rad/s] and amplitude [m] (0-peak), each of
        shape (n,); empty where the assessment has none.
    """
    speed, curve = getattr(calc, "curve_speed", None), getattr(calc, "curve", None)
    if speed is None or curve is None:
        return []
    return [("", np.asarray(speed, float), np.abs(np.asarray(curve)))]
