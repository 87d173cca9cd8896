"""Limits by published source: pure functions.

Each criterion takes numbers in SI and gives an :class:`Outcome`: value, limit, margin and one
of three verdicts, with the source of the limit and how it was computed. Missing data gives
``not assessed`` with the reason; a NaN, an infinity or amplitudes in measures that cannot be
compared raise :class:`~reportgen.errors.ModelError`.

:mod:`reportgen.criteria.peaks` and :mod:`reportgen.criteria.acceptance`, which hold a recorded
test against the calculation, are imported by their own names: only they need numpy and scipy.
"""

from reportgen.criteria.amplitude import (
    amplitude_at_speed,
    running_vibration,
    running_vibration_limit,
)
from reportgen.criteria.balance import (
    GRADES,
    balance_grade,
    permissible_eccentricity,
    permissible_unbalance,
)
from reportgen.criteria.balance_planes import (
    Allocation,
    PlaneUnbalance,
    allocate,
    balance_grade_in_planes,
    residual_at_bearings,
)
from reportgen.criteria.bearings import bearing_load, bearing_load_share
from reportgen.criteria.casing import casing_velocity, casing_velocity_zones, harmonic_velocity
from reportgen.criteria.clearance import clearance_share, contact
from reportgen.criteria.machine_types import MACHINE_TYPES, MachineType
from reportgen.criteria.margin_rules import (
    AmplificationMargin,
    FlatMargin,
    MarginRule,
    required_margin,
)
from reportgen.criteria.measures import convert_amplitude
from reportgen.criteria.outcome import Limit, Measure, Outcome, Sense, Verdict
from reportgen.criteria.project import project_limit
from reportgen.criteria.separation import Critical, half_power_bands_overlap, separation_margins
from reportgen.criteria.shaft_zones import shaft_vibration, shaft_vibration_zones
from reportgen.criteria.sources import SOURCES, Basis, Source, cited, project_source
from reportgen.criteria.stability import (
    anticipated_cross_coupling,
    log_decrement,
    speed_above_threshold,
)
from reportgen.criteria.stress import shaft_stress
from reportgen.criteria.unbalance import (
    PlacedUnbalance,
    analysis_unbalance,
    grade_unbalance,
    residual_unbalance,
    residual_unbalance_by_load,
)
from reportgen.criteria.zones import Boundary, Zones

__all__ = [
    "GRADES",
    "MACHINE_TYPES",
    "SOURCES",
    "Allocation",
    "AmplificationMargin",
    "Basis",
    "Boundary",
    "Critical",
    "FlatMargin",
    "Limit",
    "MachineType",
    "MarginRule",
    "Measure",
    "Outcome",
    "PlacedUnbalance",
    "PlaneUnbalance",
    "Sense",
    "Source",
    "Verdict",
    "Zones",
    "allocate",
    "amplitude_at_speed",
    "analysis_unbalance",
    "anticipated_cross_coupling",
    "balance_grade",
    "balance_grade_in_planes",
    "bearing_load",
    "bearing_load_share",
    "casing_velocity",
    "casing_velocity_zones",
    "cited",
    "clearance_share",
    "contact",
    "convert_amplitude",
    "grade_unbalance",
    "half_power_bands_overlap",
    "harmonic_velocity",
    "log_decrement",
    "permissible_eccentricity",
    "permissible_unbalance",
    "project_limit",
    "project_source",
    "required_margin",
    "residual_at_bearings",
    "residual_unbalance",
    "residual_unbalance_by_load",
    "running_vibration",
    "running_vibration_limit",
    "separation_margins",
    "shaft_stress",
    "shaft_vibration",
    "shaft_vibration_zones",
    "speed_above_threshold",
]
