"""From the entries of an analysis to conserved totals.

The pH that the laboratory read and one of alkalinity, DIC and CO2 (or any other two of the four) fix the
carbonate system at the temperature of the reading. From there on only the totals and the water's own
temperature matter, so the pH moves with temperature by itself. A charge balance that does not close stays
open: it never leaks into the pH.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

import numpy as np
from numpy.typing import ArrayLike

from explorer.chemistry import System
from explorer.chemistry.carbonate import complete
from explorer.treatment.analysis.measured import ANALYSIS_KEYS, CARBONATE_KEYS, AnalysisError, Measured
from explorer.treatment.notes import Note
from explorer.treatment.units import UnitError, Units, find_unit, from_base, substance_units

CLOSING_IONS: dict[str, float] = {"sodium": 1.0, "chloride": -1.0}
"""Ions that may close the charge balance when asked, with their charge; conservative, so the pH stays."""

AGREEMENT: dict[str, float] = {"alkalinity": 0.05, "dic": 0.10, "co2": 0.20, "total_hardness": 0.05}
"""Relative difference beyond which a redundant entry contradicts the others (common practice)."""

ASSUMED = "assumed, not measured"
"""What is noted of an assumed entry."""

READING_TEMPERATURE = "reading_temperature"
"""Key of the alarm for a pH that does not say at which temperature it was read."""

_RANGES: dict[str, tuple[float, float, str]] = {
    "temperature": (0.0, 60.0, "0 to 60 °C"),
    "ph": (0.0, 14.0, "0 to 14"),
    # Acid waters have less than none.
    "alkalinity": (-np.inf, np.inf, "any number"),
}
_NOT_NEGATIVE = (0.0, np.inf, "0 or more")
"""Range of an entry in base units, and the same in words."""

_ROW = {"toc": "organic_carbon"}
_NOT_A_TOTAL = {"temperature", "ph", "co2", "total_hardness", "tds", "conductivity"}
_CLOSING_PASSES = 4


@dataclass(frozen=True, eq=False)
class Intake:
    """A water ready for blending.

    totals: (n, *shape) in mol/L (alkalinity eq/L). temperature: °C, (*shape). possible: (*shape), False
    where no water has the entered values. notes: what was assumed or looks wrong.
    """

    totals: np.ndarray
    temperature: np.ndarray
    possible: np.ndarray
    notes: list[Note] = field(default_factory=list)


def entry_units(key: str, system: System) -> str | Units:
    """The quantity, or for an acid of the user the table of units, that an analysis key is measured in.

    Raises AnalysisError for a key that neither is nor names an acid of the system.
    """
    if key in ANALYSIS_KEYS:
        return key
    for acid in system.acids:
        if acid.id == key:
            return substance_units(acid.molar_mass)
    allowed = ", ".join([*ANALYSIS_KEYS, *(acid.id for acid in system.acids)])
    raise AnalysisError(key, f"there is no such entry in an analysis; allowed: {allowed}")


def analysis_totals(
    entries: Mapping[str, Measured],
    system: System,
    *,
    close_with: str = "none",
    overrides: Mapping[str, ArrayLike] = MappingProxyType({}),
) -> Intake:
    """Conserved totals of a water from its analysis.

    entries: by analysis key. close_with: ``none``, ``sodium`` or ``chloride``, the one ion adjusted so that
    the charges balance. overrides: values that replace entries, in the unit of the entry; arrays broadcast
    together and give the shape of the result. The reading temperature of the pH, where it is not stated, is
    the entered temperature of the water: turning the temperature warms the water, it does not re-read the pH.

    Non-detects count as half their limit (common practice); ions that are absent count as zero.
    Raises AnalysisError naming the entry.
    """
    if close_with != "none" and close_with not in CLOSING_IONS:
        allowed = ", ".join(["none", *CLOSING_IONS])
        raise AnalysisError("close_with", f"'{close_with}' cannot close a balance; allowed: {allowed}")
    amounts, notes = _read(entries, system, overrides)
    _hardness(amounts, entries, notes)
    shape = np.broadcast_shapes(*(amount.shape for amount in amounts.values()))
    totals = system.zeros(shape)
    usable = _in_range(amounts, shape, notes)
    for key, amount in amounts.items():
        if key not in _NOT_A_TOTAL:
            totals[system.index[_ROW.get(key, key)]] = amount
    pair = [key for key in CARBONATE_KEYS if key in amounts][:2]
    reading = _reading_temperature(pair, entries, notes)
    fixed = {key: amounts[key] for key in pair}

    def completed(totals: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        return complete(system, totals, reading, **fixed)

    totals, consistent = completed(totals)
    if np.any(usable & ~consistent):
        notes.append(_contradiction(pair, usable & ~consistent))
    possible = consistent & usable
    temperature = np.broadcast_to(amounts["temperature"], shape)
    if close_with != "none" and possible.any():
        totals, closed = _close(totals, temperature, system, close_with, completed, notes)
        possible = possible & closed
    _compare_redundant(amounts, pair, totals, reading, system, notes)
    return Intake(totals, temperature, possible, notes)


def _read(
    entries: Mapping[str, Measured], system: System, overrides: Mapping[str, ArrayLike]
) -> tuple[dict[str, np.ndarray], list[Note]]:
    """Every entry in base units, checked; with notes on what was assumed."""
    amounts: dict[str, np.ndarray] = {}
    notes: list[Note] = []
    for key in overrides:
        if key not in entries:
            raise AnalysisError(key, "is not in this analysis and cannot be changed")
    for key, entry in entries.items():
        quantity = entry_units(key, system)
        try:
            unit = find_unit(entry.unit, quantity)
        except UnitError as error:
            raise AnalysisError(key, str(error)) from None
        central = float(unit.to_base(entry.central))
        _check_range(key, entry, central)
        amounts[key] = unit.to_base(overrides[key]) if key in overrides else np.asarray(central)
        if entry.below is not None and key not in overrides:
            notes.append(Note("info", key, f"below {entry.below:g} {entry.unit}: half the limit is used"))
        if entry.assumed:
            notes.append(Note("info", key, ASSUMED))
    if "temperature" not in amounts:
        raise AnalysisError("temperature", "the temperature of the water is missing")
    given = [key for key in CARBONATE_KEYS if key in amounts]
    if len(given) < 2:
        have = f"only {given[0]} is given" if given else "none is given"
        missing = next(key for key in ("ph", "alkalinity") if key not in given)
        raise AnalysisError(missing, f"two of ph, alkalinity, dic and co2 fix the carbonate system; {have}")
    return amounts, notes


def _check_range(key: str, entry: Measured, amount: float) -> None:
    entered = f"{entry.central:g} {entry.unit}".strip()
    if not np.isfinite(amount):
        raise AnalysisError(key, "is not a finite number")
    low, high, allowed = _RANGES.get(key, _NOT_NEGATIVE)
    if not low <= amount <= high:
        what = {"ph": "is not a pH", "temperature": "is out of range"}.get(key, "is negative")
        raise AnalysisError(key, f"{entered} {what}; allowed {allowed}")
    if entry.read_at is not None and key in ("ph", "co2"):
        coldest, warmest, allowed = _RANGES["temperature"]
        if not coldest <= entry.read_at <= warmest:
            raise AnalysisError(key, f"read at {entry.read_at:g} °C is out of range; allowed {allowed}")


def _in_range(amounts: Mapping[str, np.ndarray], shape: tuple[int, ...], notes: list[Note]) -> np.ndarray:
    """Points at which every amount is one a water can have; the others are noted by entry."""
    usable = np.ones(shape, bool)
    for key, amount in amounts.items():
        low, high, allowed = _RANGES.get(key, _NOT_NEGATIVE)
        outside = ~((amount >= low) & (amount <= high))
        if outside.any():
            notes.append(Note("error", key, f"is out of range; allowed {allowed}{_points(outside)}"))
            usable &= ~outside
    return usable


def _hardness(amounts: dict[str, np.ndarray], entries: Mapping[str, Measured], notes: list[Note]) -> None:
    """Calcium or magnesium from the total hardness and the other; all three are checked."""
    if "total_hardness" not in amounts:
        return
    hardness = amounts["total_hardness"]
    present = [key for key in ("calcium", "magnesium") if key in amounts]
    if not present:
        raise AnalysisError("total_hardness", "does not say how calcium and magnesium share it; enter one")
    if len(present) == 2:
        both = amounts["calcium"] + amounts["magnesium"]
        if np.any(np.abs(both - hardness) > AGREEMENT["total_hardness"] * hardness):
            unit = entries["total_hardness"].unit
            shown = _span(from_base(both, unit, "total_hardness"))
            text = f"calcium and magnesium add up to {shown} {unit}, not to this value"
            notes.append(Note("caution", "total_hardness", text))
        return
    known = present[0]
    sought = "magnesium" if known == "calcium" else "calcium"
    rest = hardness - amounts[known]
    if np.all(rest < 0):
        raise AnalysisError("total_hardness", f"is less than the {known} alone; check the unit of both")
    amounts[sought] = rest
    notes.append(Note("info", sought, f"total hardness less {known}"))


def _reading_temperature(pair: list[str], entries: Mapping[str, Measured], notes: list[Note]) -> float:
    """Temperature [°C] at which the carbonate readings hold."""
    water = entries["temperature"]
    for key in ("ph", "co2"):
        if key in pair:
            if entries[key].read_at is not None:
                return entries[key].read_at
            if key == "ph":
                entered = f"{water.central:g} {water.unit}"
                text = (
                    f"reading temperature not given: {entered}, that of the water, is used;"
                    " enter the one at which the pH was read"
                )
                notes.append(Note("caution", key, text, READING_TEMPERATURE, "common practice"))
            break
    return float(find_unit(water.unit, "temperature").to_base(water.central))


_IMPOSSIBLE = {
    ("ph", "alkalinity"): "at this pH hydroxide, silicate, borate and the like alone exceed the alkalinity"
    " (or acid outweighs it): check pH and alkalinity",
    ("dic", "co2"): "there is more CO2 than dissolved inorganic carbon: check both",
}


def _contradiction(pair: list[str], where: np.ndarray) -> Note:
    """What to say of the points at which no water has the two carbonate entries."""
    entry = "alkalinity" if "alkalinity" in pair else pair[-1]
    text = _IMPOSSIBLE.get(tuple(pair), f"no water has these values of {pair[0]} and {pair[1]}: check both")
    return Note("error", entry, text + _points(where))


def _points(where: np.ndarray) -> str:
    """How many points a sentence is about, where it is not about all."""
    return "" if where.all() else f" ({np.count_nonzero(where)} of {where.size} points)"


def _close(
    totals: np.ndarray,
    temperature: np.ndarray,
    system: System,
    ion: str,
    completed: Callable[[np.ndarray], tuple[np.ndarray, np.ndarray]],
    notes: list[Note],
) -> tuple[np.ndarray, np.ndarray]:
    """Adjust one conservative ion until the charges balance, and where that can be done.

    Repeated, as every ion shifts the activities a little.
    """
    row = system.index[ion]
    before = totals[row].copy()
    below = np.zeros(before.shape, bool)
    for _ in range(_CLOSING_PASSES):
        totals = totals.copy()
        adjusted = totals[row] - system.solve(totals, temperature).charge / CLOSING_IONS[ion]
        below |= adjusted < 0
        totals[row] = np.maximum(adjusted, 0)
        totals, _ = completed(totals)
    if below.all():
        allowed = ", ".join(["none", *(other for other in CLOSING_IONS if other != ion)])
        raise AnalysisError(
            "close_with", f"{ion} would have to fall below zero to close the balance; allowed: {allowed}"
        )
    change = from_base(totals[row] - before, "mg/L", ion)
    notes.append(Note("caution", ion, f"changed by {_span(change, '+')} mg/L to close the charge balance"))
    return totals, ~below


def _compare_redundant(
    amounts: Mapping[str, np.ndarray],
    pair: list[str],
    totals: np.ndarray,
    reading: float,
    system: System,
    notes: list[Note],
) -> None:
    """Say where a third or fourth carbonate entry contradicts the two that were used."""
    for key in (key for key in CARBONATE_KEYS if key in amounts and key not in pair):
        if key == "co2":
            found = system.solve(totals, reading).concentration("CO2(aq)")
        else:
            found = totals[system.index[key]]
        if np.any(np.abs(found - amounts[key]) > AGREEMENT[key] * np.abs(amounts[key])):
            unit = "mg/L as CaCO3" if key == "alkalinity" else "mg/L"
            shown = _span(from_base(found, unit, key))
            text = f"{' and '.join(pair)} give {shown} {unit}; this entry is not used"
            notes.append(Note("caution", key, text))


def _span(values: ArrayLike, sign: str = "") -> str:
    """A number for a sentence; for an array its range."""
    low, high = np.nanmin(values), np.nanmax(values)
    first, last = f"{low:{sign}.3g}", f"{high:{sign}.3g}"
    return first if first == last else f"{first} to {last}"
