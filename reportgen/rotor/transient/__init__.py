"""Through the critical speed under a drive's torque, and what a shaft by stations does on the way.

SI throughout; amplitudes are zero-to-peak.
"""

from reportgen.rotor.transient.balance import SteadyState, steady_states
from reportgen.rotor.transient.coupled import CoupledRotor, EnergyAudit, whirl_torque
from reportgen.rotor.transient.drive_margin import (
    DriveMargin,
    least_drive_torque,
)
from reportgen.rotor.transient.phases import Phase
from reportgen.rotor.transient.programme import Prescribed, Recorded
from reportgen.rotor.transient.record import Peak
from reportgen.rotor.transient.station_run import StationRun, station_run
from reportgen.rotor.transient.torque import NetTorque, TorqueCurve
from reportgen.rotor.transient.torque_result import TorqueRun
from reportgen.rotor.transient.torque_run import (
    coast_down,
    overspeed_trip,
    run_up,
    torque_run,
)

__all__ = [
    "CoupledRotor",
    "DriveMargin",
    "EnergyAudit",
    "NetTorque",
    "Peak",
    "Phase",
    "Prescribed",
    "Recorded",
    "StationRun",
    "SteadyState",
    "TorqueCurve",
    "TorqueRun",
    "coast_down",
    "least_drive_torque",
    "overspeed_trip",
    "run_up",
    "station_run",
    "steady_states",
    "torque_run",
    "whirl_torque",
]
