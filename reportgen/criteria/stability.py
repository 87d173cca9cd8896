"""How far a rotor is from whirling by itself."""

from __future__ import annotations

from reportgen.criteria.check import finite, not_negative, positive
from reportgen.criteria.outcome import Limit, Outcome
from reportgen.criteria.sources import SOURCES, Source


def anticipated_cross_coupling(
    power: float,
    speed: float,
    diameter: float,
    width: float,
    *,
    density_ratio: float = 1.0,
    efficiency_factor: float = 3.0,
) -> float:
    """Return the cross-coupled stiffness q [N/m] that a stage may add: β·T·(ρ_d/ρ_s)/(D·H).

    Parameters
    ----------
    power
        Power of the stage [W]; with the speed it gives the torque T.
    speed
        Speed [rad/s].
    diameter
        Impeller diameter, or mean blade diameter [m].
    width
        Narrowest width of the flow path from impeller to diffuser, or blade height [m].
    density_ratio
        Density at discharge over density at suction [-]; 1 for an axial stage.
    efficiency_factor
        β [-]: 3 for a centrifugal impeller, 1.5 for an axial stage.

    Raises
    ------
    ModelError
        If a number is not finite, the power is negative, or another is not above zero.

    Notes
    -----
    Alford (1965); in the form with the density ratio, API 617, from memory.
    """
    torque = not_negative("power", power) / positive("speed", speed)
    area = positive("diameter", diameter) * positive("width", width)
    factor = positive("efficiency factor", efficiency_factor)
    return factor * torque * positive("density ratio", density_ratio) / area


def log_decrement(
    decrement: float | None,
    *,
    cross_coupling: float | None,
    required: float = 0.1,
    source: Source = SOURCES["petroleum-stability"],
    title: str = "Logarithmic decrement of the first forward mode",
) -> Outcome:
    """Judge the logarithmic decrement with the applied cross-coupling.

    Parameters
    ----------
    decrement
        Logarithmic decrement [-] of the first forward mode, computed with the
        cross-coupling; negative for a growing whirl; None where not known.
    cross_coupling
        Sum of the cross-coupled stiffness that was applied [N/m]; 0 where it is stated that
        none acts; None where nothing is stated, which leaves the criterion open.
    required
        Least decrement.
    source, title
        Where the rule is stated, and what is judged.

    Raises
    ------
    ModelError
        If a number is not finite, the cross-coupling is negative, or the least decrement is
        not above zero.
    """
    least = positive("least decrement", required)
    limit = Limit(
        title,
        "at least",
        "ratio",
        source,
        f"{least:.3g} with the applied cross-coupling",
        rf"\delta \ge {least:.3g}",
    )
    value = None if decrement is None else finite("logarithmic decrement", decrement)
    if cross_coupling is None:
        return limit.not_assessed(
            "the criterion asks for the decrement with the applied cross-coupling, and none is "
            "stated",
            value=value,
            limit=least,
        )
    applied = not_negative("cross-coupling", cross_coupling)
    if value is None:
        return limit.not_assessed("the decrement is not known", limit=least)
    notes = [
        "the whirl grows by itself: the rotor is unstable" if value < 0.0 else "",
        "" if applied else "it is stated that no cross-coupling acts",
    ]
    return limit.judge(value, least, reason="; ".join(note for note in notes if note))


def speed_above_threshold(
    threshold: float | None,
    highest: float,
    *,
    margin: float = 0.0,
    source: Source = SOURCES["internal-damping"],
    absent: str = "the threshold speed is not known",
    title: str = "Threshold speed of whirl by internal damping",
) -> Outcome:
    """Judge the threshold speed of instability against the highest speed reached.

    Parameters
    ----------
    threshold
        Speed [rad/s] above which the whirl grows by itself; None where there is none or
        it is not known, for the reason ``absent``.
    highest
        Highest speed reached [rad/s], overspeed and trip included.
    margin
        Share of ``highest`` by which the threshold must lie above it. With no margin, a
        threshold at the highest speed does not meet.
    source, absent, title
        Where the margin is stated, why there is no threshold, and what is judged.

    Raises
    ------
    ModelError
        If a number is not finite, a speed is not above zero, or the margin is negative.
    """
    top, margin = positive("highest speed", highest), not_negative("margin", margin)
    limit = Limit(
        title,
        "at least",
        "speed",
        source,
        f"{margin * 100:.3g} % above the highest speed reached",
        rf"\Omega_\mathrm{{t}} \ge {1.0 + margin:.4g}\,\Omega_\mathrm{{max}}",
    )
    least = (1.0 + margin) * top
    if threshold is None:
        return limit.not_assessed(absent, limit=least)
    return limit.judge(positive("threshold speed", threshold), least, strictly=margin == 0.0)
