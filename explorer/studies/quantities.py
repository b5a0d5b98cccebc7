"""Quantities: what the doses mean in product, pumps, tanks, sludge and money."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, fields
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.evaluate import Outcome, evaluate
from explorer.scenario.model import DoseStep, Quantity, Scenario, Step
from explorer.scenario.operations import Dose
from explorer.scenario.readouts import NO_VALUE
from explorer.studies.hand_checks import figure
from explorer.studies.plain import known
from explorer.treatment.chemicals import density, dose_in
from explorer.treatment.notes import Note
from explorer.treatment.units import to_base

HOURS, DAYS = 24, 365
"""A day, a year."""

SOLID_LABELS: Mapping[str, str] = {
    "aluminium_hydroxide": "Aluminium hydroxide",
    "iron_hydroxide": "Iron hydroxide",
    "calcite": "Calcium carbonate",
    "aragonite": "Calcium carbonate (aragonite)",
    "vaterite": "Calcium carbonate (vaterite)",
    "brucite": "Magnesium hydroxide",
}

TURBIDITY_NOTE = "solids are what the doses form; raw-water turbidity adds 0.7 to 2.2 mg/L for each NTU"
"""Common practice."""


@dataclass(frozen=True)
class DoseUse:
    """One dose in numbers; nan where the flow, the strength, the density, a tank or the price is not known.

    ``dose`` in ``unit``. ``active_*``: pure substance, counted as ``basis``. ``rate``: L/h of product of
    ``strength`` [% by mass] and ``density`` [kg/L]. ``lowest_rate``, ``highest_rate``: over the flows and all
    seasons; ``turndown``: their ratio. ``tank`` [m³]; ``storage``: days that it lasts at ``rate`` when full.
    ``price``: of a kg of product; costs in the currency of the scenario, ``cost_per_ml`` for each ML of
    finished water.
    """

    step: str
    name: str
    chemical: str
    dose: float
    unit: str
    held: bool
    basis: str
    active_kg_per_day: float
    active_t_per_year: float
    product_kg_per_day: float
    product_t_per_year: float
    strength: float
    density: float
    rate: float
    lowest_rate: float
    highest_rate: float
    turndown: float
    tank: float
    storage: float
    price: float
    cost_per_day: float
    cost_per_ml: float
    cost_per_year: float


@dataclass(frozen=True)
class SolidUse:
    """Dry solids formed on the way: ``concentration`` mg/L of finished water."""

    key: str
    name: str
    concentration: float
    kg_per_day: float
    t_per_year: float


@dataclass(frozen=True)
class Quantities:
    """Everything a dosing plant takes and makes.

    ``flow``, ``low_flow``, ``high_flow``: m³/h of finished water, nan where none is given; the rest is at
    ``flow``.
    """

    season: str
    flow: float
    low_flow: float
    high_flow: float
    currency: str
    price_date: str
    doses: tuple[DoseUse, ...]
    solids: tuple[SolidUse, ...]
    notes: tuple[Note, ...]

    @property
    def cost_per_day(self) -> float:
        return _total(dose.cost_per_day for dose in self.doses)

    @property
    def cost_per_ml(self) -> float:
        return _total(dose.cost_per_ml for dose in self.doses)

    @property
    def cost_per_year(self) -> float:
        return _total(dose.cost_per_year for dose in self.doses)

    @property
    def solids_kg_per_day(self) -> float:
        return _total(solid.kg_per_day for solid in self.solids)

    def table(self) -> list[list[Any]]:
        """Rows for a spreadsheet, the heading first: doses, their sum, and below them the dry solids."""
        money = self.currency or "cost"
        heading = [
            "Dose", "Chemical", "Amount", "Unit", "Active [kg/d]", "Counted as", "Active [t/year]",
            "Product [kg/d]", "Product [t/year]", "Strength [%]", "Density [kg/L]", "Pump [L/h]",
            "Pump, least [L/h]", "Pump, most [L/h]", "Turndown", "Tank [m³]", "Storage [days]",
            f"Price per kg [{money}]", f"Per day [{money}]", f"Per ML [{money}]", f"Per year [{money}]",
            "Prices of",
        ]  # fmt: skip
        rows = [[*map(_cell, self._row(dose)), self.price_date] for dose in self.doses]
        costs = self.cost_per_day, self.cost_per_ml, self.cost_per_year
        everything = ["All", *[None] * 17, *map(_cell, costs), self.price_date]
        solids = [
            [solid.name, *map(_cell, (solid.concentration, solid.kg_per_day, solid.t_per_year))]
            for solid in self.solids
        ]
        below = [[], ["Dry solids formed", "mg/L", "kg/d", "t/year"], *solids] if solids else []
        return [heading, *rows, *([everything] if rows else []), *below]

    @staticmethod
    def _row(dose: DoseUse) -> tuple[Any, ...]:
        return (
            dose.name, dose.chemical, dose.dose, dose.unit, dose.active_kg_per_day, dose.basis,
            dose.active_t_per_year, dose.product_kg_per_day, dose.product_t_per_year, dose.strength,
            dose.density, dose.rate, dose.lowest_rate, dose.highest_rate, dose.turndown, dose.tank,
            dose.storage, dose.price, dose.cost_per_day, dose.cost_per_ml, dose.cost_per_year,
        )  # fmt: skip

    def to_dict(self) -> dict[str, Any]:
        """Plain data; None for what is not known."""
        totals = ("cost_per_day", "cost_per_ml", "cost_per_year", "solids_kg_per_day")
        return {
            "season": self.season,
            "flow": known(self.flow),
            "low_flow": known(self.low_flow),
            "high_flow": known(self.high_flow),
            "currency": self.currency,
            "price_date": self.price_date,
            "doses": [_parts(dose) for dose in self.doses],
            "solids": [_parts(solid) for solid in self.solids],
            **{name: known(getattr(self, name)) for name in totals},
            "notes": [{"level": note.level, "where": note.where, "text": note.text} for note in self.notes],
        }


def quantities(
    scenario: Scenario,
    dials: Mapping[str, ArrayLike] = MappingProxyType({}),
    season: str | None = None,
    *,
    tanks: Mapping[str, float] = MappingProxyType({}),
    low_flow: float | None = None,
    high_flow: float | None = None,
) -> Quantities:
    """Quantities of a scenario at a single point.

    ``tanks``: usable m³ of product by dose step, in place of those of the steps. ``low_flow``, ``high_flow``:
    m³/h of the blend, between which pumps must follow at the same doses; where None those of the scenario,
    as far as they reach beyond the flow, else the flow itself.

    Raises ScenarioError for a tank of no dose step, a flow range that does not hold the flow, or many points.
    """
    flowing = scenario.total_flow() is not None
    if not flowing:
        # Per ML the flow does not matter; everything else is left out below.
        scenario = scenario.copy()
        scenario.flow = Quantity(1, "ML/d")
    outcome = evaluate(scenario, dials, season)
    if outcome.shape:
        raise ScenarioError("", "quantities are of one point; allowed single dial values")
    for step in tanks:
        if step not in outcome.dosing:
            raise ScenarioError("tanks", unknown(step, "a dose step in service", outcome.dosing))
    blend = float(outcome.stage("blend").flow)
    low, high = _factors(scenario, blend, low_flow, high_flow) if flowing else (1.0, 1.0)
    tanks = {step.id: step.tank for _, step in scenario.steps() if _has_tank(step)} | dict(tanks)
    seasons = [evaluate(scenario, dials, other) for other in scenario.seasons if other != outcome.season]
    finished = float(outcome.stage().flow)
    given = finished if flowing else float("nan")
    doses = tuple(
        _dose_use(outcome, [outcome, *seasons], step, tanks.get(step), (low, high), flowing)
        for step in outcome.dosing
    )
    solids = tuple(_solids(outcome, given))
    return Quantities(
        season=outcome.season,
        flow=given,
        low_flow=low * given,
        high_flow=high * given,
        currency=scenario.currency,
        price_date=scenario.price_date,
        doses=doses,
        solids=solids,
        notes=tuple(_notes(scenario, doses, solids, tanks, flowing)),
    )


def amount_text(value: float) -> str:
    """A quantity to four figures, or all of a larger one in groups of three."""
    if not np.isfinite(value):
        return NO_VALUE
    grouped = f"{value:,.0f}".replace(",", "\u202f")
    return grouped if value >= 10_000 else figure(value)


def _has_tank(step: Step) -> bool:
    return isinstance(step, DoseStep) and step.tank is not None


def _factors(scenario: Scenario, flow: float, low: float | None, high: float | None) -> tuple[float, float]:
    """Lowest and highest flow as parts of the flow."""
    own = [
        flow if end is None else float(to_base(end.value, end.unit, "flow"))
        for end in (scenario.low_flow, scenario.high_flow)
    ]
    lowest = min(own[0] or flow, flow) if low is None else low
    highest = max(own[1], flow) if high is None else high
    if not 0 < lowest <= flow <= highest:
        wrong = f"{lowest:.4g} to {highest:.4g} m³/h does not hold the flow"
        raise ScenarioError("flow", f"{wrong}; allowed a range around {flow:.4g} m³/h, above 0")
    return lowest / flow, highest / flow


def _dose_use(
    outcome: Outcome,
    seasons: list[Outcome],
    step: str,
    tank: float | None,
    factors: tuple[float, float],
    flowing: bool,
) -> DoseUse:
    dose = outcome.dosing[step]
    there = 1.0 if flowing else float("nan")
    active = float(dose_in(dose.chemical, dose.moles, "mg/L")) * float(dose.flow) * HOURS / 1000 * there
    product = float(dose.product_use) * there
    rate = float(dose.pump_rate) * there
    rates = [float(other.dosing[step].pump_rate) * there for other in seasons]
    rates = [one for one in rates if np.isfinite(one)] or [float("nan")]
    lowest, highest = min(rates) * factors[0], max(rates) * factors[1]
    cost = float(dose.cost_per_day)
    strength = _strength(dose)
    return DoseUse(
        step=step,
        name=outcome.stage(step).name,
        chemical=dose.chemical.key,
        dose=float(dose.value),
        unit=dose.unit,
        held=dose.held,
        basis=dose.chemical.plain,
        active_kg_per_day=active,
        active_t_per_year=active * DAYS / 1000,
        product_kg_per_day=product,
        product_t_per_year=product * DAYS / 1000,
        strength=strength,
        density=float(density(dose.chemical, strength)),
        rate=rate,
        lowest_rate=lowest,
        highest_rate=highest,
        turndown=highest / lowest if lowest > 0 else float("nan"),
        tank=float("nan") if tank is None else float(tank),
        storage=float("nan") if tank is None or not rate > 0 else 1000 * tank / (rate * HOURS),
        price=float(dose.price),
        cost_per_day=cost * there,
        cost_per_ml=cost / (float(outcome.stage().flow) * HOURS / 1000),
        cost_per_year=cost * DAYS * there,
    )


def _strength(dose: Dose) -> float:
    given = dose.chemical.usual_strength if dose.strength is None else dose.strength
    return float("nan") if given is None else float(given)


def _solids(outcome: Outcome, flow: float) -> Iterator[SolidUse]:
    for key, amount in outcome.stage().solids.items():
        daily = float(amount) * flow * HOURS / 1000
        yield SolidUse(key, SOLID_LABELS[key], float(amount), daily, daily * DAYS / 1000)


def _notes(
    scenario: Scenario,
    doses: tuple[DoseUse, ...],
    solids: tuple[SolidUse, ...],
    tanks: Mapping[str, float],
    flowing: bool,
) -> Iterator[Note]:
    if not flowing:
        yield Note("info", "flow", "no flow is given: only amounts per ML are known")
    free = [dose.name for dose in doses if np.isnan(dose.cost_per_ml)]
    if free and len(free) < len(doses):
        yield Note("info", "price", f"no price is entered for {', '.join(free)}: the cost is without it")
    elif free:
        yield Note("info", "price", "no price is entered")
    elif doses and not scenario.price_date:
        yield Note("info", "price_date", "the date of the prices is not given")
    for dose in doses:
        if dose.step in tanks and flowing and np.isnan(dose.rate):
            yield Note("info", dose.step, "the product is dry or its density not known: a tank says nothing")
        if dose.lowest_rate == 0 and dose.highest_rate > 0:
            yield Note("info", dose.step, "the pump stands still at times: its turndown has no limit")
    if solids:
        yield Note("info", "solids", TURBIDITY_NOTE)


def _total(values: Iterator[float]) -> float:
    """Sum of what is known; nan where nothing is."""
    entered = [value for value in values if np.isfinite(value)]
    return sum(entered) if entered else float("nan")


def _cell(value: Any) -> Any:
    """A number that is not known as an empty cell."""
    return known(value) if isinstance(value, float) else value


def _parts(owner: DoseUse | SolidUse) -> dict[str, Any]:
    """Fields by name; numbers that are not known as None."""
    parts = {part.name: getattr(owner, part.name) for part in fields(owner)}
    return {name: known(value) if isinstance(value, float) else value for name, value in parts.items()}
