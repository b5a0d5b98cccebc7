"""Dials: every scalar input of a scenario under a dotted address, with label, unit, bounds and step.

``waters.well.share``, ``waters.well.analysis.ph`` (of the chosen season), ``waters.well.train.lime.dose``,
``train.caustic.strength``, ``train.contactor.train.bed.approach``, ``train.caustic.hold.value``, ``flow``.
Which inputs there are follows from the declared fields of the scenario's objects.
"""

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from functools import partial
from types import MappingProxyType

import numpy as np

from explorer.scenario import shares
from explorer.scenario.entity import Entity
from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.fields import Number, number_fault
from explorer.scenario.measured import ENTRY_RULES, entry_faults
from explorer.scenario.model import (
    Analysis,
    DoseStep,
    Measured,
    Quantity,
    Scenario,
    SideStreamStep,
    Step,
    Water,
)
from explorer.scenario.quantity import DOSE, Amount
from explorer.scenario.readouts import READOUTS
from explorer.scenario.words import in_sentence
from explorer.treatment.catalogue import SETTINGS
from explorer.treatment.units import from_base, to_base

PLANT = "Plant"
"""Group of the dials that belong to no water and no step."""

SMALLEST = 1e-12
"""What is smaller, in whichever unit, is as good as zero."""

NO_DIALS = ("tank",)
"""Numbers of steps on which no result of a stage depends."""

FINE_STEP = {"ph": 0.05, "temperature": 0.5}
"""Steps [entered unit] of analysis entries whose size says nothing about their precision."""


@dataclass(frozen=True)
class Dial:
    """One scalar input as it stands.

    ``value``, ``low``, ``high``, ``step`` are in ``unit``, the unit as entered; ``high`` is None where
    nothing limits it. ``group`` names the water or step it belongs to.
    """

    address: str
    label: str
    unit: str
    value: float
    low: float
    high: float | None
    step: float
    group: str
    bounded: bool
    """Whether ``low`` is a limit; else it is only where a slider starts."""
    store: Callable[[float], None] = field(repr=False, compare=False)
    """Writes a checked value into the scenario; ``turn`` is the way to call it."""

    def allows(self, values: np.ndarray) -> np.ndarray:
        """Which of some values [entered unit] are within the limits."""
        within = np.isfinite(values) & (values <= (np.inf if self.high is None else self.high))
        return within & (values >= self.low) if self.bounded else within

    def nearest(self, value: float) -> float:
        """The step within the limits that is nearest to a place that was pointed at."""
        value = round(round(value / self.step) * self.step, 10)
        value = max(value, self.low) if self.bounded else value
        return value if self.high is None else min(value, self.high)


def dials(scenario: Scenario, season: str | None = None) -> dict[str, Dial]:
    """Every dial by address. ``season`` chooses the analyses; the scenario's own where it is None."""
    every = {dial.address: dial for dial in _walk(scenario, scenario.season if season is None else season)}
    return every | {dial.address: dial for dial in _held_values(scenario, every)}


def find(scenario: Scenario, address: str, season: str | None = None) -> Dial:
    """The dial at an address. Raises ScenarioError, with the nearest address, where there is none."""
    every = dials(scenario, season)
    if address not in every:
        raise ScenarioError("", no_dial(address, every))
    return every[address]


def no_dial(address: str, every: dict[str, Dial]) -> str:
    """Sentence for an address without a dial."""
    message = unknown(address, "a dial of this scenario", every)
    return message if len(every) < 8 else message.split("; allowed")[0]


def get_value(scenario: Scenario, address: str, season: str | None = None) -> float:
    """Value of a dial in its entered unit. Raises ScenarioError for an unknown address."""
    return find(scenario, address, season).value


def turn(scenario: Scenario, address: str, value: float, season: str | None = None) -> None:
    """Set one dial, in place. Turning a share moves the others (see :mod:`explorer.scenario.shares`).

    Raises ScenarioError, with the address and what is allowed, for an unknown address or a value that is not
    allowed; the scenario is then unchanged.
    """
    dial = find(scenario, address, season)
    try:
        dial.store(neat(value))
    except ScenarioError as error:
        raise ScenarioError(address, error.message) from None


def turn_together(scenario: Scenario, values: Mapping[str, float], season: str | None = None) -> None:
    """Set several dials, in place. Shares turned together all become what they are given; others take the
    rest.

    Raises ScenarioError as :func:`turn`; dials set before the one that is refused stay as set.
    """
    given = {address.split(".")[1]: value for address, value in values.items() if is_share(address)}
    if len(given) > 1:
        every = dials(scenario, season)
        for address in filter(is_share, values):
            if address not in every:
                raise ScenarioError("", no_dial(address, every))
        _store_shares(scenario, given)
    for address, value in values.items():
        if len(given) < 2 or not is_share(address):
            turn(scenario, address, value, season)


def is_share(address: str) -> bool:
    """Whether a dial is the share of a water."""
    return address.startswith("waters.") and address.endswith(".share")


def neat(value: float) -> float | int:
    """Whole numbers as such, so that a file does not say 60.0 where a person writes 60."""
    if isinstance(value, bool) or not isinstance(value, int | float | np.number):
        return value
    value = float(value)
    return int(value) if value.is_integer() else value


def step_name(scenario: Scenario, step: Step) -> str:
    """Name of a step on screen: its own, or that of its chemical, or of its kind."""
    return scenario.product(step).name if isinstance(step, DoseStep) and not step.name else step.title


def _walk(scenario: Scenario, season: str) -> Iterator[Dial]:
    yield from _fields(scenario, ("flow",), "", PLANT, "{field} of the blend")
    yield from _shares(scenario)
    for water in scenario.waters:
        prefix = f"waters.{water.id}."
        yield from _fields(water, ("flow",), prefix, water.title)
        if season in water.analyses:
            yield from _entries(water, water.analyses[season], prefix)
        yield from _train(scenario, water.train, prefix)
    yield from _train(scenario, scenario.train, "")


def _held_values(scenario: Scenario, every: Mapping[str, Dial]) -> Iterator[Dial]:
    """The values to which dials are held."""
    for address, hold in scenario.holds.items():
        if address not in every or hold.readout not in READOUTS:
            continue
        readout, held = READOUTS[hold.readout], every[address]
        label = f"{readout.label} held by {in_sentence(held.label)}"
        yield Dial(
            f"{address}.hold.value", label, readout.unit, hold.value, min(0.0, hold.value), None,
            fine_step(hold.value), held.group, False, partial(_store_field, hold, "value"),
        )  # fmt: skip


def _train(scenario: Scenario, train: Sequence[Step], prefix: str) -> Iterator[Dial]:
    for step in train:
        inner = f"{prefix}train.{step.id}."
        name = step_name(scenario, step)
        fields = step.fields().items()
        numbers = [key for key, part in fields if isinstance(part, Number | Amount) and key not in NO_DIALS]
        if isinstance(step, DoseStep):
            yield from _fields(step, numbers, inner, name, usual=usual_settings(scenario, step))
            if step.hold is not None:
                label = f"{READOUTS[step.hold.readout].label} held by {{group}}"
                yield from _fields(step.hold, ("value",), inner + "hold.", name, label)
                yield from _fields(step.hold, ("ceiling",), inner + "hold.", name)
        else:
            yield from _fields(step, numbers, inner, name)
        if isinstance(step, SideStreamStep):
            yield from _train(scenario, step.train, inner)


def usual_settings(scenario: Scenario, step: DoseStep) -> dict[str, float]:
    """Strength, and basicity or ratio, of the usual product of a dose step, by field, where there are."""
    strength = scenario.product(step).usual_strength
    usual = {} if strength is None else {"strength": strength}
    if step.chemical in SETTINGS:
        usual[SETTINGS[step.chemical].name] = SETTINGS[step.chemical].usual
    return usual


def _fields(
    owner: Entity,
    names: Sequence[str],
    prefix: str,
    group: str,
    label: str = "{field} of {group}",
    usual: Mapping[str, float] = MappingProxyType({}),
) -> Iterator[Dial]:
    """Dials of the declared fields of an object that have a value, or a ``usual`` one."""
    declared = owner.fields()
    for name in names:
        part, value = declared[name], getattr(owner, name)
        value = usual.get(name) if value is None else value
        if value is None:
            continue
        unit, low, high = part_range(part, value)
        if isinstance(value, Quantity):
            value = value.value
        yield Dial(
            prefix + name,
            label.format(field=part.label, group=group),
            unit,
            value,
            0.0 if low is None else low,
            high,
            part.step or fine_step(value),
            group,
            low is not None,
            partial(_store_field, owner, name),
        )


def part_range(part: Number | Amount, value: float | Quantity) -> tuple[str, float | None, float | None]:
    """Unit and bounds of a declared number, in the unit of its value."""
    low, high = part.bounds or (None, None)
    if not isinstance(value, Quantity):
        return part.unit, low, high
    if part.quantity == DOSE:
        return value.unit, low, high
    ends = (None if end is None else float(from_base(end, value.unit, part.quantity)) for end in (low, high))
    return value.unit, *ends


def fine_step(value: float) -> float:
    """A hundredth of a value, rounded down to 1, 2 or 5 of a decade; 0.1 where it is as good as zero."""
    if abs(value) < SMALLEST:
        return 0.1
    hundredth = abs(value) / 100
    decade = 10.0 ** np.floor(np.log10(hundredth))
    return float(decade * max(factor for factor in (1, 2, 5) if factor * decade <= hundredth * 1.000001))


def _store_field(owner: Entity, name: str, value: float) -> None:
    held = getattr(owner, name)
    setattr(owner, name, replace(held, value=value) if isinstance(held, Quantity) else value)


def _entries(water: Water, analysis: Analysis, prefix: str) -> Iterator[Dial]:
    for key, entry in analysis.entries.items():
        rule = ENTRY_RULES.get(key)
        low, high = rule.bounds if rule else (0.0, None)
        if key == "temperature":
            low, high = (float(from_base(end, entry.unit, key)) for end in (low, high))
        yield Dial(
            f"{prefix}analysis.{key}",
            f"{rule.label if rule else key} of {water.title}",
            entry.unit,
            entry.central,
            min(0.0, entry.central) if low is None else low,
            high,
            FINE_STEP.get(key) or fine_step(entry.central),
            water.title,
            low is not None,
            partial(_store_entry, analysis, key),
        )


def _store_entry(analysis: Analysis, key: str, value: float) -> None:
    entries = dict(analysis.entries)
    turned = replace(entries[key], value=value, below=None)
    fault = value_fault(key, turned)
    if fault:
        raise ScenarioError(key, fault)
    if key == "temperature":
        # Turning warms the water; the readings keep the temperature at which they were taken.
        taken = float(to_base(entries[key].central, entries[key].unit, key))
        for reading in {"ph", "co2"} & entries.keys():
            if entries[reading].read_at is None:
                entries[reading] = replace(entries[reading], read_at=taken)
    entries[key] = turned
    analysis.entries = entries


def value_fault(key: str, entry: Measured) -> str:
    """What is wrong with the value of an analysis entry, "" when nothing is."""
    fault = number_fault(entry.value, "a finite number")
    return fault or next((wrong for part, wrong in entry_faults(key, entry) if part == "value"), "")


def _shares(scenario: Scenario) -> Iterator[Dial]:
    """Shares of the waters in service, as parts of what flows."""
    running = [water for water in scenario.waters if water.on]
    if not running or any(water.share is None for water in running):
        return
    effective = shares.in_service({water.id: water.share for water in running})
    balance = scenario.balance_water
    for water in running:
        fixed = [share for other, share in effective.items() if other not in (water.id, balance)]
        takes_all = balance not in effective or balance == water.id
        yield Dial(
            f"waters.{water.id}.share",
            f"Share of {water.title}",
            "%",
            effective[water.id],
            0.0,
            shares.WHOLE if takes_all else shares.WHOLE - sum(fixed),
            Water.param.share.step,
            water.title,
            True,
            partial(_store_share, scenario, water.id),
        )


def _store_share(scenario: Scenario, turned: str, value: float) -> None:
    _store_shares(scenario, {turned: value})


def _store_shares(scenario: Scenario, given: Mapping[str, float]) -> None:
    for value in given.values():
        if fault := Water.param.share.fault(value):
            raise ScenarioError("share", fault)
    running = [water for water in scenario.waters if water.on]
    effective = shares.in_service({water.id: water.share for water in running})
    settled, possible = shares.settle(effective, given, scenario.balance_water)
    if len(running) == 1 and not possible:
        raise ScenarioError("share", "the only water in service has the whole share; allowed 100 %")
    if not possible:
        free = effective.keys() - given.keys()
        balance = scenario.balance_water
        fixed = sum(effective[water] for water in free - {balance}) if balance in free else 0.0
        total, most = sum(given.values()), shares.WHOLE - fixed
        if len(given) > 1:
            limits = f"at most {most:g}, and exactly that where no other water is left"
            raise ScenarioError("share", f"{total:g} % together do not go; allowed {limits}")
        sentence = f"{total:g} takes more than the balance water has; allowed 0 to {most:g} %"
        raise ScenarioError("share", sentence)
    # Waters out of service keep their share for their return; the rest divides what they leave.
    left = shares.WHOLE - sum(water.share for water in scenario.waters if not water.on)
    for water in (*(w for w in running if w.id not in given), *map(scenario.water, given)):
        water.share = neat(float(settled[water.id]) * left / shares.WHOLE)
