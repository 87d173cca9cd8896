"""Many one-mass rotors of a case judged at once, by the rules of its assessment."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.case.changes import Place, value_at
from reportgen.criteria.outcome import ROUNDING
from reportgen.rotor.onemass_many import Floats, ManyRotors, Values, ratio_from_decrement
from reportgen.units import parse_quantity

MEETS, FAILS, OPEN = 1, 0, -1
Verdicts = NDArray[np.int8]
Judged = tuple[Floats, Verdicts]
_OF_PEAK = {"0-peak": 1.0, "peak-to-peak": 2.0, "r.m.s.": math.sqrt(0.5)}
_RESULTS = ("natural-frequency", "critical-speed", "amplification-factor", "amplitude-peak",
            "ground-force", "sag", "instability-onset")  # fmt: skip


def uncovered(resolved: Mapping[str, Any]) -> str:
    """Say why a case cannot be judged at once; empty where it can."""
    rotor = resolved["rotor"]
    if rotor["support"] is not None:
        return "its supports are flexible"
    if rotor["bow"] is not None:
        return "its shaft has a bow"
    if resolved["passages"] and rotor["internal_damping"] is not None:
        return "a passage with internal damping has no closed form"
    for criterion in resolved["criteria"]:
        name = criterion.get("result", "")
        known = name in _RESULTS or name.startswith("amplitude-")
        if criterion["kind"] == "project limit" and not known:
            return f"a limit is set on {name}"
    return ""


class Many:
    """The rotors of a case with arrays in place of what varies.

    Parameters
    ----------
    resolved
        The case.
    columns
        Values in SI, shape (n,), by their places in the case.
    """

    def __init__(self, resolved: Mapping[str, Any], columns: Mapping[Place, Floats]) -> None:
        self.resolved, self.columns = resolved, columns
        self.count = len(next(iter(columns.values())))
        self.speeds = {
            name.replace("_", " "): value
            for name in ("minimum", "rated", "maximum_continuous", "trip")
            if (value := self.at("speeds", name)) is not None
        }
        rated = self.speeds["rated"]
        self.low = self.speeds.get("minimum", rated)
        self.high = self.speeds.get("maximum continuous", rated)
        mass = self.need("rotor", "mass")
        stiffness = self._stiffness()
        self.rotors = ManyRotors(
            mass=mass,
            stiffness=stiffness,
            damping_ratio=self._damping_ratio(mass, stiffness),
            eccentricity=self._eccentricity(mass),
            internal_damping=self.or_zero("rotor", "internal_damping"),
        )

    def at(self, *place: str | int) -> Values | None:
        """Return the values at a place, a number where it does not vary, None for nothing."""
        if place in self.columns:
            return self.columns[place]
        given = value_at(self.resolved, place)
        return None if given is None else float(given["si"])

    def need(self, *place: str | int) -> Values:
        """Return the values at a place that the case states."""
        value = self.at(*place)
        if value is None:
            raise ValueError(f"nothing stands at {place}")
        return value

    def or_zero(self, *place: str | int) -> Values:
        """Return the values at a place, 0 for nothing."""
        value = self.at(*place)
        return 0.0 if value is None else value

    def _stiffness(self) -> Values:
        stated = self.at("rotor", "stiffness")
        if stated is not None:
            return stated
        shaft = ("rotor", "shaft")
        outer, inner = self.need(*shaft, "outer_diameter"), self.or_zero(*shaft, "inner_diameter")
        rigidity = self.need(*shaft, "modulus") * math.pi / 64.0 * (outer**4 - inner**4)
        support = value_at(self.resolved, (*shaft, "support"))
        if support == "built in at one end":
            return 3.0 * rigidity / self.need(*shaft, "position") ** 3
        span = self.need(*shaft, "span")
        if support == "overhung beyond two bearings":
            a = self.need(*shaft, "overhang")
            return 3.0 * rigidity / (a**2 * (span + a))
        a = self.need(*shaft, "position")
        b = span - a
        if support == "simply supported":
            return 3.0 * rigidity * span / (a**2 * b**2)
        return 3.0 * rigidity * span**3 / (a**3 * b**3)

    def _damping_ratio(self, mass: Values, stiffness: Values) -> Values:
        damping = ("rotor", "damping")
        if (ratio := self.at(*damping, "ratio")) is not None:
            return ratio
        if (decrement := self.at(*damping, "logarithmic_decrement")) is not None:
            return ratio_from_decrement(decrement)
        if (factor := self.at(*damping, "amplification_factor")) is not None:
            return 0.5 / factor
        return 0.5 * self.need(*damping, "coefficient") / np.sqrt(stiffness * mass)

    def _eccentricity(self, mass: Values) -> Values:
        if (stated := self.at("unbalance", "eccentricity")) is not None:
            return stated
        if (amount := self.at("unbalance", "amount")) is not None:
            return amount / mass
        return self.need("unbalance", "grade") / self.high

    def judge(self) -> list[Judged]:
        """Return margin and verdict of every criterion, in the order of the assessment."""
        out: list[Judged] = []
        for criterion in self.resolved["criteria"]:
            match criterion["kind"]:
                case "separation margin":
                    out.append(self._separation(criterion))
                case "amplitude at speed":
                    out.append(self._amplitude(criterion))
                case "passage clearance":
                    out += self._passages(criterion)
                case "balance grade":
                    out.append(self._balance(criterion))
                case "stability":
                    out.append(self._stability(criterion))
                case "project limit":
                    out.append(self._project(criterion))
        return out

    def _separation(self, criterion: Mapping[str, Any]) -> Judged:
        speed = self.rotors.peak_speed()
        below = speed < self.low * (1.0 - ROUNDING)
        above = speed > self.high * (1.0 + ROUNDING)
        kept = np.where(
            below,
            (self.low - speed) / self.low,
            np.where(above, (speed - self.high) / self.high, 0.0),
        )
        unsure = np.zeros(np.shape(speed), bool)
        if criterion["rule"] == "flat":
            asked = np.full(np.shape(speed), float(criterion["margin"]["si"]))
            excused = unsure
        else:
            factor = self.rotors.amplification()
            unsure = np.isnan(factor)
            base = 0.17 * (1.0 - 1.0 / (np.where(factor < 2.5, 2.5, factor) - 1.5))
            asked = np.where(below, np.minimum(base, 0.16), np.minimum(0.10 + base, 0.26))
            excused = factor < 2.5
            asked = np.where(excused, 0.0, asked)
            asked = np.where(unsure, np.where(below, 0.16, 0.26), asked)
        trip = self.speeds.get("trip", self.high)
        beyond = np.where(above, (trip - self.high) / self.high, 0.0)
        asked = np.where(excused & ~unsure, asked, np.maximum(asked, beyond))
        strictly = ~excused & ((~below & ~above) | (asked == beyond))
        margin, verdict = judged(kept, asked, at_least=True, strictly=strictly)
        # without a factor only what lies within the range or beyond the largest margin is known
        known = ~unsure | (~below & ~above) | (kept >= asked * (1.0 - ROUNDING))
        return keep(margin, verdict, known & ~np.isnan(speed))

    def _amplitude(self, criterion: Mapping[str, Any]) -> Judged:
        if criterion["at"] == "rated":
            size = self.rotors.amplitude(self.speeds["rated"])
        else:
            size = self.rotors.largest_amplitude(self.low, self.high)
        return judged(size * _OF_PEAK[criterion["measure"]], self._limit(criterion["limit"]))

    def _limit(self, given: Mapping[str, Any]) -> Floats:
        return np.full(self.count, float(given["si"]))

    def _passages(self, criterion: Mapping[str, Any]) -> list[Judged]:
        if not self.resolved["passages"]:
            return [self._nothing()]
        sag: Values = 0.0
        if self.resolved["machine"]["orientation"] == "horizontal":
            sag = self.rotors.sag()
        out = []
        for number in range(len(self.resolved["passages"])):
            at = ("passages", number)
            clearance = self.at(*at, "clearance")
            if clearance is None:
                out.append(self._nothing())
                continue
            top, crossed = self.rotors.passage(
                self.need(*at, "from_"), self.need(*at, "to"), self.need(*at, "acceleration")
            )
            used = top + sag + self.or_zero(*at, "runout")
            found = judged(used, float(criterion["share"]["si"]) * clearance)
            out.append(keep(*found, np.broadcast_to(crossed > 0.0, found[0].shape)))
        return [self._spread(one) for one in out]

    def _spread(self, one: Judged) -> Judged:
        return np.broadcast_to(one[0], (self.count,)), np.broadcast_to(one[1], (self.count,))

    def _nothing(self) -> Judged:
        return np.full(self.count, np.nan), np.full(self.count, OPEN, np.int8)

    def _balance(self, criterion: Mapping[str, Any]) -> Judged:
        allowed = float(criterion["grade"]["si"]) * self.rotors.mass / self.high
        return self._spread(judged(self.rotors.mass * self.rotors.eccentricity, allowed))

    def _stability(self, criterion: Mapping[str, Any]) -> Judged:
        if self.at("rotor", "internal_damping") is None:
            return self._nothing()
        margin = float(criterion["margin"]["si"]) if criterion["margin"] else 0.0
        highest: Values = 0.0
        for speed in self.speeds.values():
            highest = np.maximum(highest, speed)
        strictly = np.full(self.count, margin == 0.0)
        found = judged(
            self.rotors.onset(), (1.0 + margin) * highest, at_least=True, strictly=strictly
        )
        return self._spread(found)

    def _project(self, criterion: Mapping[str, Any]) -> Judged:
        name = criterion["result"]
        value, quantity, measure = self._result(name)
        limit = parse_quantity(criterion["limit"], quantity).si
        if measure and criterion["measure"]:
            value = value * _OF_PEAK[criterion["measure"]]
        at_least = criterion["sense"] == "at least"
        found = judged(value, np.full(self.count, limit), at_least=at_least)
        return keep(*found, ~np.isnan(value) & ~np.isinf(value))

    def _result(self, name: str) -> tuple[Floats, str, bool]:
        """Return a result's values, its quantity, and whether it is an amplitude."""
        rotors, rated = self.rotors, self.speeds["rated"]
        match name:
            case "natural-frequency":
                value, quantity, measure = rotors.natural_frequency, "speed", False
            case "critical-speed":
                value, quantity, measure = rotors.peak_speed(), "speed", False
            case "amplification-factor":
                value, quantity, measure = rotors.amplification(), "ratio", False
            case "amplitude-peak":
                value, quantity, measure = rotors.peak_amplitude(), "displacement", True
            case "ground-force":
                value, quantity, measure = rotors.ground_force(rated), "force", True
            case "sag":
                value, quantity, measure = rotors.sag(), "displacement", False
            case "instability-onset":
                value, quantity, measure = rotors.onset(), "speed", False
            case _:
                speed = self.speeds[name.removeprefix("amplitude-").replace("-", " ")]
                value, quantity, measure = rotors.amplitude(speed), "displacement", True
        return np.broadcast_to(np.asarray(value, float), (self.count,)), quantity, measure


def judged(
    value: Values, limit: Values, *, at_least: bool = False, strictly: Any = False
) -> Judged:
    """Return margins (share of the limit left) and verdicts, as a single limit is judged."""
    room = np.asarray(value - limit if at_least else limit - value, float)
    size = np.abs(np.asarray(limit, float))
    room = np.where(np.abs(room) <= ROUNDING * size, 0.0, room)
    met = (room > 0.0) | ((room == 0.0) & ~np.asarray(strictly, bool))
    with np.errstate(divide="ignore", invalid="ignore"):
        margin = np.where(size > 0.0, room / size, np.nan)
    return margin, np.where(met, MEETS, FAILS).astype(np.int8)


def keep(margin: Floats, verdict: Verdicts, known: NDArray[np.bool_]) -> Judged:
    """Return margins and verdicts with what is not known left open."""
    return np.where(known, margin, np.nan), np.where(known, verdict, OPEN).astype(np.int8)
