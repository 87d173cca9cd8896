"""The limits that a one-mass case states, applied to its results."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from reportgen.assess.model import Finding, Judged
from reportgen.assess.stated_limits import margin_rule, project_outcome, stated
from reportgen.criteria import (
    Outcome,
    amplitude_at_speed,
    balance_grade,
    clearance_share,
    separation_margins,
    speed_above_threshold,
)
from reportgen.criteria.sources import SOURCES
from reportgen.errors import ModelError
from reportgen.rotor import onemass

if TYPE_CHECKING:
    from reportgen.assess.one_mass_passage import PassageFindings
    from reportgen.case.onemass import OneMassCase

Range = tuple[float, float]


class Judging:
    """The results of one case, ready to be held against limits."""

    def __init__(
        self,
        case: OneMassCase,
        rotor: onemass.OneMassRotor,
        speeds: dict[str, float],
        operating: Range,
        peak: onemass.Peak,
        half_power: onemass.AmplificationFactor,
        findings: dict[str, Finding],
        passages: tuple[PassageFindings, ...],
    ) -> None:
        self.case, self.rotor, self.speeds, self.operating = case, rotor, speeds, operating
        self.peak, self.half_power, self.findings = peak, half_power, findings
        self.passages = passages

    def all(self) -> tuple[Judged, ...]:
        """Return every limit of the case's list, judged, in the order of the list."""
        judged: list[Judged] = []
        for criterion in self.case.criteria:
            for outcome, of in self._apply(criterion):
                number = len(judged) + 1
                judged.append(Judged(f"C{number}", outcome, f"criterion-{number}", of))
        return tuple(judged)

    def _apply(self, criterion: Any) -> list[tuple[Outcome, str]]:
        match criterion.kind:
            case "separation margin":
                return [(o, "critical-speed") for o in self._separation(criterion)]
            case "amplitude at speed":
                return [self._amplitude(criterion)]
            case "passage clearance":
                return self._passages(criterion)
            case "balance grade":
                return [(self._balance(criterion), "")]
            case "stability":
                return [(self._stability(criterion), "instability-onset")]
            case "project limit":
                return [
                    (project_outcome(criterion, self.findings, harmonic=True), criterion.result)
                ]
            case kind:
                raise ModelError(f"the one-mass rotor has no result for a criterion {kind!r}")

    def _separation(self, criterion: Any) -> list[Outcome]:
        rule = margin_rule(criterion)
        criticals = []
        if self.peak.exists and self.peak.speed is not None:
            criticals = [(self.peak.speed, self.half_power.factor)]
        return separation_margins(
            criticals,
            *self.operating,
            rule,
            trip=self.speeds.get("trip"),
            # the closed form knows all critical speeds of one mass: no range is left unsearched
            searched=(0.0, None),
        )

    def _amplitude(self, criterion: Any) -> tuple[Outcome, str]:
        if criterion.at == "rated":
            where, finding = "rated speed", "amplitude-rated"
            amplitude = abs(complex(onemass.response(self.rotor, self.speeds["rated"])))
        else:
            where, finding = "the operating range", ""
            amplitude = largest_amplitude(self.rotor, self.operating, self.peak)
        outcome = amplitude_at_speed(
            amplitude,
            float(criterion.limit),
            measure="0-peak",
            limit_measure=criterion.measure,
            harmonic=True,
            source=stated(criterion),
            title=f"Amplitude at {where}"
            if criterion.at == "rated"
            else f"Largest amplitude in {where}",
        )
        return outcome, finding

    def _passages(self, criterion: Any) -> list[tuple[Outcome, str]]:
        allowed = float(criterion.share)
        source = stated(criterion)
        if not self.passages:
            outcome = clearance_share(
                None, None, allowed=allowed, source=source, title="Clearance during passage"
            )
            return [(outcome, "")]
        return [
            (
                clearance_share(
                    float(one.peak.amplitude) if one.peak.crossed else None,
                    one.clearance,
                    sag=one.sag,
                    runout=one.runout,
                    bow=0.0,  # the passage holds the bow already
                    allowed=allowed,
                    source=source,
                    title=f"Clearance during {one.name}",
                ),
                f"{one.id}-peak",
            )
            for one in self.passages
        ]

    def _balance(self, criterion: Any) -> Outcome:
        speed = self.speeds.get("maximum continuous", self.speeds["rated"])
        return balance_grade(
            self.rotor.mass * self.rotor.eccentricity,
            float(criterion.grade),
            self.rotor.mass,
            speed,
            source=stated(criterion, SOURCES["balance-grade"]),
        )

    def _stability(self, criterion: Any) -> Outcome:
        onset = self.findings.get("instability-onset")
        return speed_above_threshold(
            onset.value if onset else None,
            max(self.speeds.values()),
            margin=float(criterion.margin or 0.0),
            source=stated(criterion),
            absent="the case states no internal damping" if onset is None else onset.note,
        )


def largest_amplitude(rotor: onemass.OneMassRotor, span: Range, peak: onemass.Peak) -> float:
    """Return the largest steady amplitude in m between two speeds.

    The amplitude of one mass has no maximum but its peak, so that the ends and the peak,
    where it lies between them, are all that need be looked at.
    """
    speeds = [*span]
    if peak.exists and peak.speed is not None and span[0] < peak.speed < span[1]:
        speeds.append(peak.speed)
    return max(abs(complex(onemass.response(rotor, speed))) for speed in speeds)


def required_range(case: OneMassCase, operating: Range, factor: float | None) -> Range:
    """Return the operating range widened by the largest margin that the case asks for."""
    low, high = operating
    rules = [margin_rule(c) for c in case.criteria if c.kind == "separation margin"]
    below = [rule.required("below", factor) or 0.0 for rule in rules]
    above = [rule.required("above", factor) or 0.0 for rule in rules]
    return low * (1 - max(below, default=0.0)), high * (1 + max(above, default=0.0))
