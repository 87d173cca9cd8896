"""From a passage of a case to the speed programme of the mechanics."""

from __future__ import annotations

from typing import TYPE_CHECKING

from reportgen.case.passage import PassageProgramme

if TYPE_CHECKING:
    from reportgen.rotor.passage_programme import Programme


def to_programme(given: PassageProgramme) -> Programme:
    """Return a ramp or a table of a case as the speed programme that it prescribes.

    Parameters
    ----------
    given
        A passage whose speed is prescribed. Of a drive or a coast-down by drag the speed is
        a result, not a given.

    Raises
    ------
    ValueError
        If the passage prescribes no speed.
    ModelError
        If the mechanics do not cover the programme.
    """
    from reportgen.rotor.passage_programme import ConstantAcceleration, PiecewiseAcceleration

    if given.ramp is not None:
        ramp = given.ramp
        return ConstantAcceleration(
            start_speed=float(ramp.from_),
            end_speed=float(ramp.to),
            acceleration=float(ramp.acceleration),
            hold=float(ramp.hold or 0.0),
        )
    if given.table is None:
        raise ValueError(f"the passage {given.name!r} prescribes no speed: integrate its torques")
    times, speeds = given.table.column("time"), given.table.column("speed")
    return PiecewiseAcceleration(list(zip(times, speeds, strict=True)))
