"""One rotor by stations judged leanly: what a tolerance study needs of each sample.

Limits that need more than the response and the damped modes are left open, with the reason.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from reportgen.assess.lateral_whirl import SPEEDS as SPEEDS
from reportgen.assess.lateral_whirl import Whirl
from reportgen.assess.model import Judged

if TYPE_CHECKING:
    from reportgen.case.lateral import LateralCase


def judge(case: LateralCase, speeds: int = SPEEDS) -> tuple[Judged, ...]:
    """Judge a case by stations against the limits that it states.

    Parameters
    ----------
    case
        The case.
    speeds
        Number of even speeds that the response is computed at.

    Raises
    ------
    ModelError
        If the methods do not cover the case's values.
    """
    whirl = Whirl(case, speeds)
    judged: list[Judged] = []
    for criterion in case.criteria:
        for outcome in whirl.apply(criterion):
            number = len(judged) + 1
            judged.append(Judged(f"C{number}", outcome, f"criterion-{number}"))
    return tuple(judged)
