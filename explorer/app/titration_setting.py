"""What the titration view shows: which water, what is added to it, in which unit and over which range."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict, dataclass, replace
from typing import Any

import numpy as np

from explorer.scenario.evaluate import Outcome
from explorer.scenario.model import Scenario
from explorer.scenario.outcome import FINISHED
from explorer.scenario.stage import Stage
from explorer.studies.axes import outward
from explorer.treatment.chemicals import EQUIVALENTS, Chemical, titrant_moles, titration_units
from explorer.treatment.floc import ALKALINITY_PER_METAL

BASE, ACID = "sodium_hydroxide", "hydrochloric_acid"
METALS = ("aluminium", "iron")

LEAST = 0.5
"""meq/L or mmol/L that a range reaches at least."""

BEYOND = 1.15
"""How far a range goes beyond the amount that turns the water into an acid or a base."""

FIGURES = 3
"""Significant figures of a range that is converted to another unit."""


@dataclass(frozen=True)
class Setting:
    """``opposite``: what negative doses stand for, "" for none. ``start``, ``stop``: in ``unit``."""

    stage: str
    chemical: str
    opposite: str
    unit: str
    start: float
    stop: float

    def remembered(self) -> dict[str, Any]:
        """As it is kept among the session's choices."""
        return asdict(self)


def equivalents(chemical: Chemical) -> float:
    """Alkalinity [eq] that a mole of a chemical gives, negative for acids; metals take it as hydroxide."""
    metals = sum(chemical.totals.get(metal, 0.0) for metal in METALS)
    return chemical.totals.get("alkalinity", 0.0) - ALKALINITY_PER_METAL * metals


def shared_units(chemical: Chemical, opposite: Chemical | None) -> tuple[str, ...]:
    """Units that both chemicals can be dosed in, meq/L first."""
    units = [u for u in titration_units(chemical) if opposite is None or u in titration_units(opposite)]
    return tuple(sorted(units, key=lambda unit: unit != EQUIVALENTS))


def setting(kept: Mapping[str, Any], scenario: Scenario, point: Outcome) -> Setting:
    """What is ``kept`` among the choices, mended where the scenario has changed since."""
    chemicals = scenario.known_chemicals()
    stages = {stage.id for stage in point.stages} | {FINISHED}
    stage = kept.get("stage") if kept.get("stage") in stages else FINISHED
    chemical = kept.get("chemical") if kept.get("chemical") in chemicals else BASE
    opposite = kept.get("opposite", ACID)
    opposite = opposite if opposite in chemicals and opposite != chemical else ""
    units = shared_units(chemicals[chemical], chemicals.get(opposite))
    if not units:
        opposite, units = "", shared_units(chemicals[chemical], None)
    unit = kept.get("unit") if kept.get("unit") in units else units[0]
    start, stop = kept.get("start"), kept.get("stop")
    if start is None or stop is None or start == stop or (min(start, stop) < 0 and not opposite):
        start, stop = usual_range(point.stage(stage), chemicals[chemical], chemicals.get(opposite), unit)
    return Setting(stage, chemical, opposite, unit, start, stop)


def usual_range(
    water: Stage, chemical: Chemical, opposite: Chemical | None, unit: str
) -> tuple[float, float]:
    """Doses between which a water answers: an acid until its alkalinity is used up, a base until its carbon
    is carbonate; round numbers."""
    above = _reach(water, chemical, unit)
    below = 0.0 if opposite is None else _reach(water, opposite, unit)
    return outward(-below, above)


def _reach(water: Stage, chemical: Chemical, unit: str) -> float:
    """Largest dose of a range, in a unit."""
    alkalinity, carbon = (1000 * float(water.total(key)) for key in ("alkalinity", "dic"))
    per_mole = equivalents(chemical)
    wanted = 2 * carbon - alkalinity if per_mole > 0 else alkalinity
    if not np.isfinite(wanted):
        wanted = 0.0
    millimoles = max(BEYOND * wanted, LEAST) / (abs(per_mole) or 1.0)
    return millimoles / (1000 * float(titrant_moles(chemical, 1.0, unit)))


def in_unit(now: Setting, unit: str, chemicals: Mapping[str, Chemical]) -> Setting:
    """The same range in another unit, to a few figures."""

    def converted(dose: float) -> float:
        chemical = chemicals[now.opposite if dose < 0 and now.opposite else now.chemical]
        factor = titrant_moles(chemical, 1.0, now.unit) / titrant_moles(chemical, 1.0, unit)
        return float(f"{dose * float(factor):.{FIGURES}g}")

    return replace(now, unit=unit, start=converted(now.start), stop=converted(now.stop))
