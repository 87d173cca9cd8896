"""The rotor by stations: finite elements, supports, gyroscopics.

Whirl in complex form x + iy: x horizontal, y upward, z along the shaft from the left end;
the rotor spins counter-clockwise seen from the right end. Amplitudes are zero-to-peak.
SI throughout.
"""

from reportgen.rotor.stations.campbell import (
    Campbell,
    Crossing,
    campbell,
    instability_onset,
    log_decrement,
    synchronous_crossings,
    whirl_sense,
)
from reportgen.rotor.stations.checks import (
    Comparison,
    DiscretisationCheck,
    compare_nearest,
    condition_estimate,
    criticals_from_response,
    discretisation_check,
)
from reportgen.rotor.stations.coefficients import Coefficients, Constant, SpeedTable
from reportgen.rotor.stations.counting import count_in_window
from reportgen.rotor.stations.criticals import (
    Criticals,
    EnergyShares,
    count_below,
    energy_shares,
    undamped_criticals,
)
from reportgen.rotor.stations.dense import (
    DenseMatrices,
    dense_eigenvalues,
    dense_matrices,
    dense_response,
)
from reportgen.rotor.stations.eigenpairs import Eigenpairs, lowest_pairs
from reportgen.rotor.stations.forces import (
    BearingForces,
    EnergyBalance,
    ShaftLoads,
    bearing_forces,
    energy_balance,
    shaft_loads,
)
from reportgen.rotor.stations.inputs import (
    AxialLoad,
    Bearing,
    Coupling,
    Disc,
    Material,
    Pedestal,
    PointMass,
    Rotor,
    Section,
    seal,
)
from reportgen.rotor.stations.model import Model, assemble
from reportgen.rotor.stations.orbits import Orbits, orbits, orbits_of
from reportgen.rotor.stations.peaks import Peak, find_peaks, response_peaks
from reportgen.rotor.stations.response import (
    Bow,
    Response,
    Unbalance,
    unbalance_response,
    unbalance_responses,
)
from reportgen.rotor.stations.speed_map import (
    ActualCritical,
    CriticalSpeedMap,
    critical_speed_map,
    criticals_on_bearings,
)
from reportgen.rotor.stations.stability import (
    CrossCouplingSweep,
    cross_coupling_sensitivity,
    cross_coupling_sweep,
    with_cross_coupling,
)
from reportgen.rotor.stations.static import (
    MassProperties,
    StaticState,
    mass_properties,
    static_deflection,
)

__all__ = [
    "ActualCritical",
    "AxialLoad",
    "Bearing",
    "BearingForces",
    "Bow",
    "Campbell",
    "Coefficients",
    "Comparison",
    "Constant",
    "Coupling",
    "CriticalSpeedMap",
    "Criticals",
    "CrossCouplingSweep",
    "Crossing",
    "DenseMatrices",
    "Disc",
    "DiscretisationCheck",
    "Eigenpairs",
    "EnergyBalance",
    "EnergyShares",
    "MassProperties",
    "Material",
    "Model",
    "Orbits",
    "Peak",
    "Pedestal",
    "PointMass",
    "Response",
    "Rotor",
    "Section",
    "ShaftLoads",
    "SpeedTable",
    "StaticState",
    "Unbalance",
    "assemble",
    "bearing_forces",
    "campbell",
    "compare_nearest",
    "condition_estimate",
    "count_below",
    "count_in_window",
    "critical_speed_map",
    "criticals_from_response",
    "criticals_on_bearings",
    "cross_coupling_sensitivity",
    "cross_coupling_sweep",
    "dense_eigenvalues",
    "dense_matrices",
    "dense_response",
    "discretisation_check",
    "energy_balance",
    "energy_shares",
    "find_peaks",
    "instability_onset",
    "log_decrement",
    "lowest_pairs",
    "mass_properties",
    "orbits",
    "orbits_of",
    "response_peaks",
    "seal",
    "shaft_loads",
    "static_deflection",
    "synchronous_crossings",
    "unbalance_response",
    "unbalance_responses",
    "undamped_criticals",
    "whirl_sense",
    "with_cross_coupling",
]
