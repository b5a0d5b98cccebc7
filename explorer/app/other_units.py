"""Showing an entry in another unit: the number changes, the water does not.

The number is converted without rounding. What was entered is remembered, so that changing the unit back shows
it again digit for digit; it is forgotten as soon as the entry is changed in any other way. Whatever else is
stated in the unit of the entry is converted with it: its tolerance, a sweep over it, the limits of its hold.
"""

from collections.abc import Callable
from dataclasses import replace
from typing import Any

from explorer.scenario.model import Measured, Scenario
from explorer.treatment.units import Units, from_base, to_base

Conversion = Callable[[float], float]
"""From a number in the old unit to the number in the new one."""


class Originals:
    """Entries as they were before their unit was changed, by field key."""

    def __init__(self) -> None:
        self._kept: dict[str, tuple[Any, Any]] = {}

    def of(self, key: str, now: Any) -> Any:
        """What was entered for what stands there ``now``: that itself, unless only its unit was changed."""
        original, converted = self._kept.get(key, (now, now))
        return original if converted == now else now

    def keep(self, key: str, original: Any, converted: Any) -> None:
        """Remember that ``converted`` stands for ``original``."""
        self._kept[key] = original, converted


def conversion(quantity: str | Units, old: str, new: str) -> Conversion:
    """Between two units of a quantity."""
    return lambda number: float(from_base(to_base(number, old, quantity), new, quantity))


def width_of(convert: Conversion) -> Conversion:
    """The same for the width of an interval: a zero point, as that of °F, does not come in."""
    zero = convert(0.0)
    return lambda width: convert(width) - zero


def in_unit(measured: Measured, unit: str, quantity: str | Units) -> Measured:
    """The same measurement in another unit: value, limit and half-width."""
    convert = conversion(quantity, measured.unit, unit)
    return replace(
        measured, unit=unit, value=_each(convert, measured.value), below=_each(convert, measured.below),
        plus_minus=_each(width_of(convert), measured.plus_minus),
    )  # fmt: skip


def take_along(scenario: Scenario, address: str, convert: Conversion) -> None:
    """Convert what is stated in the unit of a dial, in place, when that changes: tolerance, sweep, hold."""
    sweep = scenario.sweep
    if sweep is not None and sweep.dial == address:
        sweep.start, sweep.stop = convert(sweep.start), convert(sweep.stop)
    hold = scenario.holds.get(address)
    if hold is not None:
        hold.low, hold.high = _each(convert, hold.low), _each(convert, hold.high)
    tolerance = scenario.tolerances.get(address)
    if tolerance is not None and tolerance.unit != "%":
        width = width_of(convert)
        tolerance.unit = ""
        for side in ("plus_minus", "minus", "plus"):
            setattr(tolerance, side, _each(width, getattr(tolerance, side)))


def _each(convert: Conversion, number: float | None) -> float | None:
    return None if number is None else convert(number)
