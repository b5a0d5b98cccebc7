"""Usual tolerances, offered where none is entered: half-widths of common practice, there to be edited."""

from dataclasses import dataclass

from explorer.scenario.dials import Dial, dials, neat
from explorer.scenario.holding import holdings
from explorer.scenario.model import DoseStep, LimestoneStep, Measured, Scenario, Tolerance
from explorer.treatment.units import from_base, to_base

SOURCE = "common practice"

SOFT = 50.0
"""mg/L as CaCO3; the pH of water with less alkalinity is harder to read."""

LEAST_ALKALINITY = 2.0
"""mg/L as CaCO3 that a titration leaves open at any rate."""

IONS = {"calcium": 5, "magnesium": 5, "total_hardness": 5, "dic": 5, "conductivity": 5}
"""Percent; 10 for everything else that a laboratory measures."""

SLURRIES = ("calcium_hydroxide", "calcium_oxide", "magnesium_hydroxide")

HYPOCHLORITES = ("sodium_hypochlorite",)
"""Products that lose strength in store."""


@dataclass(frozen=True)
class Suggestion:
    """A tolerance, what it stands for, and where it comes from."""

    tolerance: Tolerance
    reason: str
    source: str = SOURCE


def suggested_tolerances(scenario: Scenario, season: str | None = None) -> dict[str, Suggestion]:
    """Suggestions by address for every dial that has one."""
    found = {
        address: suggested_tolerance(scenario, dial, season)
        for address, dial in dials(scenario, season).items()
    }
    return {address: suggestion for address, suggestion in found.items() if suggestion is not None}


def suggested_tolerance(scenario: Scenario, dial: Dial, season: str | None = None) -> Suggestion | None:
    """Usual tolerance of a dial; None where there is none (prices, settings, substances that are absent)."""
    parts = dial.address.split(".")
    if parts[-1] == "flow":
        return _suggestion("flow meter as installed", plus_minus=3, unit="%")
    if parts[-2] == "hold":
        held = next((hold for hold in holdings(scenario).values() if hold.goal == dial.address), None)
        on_line = held is not None and held.readout == "ph"
        return _suggestion("on-line pH meter", plus_minus=0.1) if on_line else None
    if parts[-1] == "share":
        # A single water has the whole share whatever its meter says.
        if sum(water.on for water in scenario.waters) == 1:
            return None
        return _suggestion("flow meters of the sources", plus_minus=2)
    if parts[-2] == "analysis":
        entries = scenario.water(parts[1]).analyses[season or scenario.season].entries
        return _of_entry(parts[-1], dial, entries)
    return _of_step(scenario, parts)


def _suggestion(reason: str, unit: str = "", **widths: float) -> Suggestion:
    return Suggestion(Tolerance(unit=unit, **{side: neat(width) for side, width in widths.items()}), reason)


def _of_entry(key: str, dial: Dial, entries: dict[str, Measured]) -> Suggestion | None:
    if entries[key].below is not None:
        # The dial stands at half the limit.
        return _suggestion("anything up to the limit of detection", plus_minus=dial.value)
    if key == "temperature":
        degree = from_base(1.0, dial.unit, key) - from_base(0.0, dial.unit, key)
        return _suggestion("thermometer and changes over a day", plus_minus=float(degree))
    if key == "ph":
        soft = "alkalinity" in entries and _as_calcium_carbonate(entries["alkalinity"]) < SOFT
        words = "laboratory pH of soft water" if soft else "laboratory pH"
        return _suggestion(words, plus_minus=0.2 if soft else 0.1)
    if not dial.value:
        return None
    if key == "alkalinity":
        share = LEAST_ALKALINITY / abs(_as_calcium_carbonate(entries[key]))
        if share > 0.05:
            return _suggestion("titration", plus_minus=float(f"{share * abs(dial.value):.3g}"))
        return _suggestion("titration", plus_minus=5, unit="%")
    return _suggestion("laboratory", plus_minus=IONS.get(key, 10), unit="%")


def _as_calcium_carbonate(alkalinity: Measured) -> float:
    unit = "mg/L as CaCO3"
    return float(from_base(to_base(alkalinity.central, alkalinity.unit, "alkalinity"), unit, "alkalinity"))


def _of_step(scenario: Scenario, parts: list[str]) -> Suggestion | None:
    step = scenario.step(parts[-2])
    if parts[-1] == "fraction":
        return _suggestion("flow meters of the split", plus_minus=2)
    if parts[-1] == "approach" and isinstance(step, LimestoneStep):
        return _suggestion("contactor", plus_minus=3)
    if isinstance(step, DoseStep) and parts[-1] == "dose":
        if step.chemical in SLURRIES:
            return _suggestion("slurry feed", plus_minus=8, unit="%")
        return _suggestion("dosing pump", plus_minus=3, unit="%")
    if isinstance(step, DoseStep) and parts[-1] == "strength":
        if step.chemical in HYPOCHLORITES:
            return _suggestion("a fifth is lost in two weeks near 30 °C", minus=20, plus=0, unit="%")
        return _suggestion("delivered strength", plus_minus=3, unit="%")
    return None
