"""The case of a passage through the critical speed, template ``transient-passage``."""

from __future__ import annotations

import math
from typing import Annotated, ClassVar, Literal, Self

from pydantic import Field, model_validator

from reportgen.case.base import GivenSection, Line
from reportgen.case.case import Case
from reportgen.case.common import Speeds, exactly_one, problem
from reportgen.case.criteria import PassageCriterion
from reportgen.case.given import Given, Of
from reportgen.case.lateral import ClearanceGiven, PlaneGiven, ProbeGiven
from reportgen.case.onemass import OneMassRotorGiven, Unbalance
from reportgen.case.ramps import require_ramp
from reportgen.case.stations import StationRotor
from reportgen.case.tables import Column, Table, TableOf
from reportgen.case.unique import require_unique

_Speed = Annotated[Given, Of("speed", at_least=0.0)]
_Inertia = Annotated[Given, Of("inertia", above=0.0)]

TORQUE_TABLE = TableOf(
    (Column("speed", "speed", at_least=0.0), Column("torque", "torque")),
    rising="speed",
    least_rows=2,
)
PROGRAMME_TABLE = TableOf(
    (Column("time", "time", at_least=0.0), Column("speed", "speed", at_least=0.0)),
    rising="time",
    least_rows=2,
)
_Torque = Annotated[Table, TORQUE_TABLE]


class Ramp(GivenSection):
    """Constant angular acceleration from one speed to another."""

    words: ClassVar[str] = "a ramp"
    prefix: ClassVar[str] = "Ramp"

    from_: _Speed = Field(title="from speed", examples=["0 rpm"])
    to: _Speed = Field(title="to speed", examples=["1480 rpm"])
    acceleration: Annotated[Given, Of("acceleration_speed")] = Field(examples=["25 rpm/s"])
    hold: Annotated[Given, Of("time", at_least=0.0)] | None = Field(
        None, title="time at the end speed"
    )

    @model_validator(mode="after")
    def _gets_there(self) -> Self:
        require_ramp(self.from_, self.to, self.acceleration)
        return self


class Drive(GivenSection):
    """Run-up by a drive torque against a load torque, both against speed."""

    words: ClassVar[str] = "the drive"
    prefix: ClassVar[str] = "Drive"

    from_: _Speed = Field(title="from speed", examples=["0 rpm"])
    to: _Speed = Field(title="to speed", examples=["1480 rpm"])
    torque: _Torque
    load: _Torque | None = None
    inertia: _Inertia = Field(title="inertia of the whole train", examples=["2.4 kg m^2"])
    longest: Annotated[Given, Of("time", above=0.0)] | None = Field(
        None, title="longest time of the run-up"
    )

    @model_validator(mode="after")
    def _torques_reach(self) -> Self:
        if float(self.to) <= float(self.from_):
            raise problem("a drive runs up, but the end is not above the start", "check both", "to")
        for name, table in (("torque", self.torque), ("load", self.load)):
            if table is not None:
                require_covered(table, name, float(self.from_), float(self.to))
        return self


class Drag(GivenSection):
    """Coast-down from a speed by drag torque against speed."""

    words: ClassVar[str] = "the coast-down"
    prefix: ClassVar[str] = "Coast-down"

    from_: _Speed = Field(title="from speed", examples=["1480 rpm"])
    to: _Speed = Field(title="to speed", examples=["0 rpm"])
    torque: _Torque
    inertia: _Inertia = Field(title="inertia of the whole train", examples=["2.4 kg m^2"])

    @model_validator(mode="after")
    def _slows(self) -> Self:
        low, high = float(self.to), float(self.from_)
        if high <= low:
            raise problem("a coast-down ends at a lower speed than it starts", "check both", "to")
        require_covered(self.torque, "torque", low, high)
        rows = list(zip(self.torque.column("speed"), self.torque.column("torque"), strict=True))
        upper = next(i for i, (speed, _) in enumerate(rows) if speed >= high * (1 - 1e-9))
        inside = [torque for speed, torque in rows[: upper + 1] if speed > low]
        if min(inside) <= 0:
            found = (
                "the drag torque is not above zero between the two speeds: the shaft never slows"
            )
            raise problem(found, "give drag as a positive torque", "torque")
        return self


def require_covered(table: Table, name: str, low: float, high: float) -> None:
    """Refuse a torque table that does not cover the speeds of the passage."""
    speeds = table.column("speed")
    slack = 1e-9 * high
    if speeds[0] > low + slack or speeds[-1] < high - slack:
        covered = f"{speeds[0] * 30 / math.pi:.6g} to {speeds[-1] * 30 / math.pi:.6g} r/min"
        wanted = f"{low * 30 / math.pi:.6g} to {high * 30 / math.pi:.6g} r/min"
        found = f"the {name} table covers {covered}, the passage runs over {wanted}"
        raise problem(found, "extend the table; nothing is extrapolated", name)


class PassageProgramme(GivenSection):
    """One passage: how the speed goes, in exactly one of four ways."""

    words: ClassVar[str] = "a passage"

    name: Line = Field(examples=["Start-up"])
    ramp: Ramp | None = None
    table: Annotated[Table, PROGRAMME_TABLE] | None = None
    drive: Drive | None = None
    coast_down: Drag | None = None

    @model_validator(mode="after")
    def _one(self) -> Self:
        exactly_one(self, "ramp", "table", "drive", "coast_down")
        if self.table is not None and len(set(self.table.column("speed"))) == 1:
            found = "the speed of the table never changes"
            raise problem(found, "give a run through speeds", "table")
        return self

    def speeds(self) -> tuple[float, float]:
        """Return the lowest and highest speed of the passage in rad/s."""
        if self.table is not None:
            column = self.table.column("speed")
            return min(column), max(column)
        run = self.ramp or self.drive or self.coast_down
        assert run is not None
        ends = float(run.from_), float(run.to)
        return min(ends), max(ends)


class SuddenUnbalance(GivenSection):
    """Unbalance that appears at speed, as when a part is lost."""

    words: ClassVar[str] = "a sudden unbalance"

    name: Line = Field(examples=["Loss of one blade"])
    speed: Annotated[Given, Of("speed", above=0.0)] = Field(examples=["1480 rpm"])
    amount: Annotated[Given, Of("unbalance", above=0.0)] = Field(examples=["12000 g mm"])
    angle: Annotated[Given, Of("angle")] | None = None
    on: Line | None = None


class AmplitudeLimit(GivenSection):
    """Amplitude, 0-peak, beyond which time is counted."""

    words: ClassVar[str] = "the limit of amplitude"
    prefix: ClassVar[str] = "Limit of"

    amplitude: Annotated[Given, Of("displacement", above=0.0)] = Field(examples=["80 µm"])


class PassageClose(ClearanceGiven):
    """A close radial clearance; without a place for a rotor of one mass."""

    needs_place: ClassVar[bool] = False


class PassageCase(Case):
    """A case for ``transient-passage``: one mass, or a rotor by stations."""

    template: Literal["transient-passage"]
    rotor: OneMassRotorGiven | None = None
    stations: StationRotor | None = None
    speeds: Speeds
    unbalance: Unbalance | None = None
    planes: tuple[PlaneGiven, ...] = ()
    probes: tuple[ProbeGiven, ...] = ()
    clearances: tuple[PassageClose, ...] = ()
    passages: tuple[PassageProgramme, ...] = Field(min_length=1)
    limit: AmplitudeLimit | None = None
    sudden_unbalance: SuddenUnbalance | None = None
    modes: int | None = Field(None, ge=1, le=40)
    criteria: tuple[PassageCriterion, ...] = ()

    @model_validator(mode="after")
    def _one_model(self) -> Self:
        if exactly_one(self, "rotor", "stations") == "rotor":
            self._fits_one_mass()
        else:
            self._fits_stations()
        require_unique(
            passages=[p.name for p in self.passages],
            probes=[p.name for p in self.probes],
            clearances=[c.name for c in self.clearances],
            assumptions=[a.id for a in self.assumptions],
        )
        return self

    def _fits_one_mass(self) -> None:
        if self.unbalance is None:
            raise problem("unbalance is missing", "add unbalance:, such as grade: G6.3")
        for name, stated in (("planes", self.planes), ("probes", self.probes)):
            if stated:
                raise problem(f"one mass has no {name}", "take stations:, or leave them out", name)
        for number, clearance in enumerate(self.clearances, 1):
            if clearance.has_place:
                found = f"clearance {number} has a place along the shaft; one mass has none"
                raise problem(found, "leave the place out, or take stations:", "clearances")

    def _fits_stations(self) -> None:
        assert self.stations is not None
        if self.unbalance is not None:
            found = "a rotor by stations has its unbalance in planes"
            raise problem(found, "give planes: in place of unbalance:", "unbalance")
        if not self.planes:
            raise problem("planes are missing", "add planes:, each with a place and an amount")
        for number, clearance in enumerate(self.clearances, 1):
            if not clearance.has_place:
                found = f"clearance {number} has no place"
                raise problem(found, "give station:, position: or on:", "clearances")
        layout = self.stations.layout()
        for key in ("planes", "probes", "clearances"):
            for number, part in enumerate(getattr(self, key), 1):
                layout.require(part, f"{key}[{number}]", key)
        if any(plane.amount is None or plane.share is not None for plane in self.planes):
            raise problem("a plane has no amount", "give the amount of each plane", "planes")
        on = self.sudden_unbalance.on if self.sudden_unbalance else None
        if self.sudden_unbalance and on not in self.stations.names():
            found = f"the sudden unbalance is on {on!r}, which is no part of the rotor"
            remedy = f"give on:, one of {', '.join(self.stations.names())}"
            raise problem(found, remedy, "sudden_unbalance")
