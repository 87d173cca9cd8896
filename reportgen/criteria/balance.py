"""Balance quality grades: permissible residual unbalance of the whole rotor."""

from __future__ import annotations

from reportgen.criteria.check import not_negative, positive
from reportgen.criteria.outcome import Limit, Outcome
from reportgen.criteria.sources import SOURCES, Source
from reportgen.errors import ModelError

# Grades of the series [m/s]; each is about 2.5 times the one before.
GRADES: tuple[float, ...] = tuple(
    1e-3 * g for g in (0.4, 1.0, 2.5, 6.3, 16.0, 40.0, 100.0, 250.0, 630.0, 1600.0, 4000.0)
)


def permissible_eccentricity(grade: float, speed: float) -> float:
    """Return e_per = G/Ω [m], the permissible distance of the mass centre from the axis.

    Parameters
    ----------
    grade
        Balance quality grade G [m/s] (G2.5 is 0.0025), 0.4e-3 to 4; values between those of
        the series are accepted, as agreed grades are.
    speed
        Highest service speed [rad/s].

    Raises
    ------
    ModelError
        If the grade lies outside G0.4 to G4000, or a number is not finite or not above zero.

    Notes
    -----
    ISO 21940-11 (ISO 1940-1), from memory. It holds for rotors with rigid behaviour up to
    their service speed.
    """
    grade, speed = positive("balance quality grade", grade), positive("service speed", speed)
    if not GRADES[0] * (1 - 1e-9) <= grade <= GRADES[-1] * (1 + 1e-9):
        raise ModelError(
            f"the balance quality grade is G{grade * 1e3:g}; the series runs from G0.4 to G4000"
        )
    return grade / speed


def permissible_unbalance(grade: float, mass: float, speed: float) -> float:
    """Return U_per = m·G/Ω [kg·m]; with G in mm/s, 1000·G·m/Ω in g·mm.

    Parameters
    ----------
    grade, speed
        See :func:`permissible_eccentricity`.
    mass
        Mass of the rotor [kg].

    Raises
    ------
    ModelError
        As for :func:`permissible_eccentricity`, or if the mass is not above zero.

    Examples
    --------
    >>> import math
    >>> u = permissible_unbalance(2.5e-3, 3600.0, 3000.0 * math.pi / 30.0)
    >>> round(u * 1e6 / 1e3, 1)  # 10³ g·mm
    28.6
    """
    return positive("mass of the rotor", mass) * permissible_eccentricity(grade, speed)


# How the permissible unbalance of the whole rotor comes about, in words and as a formula.
HOW = "m·G/Ω at the highest service speed"
HOW_LATEX = r"U_\mathrm{per} = \frac{G\,m}{\Omega}"


def balance_grade(
    unbalance: float | None,
    grade: float,
    mass: float | None,
    speed: float | None,
    *,
    source: Source = SOURCES["balance-grade"],
    title: str = "Residual unbalance by balance quality grade",
) -> Outcome:
    """Judge the residual unbalance of the whole rotor against a balance quality grade.

    Parameters
    ----------
    unbalance
        Residual unbalance [kg·m]: mass times eccentricity; None where not known.
    grade
        Balance quality grade [m/s].
    mass
        Mass of the rotor [kg]; None where not known.
    speed
        Highest service speed [rad/s]; None where not known.
    source, title
        Where the grade is stated, and what is judged.

    Returns
    -------
    Outcome
        ``not assessed`` where a number is missing or the grade lies outside G0.4 to G4000.

    Raises
    ------
    ModelError
        If a number is not finite or out of its physical range.
    """
    grade = positive("balance quality grade", grade)
    limit = Limit(title, "at most", "unbalance", source, f"{HOW}, G{grade * 1e3:.3g}", HOW_LATEX)
    value = None if unbalance is None else not_negative("residual unbalance", unbalance)
    known = {"mass of the rotor": mass, "service speed": speed}
    checked = {name: positive(name, x) for name, x in known.items() if x is not None}
    missing = [name for name in known if name not in checked]
    if missing:
        return limit.not_assessed(f"not known: {', '.join(missing)}", value=value)
    try:
        permissible = permissible_unbalance(
            grade, checked["mass of the rotor"], checked["service speed"]
        )
    except ModelError as error:
        return limit.not_assessed(str(error), value=value)
    if value is None:
        return limit.not_assessed("the residual unbalance is not known", limit=permissible)
    return limit.judge(value, permissible)
