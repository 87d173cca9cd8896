"""How far a critical speed must lie from the operating range: the rules in use."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from reportgen.criteria.check import not_negative, positive
from reportgen.criteria.sources import SOURCES, Source

Side = Literal["below", "within", "above"]


def required_margin(amplification: float, side: Side) -> float:
    """Return the separation margin that the amplification factor asks for.

    17·(1 − 1/(AF − 1.5)) %, at most 16 %, of the minimum speed for a critical speed below
    the operating range; 10 + 17·(1 − 1/(AF − 1.5)) %, at most 26 %, of the maximum
    continuous speed for one above. Below AF = 2.5 the critical speed counts as critically
    damped and none is required, so the pole of the formula at 1.5 is never met.

    Parameters
    ----------
    amplification
        Amplification factor AF by the half-power method [-], above zero.
    side
        Where the critical speed lies. Within the range no margin is kept: the larger of the
        two is returned.

    Returns
    -------
    float
        Share of the speed at that end of the operating range, 0 to 0.26.

    Raises
    ------
    ModelError
        If AF is not finite or not above zero.

    Notes
    -----
    API 617, from memory; check against the edition you hold.

    Examples
    --------
    >>> round(required_margin(4.0, "below"), 4)
    0.102
    >>> required_margin(1.5, "above")
    0.0
    """
    factor = positive("amplification factor", amplification)
    if factor < 2.5:
        return 0.0
    base = 0.17 * (1.0 - 1.0 / (factor - 1.5))
    return min(base, 0.16) if side == "below" else min(0.10 + base, 0.26)


@dataclass(frozen=True)
class AmplificationMargin:
    """The margin grows with the amplification factor; see :func:`required_margin`."""

    source: Source = SOURCES["petroleum-separation"]

    def most(self, side: Side) -> float:
        """Return the largest margin that the rule can ask for."""
        return 0.16 if side == "below" else 0.26

    def required(self, side: Side, amplification: float | None) -> float | None:
        """Return the margin asked for; None where it needs a factor that is not known."""
        return None if amplification is None else required_margin(amplification, side)

    def words(self, side: Side, amplification: float | None) -> str:
        """Return how the margin is found."""
        if amplification is None:
            return f"by amplification factor, at most {self.most(side) * 100:.0f} %"
        if amplification < 2.5:
            return f"none for an amplification factor below 2.5 (AF = {amplification:.3g})"
        head = "" if side == "below" else "10 + "
        return (
            f"{head}17·(1 − 1/(AF − 1.5)) % with AF = {amplification:.3g}, "
            f"at most {self.most(side) * 100:.0f} %"
        )

    def latex(self, side: Side, amplification: float | None) -> str:
        """Return the formula; none where no margin is asked for."""
        if amplification is not None and amplification < 2.5:
            return ""
        head = "" if side == "below" else "10 + "
        return (
            rf"\min\left\{{{head}17\left(1 - \frac{{1}}{{\mathrm{{AF}} - 1.5}}\right),\ "
            rf"{self.most(side) * 100:.0f}\right\}}\,\%"
        )


@dataclass(frozen=True)
class FlatMargin:
    """One stated percentage, the same whatever the damping.

    Parameters
    ----------
    below, above
        Share of the minimum and of the maximum continuous speed.
    source
        Where the percentage is stated.
    critically_damped
        Amplification factor below which no margin is asked for; None (as a flat rule is
        commonly meant) where the rule makes no such exception.
    """

    below: float
    above: float
    source: Source
    critically_damped: float | None = None

    def __post_init__(self) -> None:
        """Refuse what is no margin."""
        not_negative("margin below", self.below)
        not_negative("margin above", self.above)
        if self.critically_damped is not None:
            positive("amplification factor of a critically damped speed", self.critically_damped)

    def most(self, side: Side) -> float:
        """Return the largest margin that the rule can ask for."""
        return {"below": self.below, "above": self.above}.get(side, max(self.below, self.above))

    def required(self, side: Side, amplification: float | None) -> float | None:
        """Return the margin asked for."""
        if self.critically_damped is None:
            return self.most(side)
        if amplification is None:
            return None
        return 0.0 if amplification < self.critically_damped else self.most(side)

    def words(self, side: Side, amplification: float | None) -> str:
        """Return how the margin is found."""
        if self.required(side, amplification) == 0.0 and self.most(side):
            return (
                f"none for an amplification factor below {self.critically_damped:g} "
                f"(AF = {amplification:.3g})"
            )
        return f"{self.most(side) * 100:.3g} %, as stated"

    def latex(self, side: Side, amplification: float | None) -> str:  # noqa: ARG002
        """Return no formula: there is none. The arguments are those of the other rule."""
        return ""


MarginRule = AmplificationMargin | FlatMargin
