"""What every assessment is made of: findings, their second computation, judged limits."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from reportgen.assess.cautions import CAUTIONS, Caution

if TYPE_CHECKING:
    from reportgen.criteria import Measure, Outcome


@dataclass(frozen=True)
class SecondComputation:
    """The same quantity by an independent method.

    Parameters
    ----------
    method
        What was done, in a few words.
    value
        Its value, in the SI unit of the finding.
    tolerance
        Largest relative difference that the two methods' orders leave room for.
    because
        Why that tolerance, in a few words.
    """

    method: str
    value: float
    tolerance: float
    because: str = ""

    def difference(self, first: float) -> float:
        """Return the difference relative to ``first``, absolute where ``first`` is zero."""
        gap = abs(self.value - first)
        return gap / abs(first) if first else gap

    def agrees(self, first: float) -> bool:
        """Tell whether the two values lie within the tolerance; a NaN never agrees."""
        return math.isfinite(self.value) and self.difference(first) <= self.tolerance


@dataclass(frozen=True)
class Finding:
    """One result of a calculation.

    Parameters
    ----------
    id
        Name that criteria, comparisons and references use.
    title, symbol
        In words, and as LaTeX.
    value
        In SI; None where the quantity does not exist, with the reason in ``note``.
    quantity
        Key of the reader's-unit table, :data:`reportgen.units.QUANTITIES`.
    measure
        ``0-peak``, ``peak-to-peak``, ``r.m.s.`` or ``none``.
    method
        How it was computed, in a few words.
    where
        Id of the block in the report where it is computed.
    headline
        Whether it stands among the results on page one.
    """

    id: str
    title: str
    symbol: str
    value: float | None
    quantity: str
    method: str
    where: str
    measure: Measure = "none"
    note: str = ""
    headline: bool = True
    second: SecondComputation | None = None

    @property
    def agrees(self) -> bool:
        """False only where a second computation contradicts the first."""
        return self.second is None or self.value is None or self.second.agrees(self.value)


@dataclass(frozen=True)
class Judged:
    """A limit of the case's list applied to the calculation."""

    id: str
    outcome: Outcome
    where: str
    of: str = ""  # id of the finding that is judged, where it is one


@dataclass(frozen=True, kw_only=True)
class Assessment:
    """Findings and judged limits of one case; the base of every template's own."""

    findings: tuple[Finding, ...] = ()
    judged: tuple[Judged, ...] = ()
    cautions: tuple[Caution, ...] = CAUTIONS
    not_assessed: tuple[str, ...] = ()
    open_points: tuple[str, ...] = ()  # what the calculation itself leaves open: holds
    _by_id: dict[str, Finding] = field(default_factory=dict, compare=False, repr=False)

    def __post_init__(self) -> None:
        """Index the findings; two findings of one id are a defect of the assessment."""
        for finding in self.findings:
            if finding.id in self._by_id:
                raise ValueError(f"two findings are named {finding.id!r}")
            self._by_id[finding.id] = finding

    def __getitem__(self, finding_id: str) -> Finding:
        """Return the finding of that id."""
        return self._by_id[finding_id]

    def __contains__(self, finding_id: object) -> bool:
        """Tell whether there is a finding of that id."""
        return finding_id in self._by_id

    def disagreements(self) -> list[Finding]:
        """Return the findings whose second computation contradicts the first."""
        return [finding for finding in self.findings if not finding.agrees]
