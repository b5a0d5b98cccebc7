"""Entries of an analysis: their rules and their JSON form."""

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from dataclasses import fields as dataclass_fields
from typing import Any

from explorer.scenario.entity import read_fields
from explorer.scenario.errors import ScenarioError, join, listed, shown, unknown
from explorer.scenario.fields import (
    NOTE_LENGTH,
    Field,
    Flag,
    Number,
    Text,
    check_keys,
    object_fault,
    outside,
    span,
)
from explorer.scenario.quantity import UNIT_LENGTH, ordered
from explorer.treatment.analysis import ANALYSIS_KEYS, Measured
from explorer.treatment.units import default_unit, to_base, units_for

TEMPERATURES = (0.0, 60.0)
"""°C; the span of the equilibrium constants."""


@dataclass(frozen=True)
class EntryRule:
    """What an analysis entry may be. ``bounds`` are in the base unit of the quantity."""

    label: str
    bounds: tuple[float | None, float | None] = (0.0, None)
    wrong: str = "is out of range"
    non_detect: bool = True
    read_at: bool = False


ENTRY_RULES: dict[str, EntryRule] = {
    "temperature": EntryRule("Temperature", TEMPERATURES, non_detect=False),
    "ph": EntryRule("pH", (0.0, 14.0), "is not a pH", non_detect=False, read_at=True),
    # An acid water has negative alkalinity.
    "alkalinity": EntryRule("Alkalinity", (None, None)),
    "dic": EntryRule("Dissolved inorganic carbon"),
    "co2": EntryRule("Carbon dioxide", read_at=True),
    "toc": EntryRule("Total organic carbon"),
    "tds": EntryRule("Total dissolved solids"),
    "conductivity": EntryRule("Conductivity", read_at=True),
}
ENTRY_RULES = {
    key: ENTRY_RULES.get(key, EntryRule(key.replace("_", " ").capitalize())) for key in ANALYSIS_KEYS
}
"""Rule of every analysis key, in the order of a laboratory sheet."""

_PARTS: dict[str, Field] = {
    "value": Number(None),
    "below": Number(None, bounds=(0, None)),
    "unit": Text("", limit=UNIT_LENGTH),
    "read_at": Number(None, bounds=TEMPERATURES, unit="°C"),
    "plus_minus": Number(None, bounds=(0, None)),
    "note": Text("", limit=NOTE_LENGTH, lines=True),
    "assumed": Flag(False),
}
_DEFAULTS = {part.name: part.default for part in dataclass_fields(Measured)}


def read_measured(key: str, raw: Any, path: str) -> Measured:
    """Entry ``key`` of an analysis from its JSON form. Raises ScenarioError.

    A key that is not one of the analysis keys may be a user's acid; whether it is, and whether its unit is
    right, is told once the whole scenario is known (:mod:`explorer.scenario.rules`).
    """
    fault = object_fault(raw)
    if fault:
        known = key in ENTRY_RULES
        raise ScenarioError(path, fault if known else unknown(key, "an analysis key", ANALYSIS_KEYS))
    check_keys(raw, _PARTS, path)
    parts = dict(read_fields(_PARTS, raw, path))
    if ("value" in parts) == ("below" in parts):
        state = "both are given" if "value" in parts else "neither value nor below is given"
        raise ScenarioError(path, f"{state}; allowed a value, or the limit it is below")
    measured = Measured(**parts)
    for part, wrong in entry_faults(key, measured):
        raise ScenarioError(join(path, part), wrong)
    return measured


def entry_faults(
    key: str, measured: Measured, acid_units: tuple[str, ...] | None = None
) -> Iterator[tuple[str, str]]:
    """Parts of an entry that break the rule of its key, each with what is wrong and what is allowed.

    acid_units: units of a user's acid, whose rule is that of any dissolved substance. An unknown key breaks
    no rule here.
    """
    rule = ENTRY_RULES.get(key) or (EntryRule(key) if acid_units else None)
    if rule is None:
        return
    units = acid_units or units_for(key)
    if measured.unit not in units:
        missing = f"missing; allowed: {listed(units)}"
        yield (
            "unit",
            unknown(measured.unit, "a unit here", units, similar=False) if measured.unit else missing,
        )
        return
    for part in ("value", "below"):
        number = getattr(measured, part)
        base = number if number is None or acid_units else float(to_base(number, measured.unit, key))
        if base is not None and outside(base, rule.bounds):
            allowed = span(rule.bounds, default_unit(key) if any(rule.bounds) else "")
            entered = f"{shown(number)} {measured.unit}".strip()
            yield part, f"{entered} {rule.wrong}; allowed {allowed}"
    if measured.below is not None and not rule.non_detect:
        yield "below", f"{rule.label} cannot be below a limit of detection; allowed a value"
    if measured.read_at is not None and not rule.read_at:
        readers = (name for name, entry in ENTRY_RULES.items() if entry.read_at)
        yield "read_at", f"{rule.label} has no reading temperature; allowed for: {listed(readers)}"


def write_measured(measured: Measured, written: Iterable[str] = ()) -> dict[str, Any]:
    """JSON form of an entry; ``written`` are the parts that its source wrote out, in that order."""
    written = tuple(written)
    parts = {
        name: getattr(measured, name)
        for name, default in _DEFAULTS.items()
        if name in written or getattr(measured, name) != default
    }
    return ordered(parts, written)
