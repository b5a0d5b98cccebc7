"""A value with its unit, as entered, and the field that holds one."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any

from explorer.scenario.errors import ScenarioError, join, listed, shown, unknown
from explorer.scenario.fields import Value, check_keys, number_fault, object_fault, outside, span, text_fault
from explorer.treatment.units import default_unit, to_base, units_for

UNIT_LENGTH = 40

DOSE = "dose"
"""Quantity whose units depend on the chemical: checked where the chemical is known."""


@dataclass(frozen=True)
class Quantity:
    """A value in its entered unit. ``written`` is the order of the parts in the file it came from."""

    value: float
    unit: str
    written: tuple[str, ...] = field(default=("value", "unit"), compare=False, repr=False)


def ordered(parts: Mapping[str, Any], written: Iterable[str]) -> dict[str, Any]:
    """``parts`` in the order of ``written``, any others after them in their own order."""
    return {key: parts[key] for key in written if key in parts} | dict(parts)


def unit_fault(unit: Any, quantity: str) -> str:
    """What is wrong with the unit of a quantity; of a dose only that it is text can be told here."""
    if quantity == DOSE:
        return text_fault(unit, UNIT_LENGTH)
    allowed = units_for(quantity)
    return (
        ""
        if isinstance(unit, str) and unit in allowed
        else unknown(unit, "a unit here", allowed, similar=False)
    )


class Amount(Value):
    """A Quantity: value within bounds (in the base unit of ``quantity``), unit one of that quantity."""

    __slots__ = ["bounds", "quantity", "step"]
    _slot_defaults = Value._slot_defaults | {"quantity": DOSE, "bounds": (0, None), "step": None}

    @property
    def units(self) -> tuple[str, ...]:
        """Allowed units, the default first; none for a dose, whose units belong to its chemical."""
        return () if self.quantity == DOSE else units_for(self.quantity)

    @property
    def _base_unit(self) -> str:
        return (
            "" if self.quantity == DOSE or self.bounds in ((0, None), None) else default_unit(self.quantity)
        )

    @property
    def allowed(self) -> str:
        units = f" and one of the units {listed(self.units)}" if self.units else " and a unit"
        return f"a value of {span(self.bounds, self._base_unit)}{units}"

    def value_fault(self, value: Any, unit: str) -> str:
        """What is wrong with the number alone."""
        allowed = span(self.bounds, self._base_unit)
        fault = number_fault(value, allowed)
        if fault or self.bounds is None:
            return fault
        base = value if self.quantity == DOSE else float(to_base(value, unit, self.quantity))
        return (
            f"{shown(value)} {unit} is out of range; allowed {allowed}" if outside(base, self.bounds) else ""
        )

    def fault(self, value: Any) -> str:
        if not isinstance(value, Quantity):
            return f"{shown(value)} is not a value with a unit; allowed {self.allowed}"
        return unit_fault(value.unit, self.quantity) or self.value_fault(value.value, value.unit)

    def read(self, raw: Any, path: str) -> Quantity:
        if object_fault(raw):
            raise ScenarioError(path, f"{shown(raw)} is not a value with a unit; allowed {self.allowed}")
        check_keys(raw, ("value", "unit"), path)
        for key in ("value", "unit"):
            if raw.get(key) is None:
                raise ScenarioError(join(path, key), f"missing; allowed {self.allowed}")
        if wrong := unit_fault(raw["unit"], self.quantity):
            raise ScenarioError(join(path, "unit"), wrong)
        if wrong := self.value_fault(raw["value"], raw["unit"]):
            raise ScenarioError(join(path, "value"), wrong)
        return Quantity(raw["value"], raw["unit"], tuple(raw))

    def write(self, value: Quantity) -> dict[str, Any]:
        return ordered({"value": value.value, "unit": value.unit}, value.written)
