"""Limits by published source: pure functions.

Each criterion takes numbers in SI and gives an :class:`Outcome`: value, limit, margin and one
of three verdicts, with the source of the limit and how it was computed. Missing data gives
``not assessed`` with the reason; a NaN, an infinity or amplitudes in measures that cannot be
compared raise :class:`~reportgen.errors.ModelError`.
"""

from reportgen.criteria.amplitude import (
    amplitude_at_speed,
    running_vibration,
    running_vibration_limit,
)
from reportgen.criteria.balance import (
    GRADES,
    Allocation,
    PlaneUnbalance,
    allocate,
    balance_grade,
    balance_grade_in_planes,
    permissible_eccentricity,
    permissible_unbalance,
    residual_at_bearings,
)
from reportgen.criteria.clearance import clearance_share, contact
from reportgen.criteria.margin_rules import (
    AmplificationMargin,
    FlatMargin,
    MarginRule,
    required_margin,
)
from reportgen.criteria.measures import convert_amplitude
from reportgen.criteria.outcome import Limit, Measure, Outcome, Sense, Verdict
from reportgen.criteria.separation import Critical, half_power_bands_overlap, separation_margins
from reportgen.criteria.sources import SOURCES, Basis, Source, cited, project_source

__all__ = [
    "GRADES",
    "SOURCES",
    "Allocation",
    "AmplificationMargin",
    "Basis",
    "Critical",
    "FlatMargin",
    "Limit",
    "MarginRule",
    "Measure",
    "Outcome",
    "PlaneUnbalance",
    "Sense",
    "Source",
    "Verdict",
    "allocate",
    "amplitude_at_speed",
    "balance_grade",
    "balance_grade_in_planes",
    "cited",
    "clearance_share",
    "contact",
    "convert_amplitude",
    "half_power_bands_overlap",
    "permissible_eccentricity",
    "permissible_unbalance",
    "project_source",
    "required_margin",
    "residual_at_bearings",
    "running_vibration",
    "running_vibration_limit",
    "separation_margins",
]
