"""Titration: how the water at any place answers an acid or a base, and which species it holds at which pH."""

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from explorer.chemistry import Solution, System
from explorer.chemistry.components import COMPONENT, FAMILIES
from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.evaluate import Outcome, evaluate
from explorer.scenario.model import Scenario
from explorer.scenario.outcome import FINISHED
from explorer.scenario.stage import Stage
from explorer.studies.plain import known
from explorer.studies.sweep import listed
from explorer.treatment.chemicals import Chemical, titrant_moles, titration_units, totals_vector
from explorer.treatment.stream import dose

USUAL_POINTS, MOST_POINTS = 121, 2001

ROUNDING = 1e-12
"""Part of the range below which a dose is none."""

DIAGRAM_PH = (2.0, 12.0)
DIAGRAM_POINTS = 201

WATER = "water"
"""Name of the family of H+ and OH-."""


@dataclass(frozen=True)
class Titration:
    """pH and buffer intensity against dose.

    ``x``: dose in ``unit``; where it is negative, minus the dose of ``opposite`` ("" for none). ``ph``,
    ``buffer_intensity`` [mmol/L per pH]: nan where there is no answer, for the ``reasons`` given. ``own_ph``
    and ``own_buffer_intensity``: of the water as it is. ``temperature``: °C.
    """

    stage: str
    name: str
    chemical: str
    opposite: str
    unit: str
    x: np.ndarray
    ph: np.ndarray
    buffer_intensity: np.ndarray
    reasons: np.ndarray
    own_ph: float
    own_buffer_intensity: float
    temperature: float

    def dose_to(self, ph: float) -> float:
        """Dose at which the curve first passes a pH, between its points by the straight line; nan outside."""
        beyond = self.ph - ph
        crossed = np.flatnonzero(beyond[:-1] * beyond[1:] <= 0)
        if not crossed.size:
            return float("nan")
        i = int(crossed[0])
        rise = beyond[i] - beyond[i + 1]
        part = beyond[i] / rise if rise else 0.0
        return float(self.x[i] + part * (self.x[i + 1] - self.x[i]))

    def to_dict(self) -> dict[str, Any]:
        """Plain lists by name; None where there is no answer."""
        return {
            "stage": self.stage,
            "chemical": self.chemical,
            "opposite": self.opposite,
            "unit": self.unit,
            "temperature": known(self.temperature),
            "x": self.x.tolist(),
            "ph": listed(self.ph),
            "buffer_intensity": listed(self.buffer_intensity),
            "own_ph": known(self.own_ph),
            "own_buffer_intensity": known(self.own_buffer_intensity),
        }

    def table(self) -> list[list[Any]]:
        """Rows for a spreadsheet, the heading first."""
        heading = [f"Dose [{self.unit}]", "pH", "Buffer intensity [mmol/L per pH]", "No answer because"]
        columns = (self.x.tolist(), listed(self.ph), listed(self.buffer_intensity), self.reasons.tolist())
        return [heading, *(list(row) for row in zip(*columns, strict=True))]


def titration(
    scenario: Scenario,
    stage: str = FINISHED,
    chemical: str = "sodium_hydroxide",
    *,
    start: float = 0.0,
    stop: float = 20.0,
    points: int = USUAL_POINTS,
    unit: str | None = None,
    opposite: str | None = None,
    dials: Mapping[str, ArrayLike] = MappingProxyType({}),
    season: str | None = None,
) -> Titration:
    """Curve of a stage's water against a chemical of the catalogue or of the scenario.

    ``unit``: of the chemical, or meq/L of its alkalinity; its usual one where None. ``opposite``: the
    chemical that negative doses stand for, so that acid and base are on one axis; without it doses cannot be
    negative.
    Floc and chlorine react as they do behind a dose of the plant; nothing else precipitates.

    Raises ScenarioError for an unknown stage, chemical or unit and for a range that is none.
    """
    titrant = titrated(scenario, stage, chemical, unit, opposite, dials, season)
    _check_range(start, stop, points, two_sided=opposite is not None)
    x = np.linspace(start, stop, points)
    x[np.abs(x) < ROUNDING * abs(stop - start)] = 0.0
    before, along = titrant.before, titrant.after(x)
    return Titration(
        stage=before.id,
        name=before.name,
        chemical=titrant.chemical.key,
        opposite=opposite or "",
        unit=titrant.unit,
        x=x,
        ph=along.readout("ph"),
        buffer_intensity=along.readout("buffer_intensity"),
        reasons=along.reasons(),
        own_ph=float(before.readout("ph")),
        own_buffer_intensity=float(before.readout("buffer_intensity")),
        temperature=float(before.temperature),
    )


@dataclass(frozen=True)
class Titrated:
    """A water and what is added to it: ``chemical`` where doses are positive, ``opposite`` where negative."""

    before: Stage
    chemical: Chemical
    opposite: Chemical | None
    unit: str

    def after(self, x: ArrayLike) -> Stage:
        """The water after doses [``unit``] of any shape."""
        stream = self.before.stream
        for chemical, sign in ((self.chemical, 1.0), (self.opposite, -1.0)):
            if chemical is not None:
                amount = titrant_moles(chemical, np.maximum(sign * np.asarray(x, float), 0.0), self.unit)
                stream = dose(stream, totals_vector(chemical, stream.system), amount)
        return Stage(self.before.id, self.before.name, "titration", stream, self.before.cost)


def titrated(
    scenario: Scenario,
    stage: str,
    chemical: str,
    unit: str | None = None,
    opposite: str | None = None,
    dials: Mapping[str, ArrayLike] = MappingProxyType({}),
    season: str | None = None,
) -> Titrated:
    """The water of a stage, ready to be titrated. Raises ScenarioError as :func:`titration` does."""
    one = _chemical(scenario, chemical)
    other = None if opposite is None else _chemical(scenario, opposite)
    unit = one.default_unit if unit is None else unit
    for titrant in filter(None, (one, other)):
        if unit not in titration_units(titrant):
            name = f"a unit of {titrant.name.lower()}"
            raise ScenarioError("unit", unknown(unit, name, titration_units(titrant), similar=False))
    outcome = evaluate(scenario, dials, season)
    if outcome.shape:
        raise ScenarioError("", "a titration is of one water; allowed single dial values")
    return Titrated(outcome.stage(stage), one, other, unit)


def _chemical(scenario: Scenario, key: str) -> Chemical:
    known = scenario.known_chemicals()
    if key not in known:
        raise ScenarioError("chemical", unknown(key, "a chemical", known))
    return known[key]


def _check_range(start: float, stop: float, points: int, two_sided: bool) -> None:
    if not 2 <= points <= MOST_POINTS:
        raise ScenarioError("points", f"{points} is out of range; allowed 2 to {MOST_POINTS}")
    if not (np.isfinite(start) and np.isfinite(stop)) or start == stop:
        raise ScenarioError("stop", f"{start:g} to {stop:g} is no range; allowed two different numbers")
    if min(start, stop) < 0 and not two_sided:
        raise ScenarioError("start", f"{min(start, stop):g} is negative; allowed with an opposite chemical")


# ---- logarithmic diagram -----------------------------------------------------------------------------------


@dataclass(frozen=True)
class Family:
    """Species that hold one component. ``total``: mol/L. ``logs``: log10 of mol/L along the pH, by species.
    ``own``: the same in the water itself."""

    key: str
    label: str
    total: float
    logs: Mapping[str, np.ndarray]
    own: Mapping[str, float]


@dataclass(frozen=True)
class Diagram:
    """Logarithmic concentrations of all species of a water at its fixed totals, against pH.

    Nothing precipitates, nothing is exchanged with air: alkalinity is the one total that moves.
    """

    stage: str
    name: str
    ph: np.ndarray
    families: tuple[Family, ...]
    own_ph: float
    temperature: float

    def to_dict(self) -> dict[str, Any]:
        """Plain lists by name; None where there is no answer."""
        return {
            "stage": self.stage,
            "temperature": known(self.temperature),
            "ph": self.ph.tolist(),
            "own_ph": known(self.own_ph),
            "families": {
                family.key: {species: listed(values) for species, values in family.logs.items()}
                for family in self.families
            },
        }


def diagram(
    outcome: Outcome,
    stage: str = FINISHED,
    low: float = DIAGRAM_PH[0],
    high: float = DIAGRAM_PH[1],
    points: int = DIAGRAM_POINTS,
) -> Diagram:
    """The diagram of a stage, for an outcome of a single point, between two pH values.

    Raises ScenarioError for an unknown stage, an outcome of many points and a range that is none.
    """
    if outcome.shape:
        raise ScenarioError("", "a diagram is of one water; allowed single dial values")
    if not (0 <= low < high <= 14 and 2 <= points <= MOST_POINTS):
        raise ScenarioError("ph", f"{low:g} to {high:g} is no range; allowed rising values within 0 to 14")
    water = outcome.stage(stage)
    ph = np.linspace(low, high, points)
    along = water.system.solve(water.totals, water.temperature, ph=ph)
    families = tuple(
        _family(key, label, component, water, along)
        for key, label, component in _families(water.system)
        if component is None or water.total(component) > 0
    )
    return Diagram(water.id, water.name, ph, families, float(water.readout("ph")), float(water.temperature))


def _families(system: System) -> list[tuple[str, str, str | None]]:
    """Key, label and component of every family the system may have; the water itself has no component."""
    built_in = [(key, COMPONENT[component].label, component) for key, component in FAMILIES.items()]
    own = [(acid.id, acid.name, acid.id) for acid in system.acids]
    return [(WATER, "Water", None), *built_in, *own]


def _family(key: str, label: str, component: str | None, water: Stage, along: Solution) -> Family:
    names = ("H+", "OH-") if component is None else along.family_species(key)
    logs = {name: _log(along.concentration(name)) for name in names}
    species = [name for name, values in logs.items() if np.isfinite(values).any()]
    return Family(
        key=key,
        label=label,
        total=float("nan") if component is None else float(water.total(component)),
        logs={name: logs[name] for name in species},
        own={name: float(_log(water.solution.concentration(name))) for name in species},
    )


def _log(concentration: np.ndarray) -> np.ndarray:
    """log10; nan for a species that cannot form."""
    return np.log10(np.where(concentration > 0, concentration, np.nan))
