"""A given: one quantity as the case states it, with its source, tolerance and status."""

from __future__ import annotations

import operator
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, Literal

from pydantic import BaseModel, ConfigDict, GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import CoreSchema, core_schema

from reportgen.case.nodes import MapNode, ShortNode, TextNode
from reportgen.case.reading import Reading, already, described, fault, nearest
from reportgen.units import QUANTITIES, Parsed, UnitError, parse_quantity, show

Status = Literal["confirmed", "preliminary"]
Distribution = Literal["uniform", "normal", "none"]
STATUSES = ("confirmed", "preliminary")
DISTRIBUTIONS = ("uniform", "normal", "none")
_KEYS = ("value", "source", "tolerance", "distribution", "status")
_LONGEST_SOURCE = 500


class Tolerance(BaseModel):
    """How far a given may lie off its value, either side.

    Attributes
    ----------
    as_given
        As it stands in the case.
    relative
        Share of the value; None where an amount is stated.
    si
        Amount in SI; None where a share is stated.
    """

    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False)

    as_given: str
    relative: float | None = None
    si: float | None = None


class Given(BaseModel):
    """A quantity that the case states; ``float(given)`` is its value in SI.

    Attributes
    ----------
    si
        Value in SI.
    unit
        Its SI unit.
    quantity
        Key of :data:`reportgen.units.QUANTITIES`.
    as_given
        Number and unit as they stand in the case.
    source
        Where it is from; empty where the case does not say.
    tolerance
        None where none is stated.
    distribution
        How it is spread within its tolerance; ``none`` where no tolerance is stated.
    status
        ``confirmed`` or ``preliminary``.
    """

    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False)

    si: float
    unit: str
    quantity: str
    as_given: str
    source: str = ""
    tolerance: Tolerance | None = None
    distribution: Distribution = "none"
    status: Status = "confirmed"

    def __float__(self) -> float:
        return self.si

    @property
    def half_width(self) -> float:
        """Tolerance to either side in SI, 0 where none is stated."""
        if self.tolerance is None:
            return 0.0
        if self.tolerance.si is not None:
            return self.tolerance.si
        return abs(self.si) * (self.tolerance.relative or 0.0)

    @property
    def tolerance_text(self) -> str:
        """Tolerance as printed, empty where none is stated."""
        return f"± {self.tolerance.as_given}" if self.tolerance else ""


@dataclass(frozen=True)
class Of:
    """What a given must be: its quantity and, in SI, what its value may be.

    Parameters
    ----------
    quantity
        Key of :data:`reportgen.units.QUANTITIES`; empty where the case states it itself.
    above, at_least, below, at_most
        Limits in SI.
    because
        Why there is a limit; printed with the error.
    """

    quantity: str
    above: float | None = None
    at_least: float | None = None
    below: float | None = None
    at_most: float | None = None
    because: str = ""

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        return core_schema.with_info_before_validator_function(self._read, handler(Given))

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return given_schema(self.quantity)

    def _read(self, data: Any, info: core_schema.ValidationInfo) -> Any:
        reading = info.context
        if isinstance(data, Given):
            return data
        if not isinstance(reading, Reading):
            given = Given.model_validate(data)
            self._judge(given, data, reading)
            return given
        return read_given(data, self.quantity, reading, self._judge)

    def _judge(self, given: Given, node: Any, reading: Any) -> None:
        """Refuse a value outside the limits, and a tolerance that reaches outside them."""
        if self.quantity and given.quantity != self.quantity:
            raise fault(reading, node, f"{given.quantity} given", f"give {self.quantity}", "value")
        words = QUANTITIES[given.quantity].words
        if (limit := self._broken(given.si)) is not None:
            raise fault(
                reading,
                node,
                f"{words} of {given.as_given} is not {limit}",
                self.because or f"give {words} {limit}",
                "value",
            )
        for end in (given.si - given.half_width, given.si + given.half_width):
            if (limit := self._broken(end)) is not None:
                raise fault(
                    reading,
                    node,
                    f"with the tolerance {given.tolerance_text} the value {given.as_given} "
                    f"may be one that is not {limit}",
                    "give a smaller tolerance",
                    "tolerance",
                )

    def _broken(self, value: float) -> str | None:
        """Return the limit that a value does not keep, in words."""
        checks = (
            ("above", self.above, operator.gt),
            ("at least", self.at_least, operator.ge),
            ("below", self.below, operator.lt),
            ("at most", self.at_most, operator.le),
        )
        for words, limit, keeps in checks:
            if limit is not None and not keeps(value, limit):
                return f"{words} {'zero' if limit == 0 else show(limit, self.quantity, 'si')}"
        return None


def given_schema(quantity: str) -> dict[str, Any]:
    """Return the JSON Schema of a given as a case file states it."""
    words = QUANTITIES[quantity].words if quantity else "a quantity"
    examples = list(QUANTITIES[quantity].examples) if quantity else []
    # only a pure number stands without a unit
    kind = ["string", "number"] if quantity in ("", "ratio") else "string"
    value: dict[str, Any] = {"type": kind, "minLength": 1, "maxLength": 80}
    value["description"] = (
        f"{words} with its unit, one of {', '.join(examples)}"
        if examples
        else ("a quantity with its unit")
    )
    properties = {
        "value": value,
        "source": {"type": "string", "maxLength": _LONGEST_SOURCE},
        "tolerance": {"type": kind, "description": "a share such as 2 %, or an amount"},
        "distribution": {"enum": list(DISTRIBUTIONS)},
        "status": {"enum": list(STATUSES)},
    }
    whole: dict[str, Any] = {
        "type": "object",
        "properties": properties,
        "required": ["value"],
        "additionalProperties": False,
    }
    if not quantity:
        properties["quantity"] = {"enum": sorted(QUANTITIES)}
        whole["required"] = ["value", "quantity"]
        return whole
    return {"anyOf": [value, whole]}


def read_given(
    data: Any,
    quantity: str,
    reading: Reading,
    judge: Callable[[Given, MapNode, Reading], None] | None = None,
) -> Given:
    """Return a given from its node, a text or a mapping.

    Raises
    ------
    PydanticCustomError
        If something is wrong with it; every problem is then in ``reading``.
    """
    if isinstance(data, TextNode):
        data = ShortNode.of(data)
    if not isinstance(data, MapNode):
        example = QUANTITIES[quantity].examples[0] if quantity else "unit"
        remedy = f"write {_an(quantity)}, such as 'value {example}'"
        raise fault(reading, data, f"found {described(data)}", remedy)
    before = len(reading.problems)
    known = _KEYS if quantity else (*_KEYS, "quantity")
    for key in data:
        if key not in known:
            near = nearest(key, known)
            remedy = f"did you mean {near!r}?" if near else f"give one of {', '.join(known)}"
            fault(reading, _at_key(data, key), f"the key {key!r} is not known here", remedy)
    if not quantity:
        quantity = _choice(data, "quantity", tuple(QUANTITIES), reading) or ""
        if not quantity:
            if "quantity" not in data:
                fault(reading, data, "the quantity is missing", "write quantity: mass, or another")
            raise already()
    fields: dict[str, Any] = {"quantity": quantity}
    parsed = _value(data, quantity, reading)
    if parsed is not None:
        fields |= {
            "si": parsed.si,
            "unit": parsed.unit,
            "as_given": " ".join(data["value"].split()),
        }
    fields["source"] = _source(data, reading)
    fields["status"] = _choice(data, "status", STATUSES, reading) or "confirmed"
    distribution = _choice(data, "distribution", DISTRIBUTIONS, reading)
    if data.get("tolerance") is not None and parsed is not None:
        fields["tolerance"] = _tolerance(data, quantity, parsed, reading)
        fields["distribution"] = distribution or "uniform"
    elif distribution not in (None, "none") and data.get("tolerance") is None:
        fault(reading, data, "a distribution without a tolerance", "add tolerance:", "distribution")
    if len(reading.problems) > before:
        raise already()
    given = Given.model_validate(fields)
    if judge is not None:
        judge(given, data, reading)
    return given


def _an(quantity: str) -> str:
    return QUANTITIES[quantity].words + " with its unit" if quantity else "a quantity"


def _at_key(data: MapNode, key: str) -> MapNode:
    return MapNode(data.child(key), data.key_marks.get(key, data.mark))


def _value(data: MapNode, quantity: str, reading: Reading) -> Parsed | None:
    value = data.get("value")
    example = QUANTITIES[quantity].examples[0]
    if not isinstance(value, TextNode):
        found = "the value is missing" if value is None else f"found {described(value)}"
        fault(reading, data, found, f"write {_an(quantity)}, such as value: 1 {example}", "value")
        return None
    try:
        return parse_quantity(value, quantity)
    except UnitError as error:
        fault(reading, data, error.found, error.remedy, "value")
        return None


def _source(data: MapNode, reading: Reading) -> str:
    source = data.get("source")
    if source is None:
        return ""
    if not isinstance(source, TextNode):
        fault(reading, data, f"found {described(source)}", "write the source as a text", "source")
        return ""
    if len(source) > _LONGEST_SOURCE:
        found = f"a source of {len(source)} characters"
        fault(reading, data, found, f"give at most {_LONGEST_SOURCE}", "source")
        return ""
    return " ".join(source.split())


def _choice(data: MapNode, key: str, choices: tuple[str, ...], reading: Reading) -> str | None:
    value = data.get(key)
    if value is None or (isinstance(value, TextNode) and value in choices):
        return None if value is None else str(value)
    near = nearest(value, choices) if isinstance(value, TextNode) else ""
    remedy = f"did you mean {near!r}?" if near else f"give one of {', '.join(choices)}"
    fault(reading, data, f"found {described(value)}", remedy, key)
    return None


def _tolerance(data: MapNode, quantity: str, parsed: Parsed, reading: Reading) -> Tolerance | None:
    """Return the tolerance: a percentage is a share of the value, anything else an amount."""
    text = data["tolerance"]
    if not isinstance(text, TextNode):
        fault(reading, data, f"found {described(text)}", "write 2 %, or an amount", "tolerance")
        return None
    bare = str(text).strip().removeprefix("±").removeprefix("+/-").strip()
    try:
        if bare.endswith("%"):
            share = parse_quantity(bare, "percent").si
            if not 0 < share < 1:
                raise UnitError(f"{str(text)!r} is not between 0 and 100 %", "give a smaller share")
            return Tolerance(as_given=bare, relative=share)
        amount = parse_quantity(bare, quantity).si
        # a difference: the zero of the unit (degrees Celsius) falls out of it
        amount -= parse_quantity(f"0 {parsed.given_unit}".strip(), quantity).si
        if amount <= 0:
            raise UnitError(f"a tolerance of {bare!r} is not above zero", "leave it out if exact")
    except UnitError as error:
        fault(reading, data, error.found, error.remedy, "tolerance")
        return None
    return Tolerance(as_given=bare, si=amount)
