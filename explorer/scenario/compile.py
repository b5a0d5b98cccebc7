"""A scenario made ready for evaluation: plain values by address, and what happens to the water in order."""

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache

from explorer.chemistry import System, WeakAcid
from explorer.scenario.dials import Dial, dials, step_name
from explorer.scenario.errors import ScenarioError, join, unknown
from explorer.scenario.held_dials import DialGoal
from explorer.scenario.model import DialHold, DoseStep, Scenario, Step, Target
from explorer.scenario.operations import (
    AirOperation,
    ConcentrateOperation,
    DoseOperation,
    LimestoneOperation,
    Operation,
    SettleOperation,
    SideStreamOperation,
    TemperatureOperation,
)
from explorer.scenario.readouts import READOUTS
from explorer.scenario.stage import BLEND, FINISHED
from explorer.treatment.analysis import Measured
from explorer.treatment.catalogue import SETTINGS
from explorer.treatment.chemicals import with_setting
from explorer.treatment.notes import Note


@dataclass(frozen=True)
class Source:
    """A source water. ``path``: of its analysis in the file. ``flow_unit``: "" where it has a share."""

    id: str
    name: str
    on: bool
    path: str
    entries: tuple[tuple[str, Measured], ...]
    close_with: str
    flow_unit: str
    train: tuple[Operation, ...]

    @property
    def address(self) -> str:
        """Where its dials stand."""
        return f"waters.{self.id}"


@dataclass(frozen=True)
class Plan:
    """What an evaluation runs on. ``dials``: every dial by address, with its value in its entered unit."""

    system: System
    season: str
    dials: Mapping[str, Dial]
    sources: tuple[Source, ...]
    balance: str | None
    flow_unit: str
    train: tuple[Operation, ...]
    targets: tuple[Target, ...]
    holds: tuple[DialGoal, ...] = ()
    notes: tuple[Note, ...] = ()


RESTS = "the step behind which the readout is held is out of service: the dial stands as entered"


@lru_cache(maxsize=16)
def system_of(acids: tuple[WeakAcid, ...], organic_charge_density: float) -> System:
    """The chemical system for a set of own acids; kept, as setting one up takes longer than using it."""
    return System(acids, organic_charge_density)


def compiled(scenario: Scenario, season: str | None = None) -> Plan:
    """Plan of a scenario in a season (its own where None). Raises ScenarioError for an unknown season."""
    season = scenario.season if season is None else season
    if season not in scenario.seasons:
        raise ScenarioError("season", unknown(season, "one of the seasons", scenario.seasons))
    every = dials(scenario, season)
    sources = tuple(_source(scenario, position, season) for position in range(len(scenario.waters)))
    train = _train(scenario, scenario.train, "")
    places = {BLEND, FINISHED, *_places(train)}
    for source in sources:
        places |= {source.id, *_places(source.train)}
    holds = {address: hold for address, hold in scenario.holds.items() if address in every}
    resting = [address for address, hold in holds.items() if hold.stage not in places]
    return Plan(
        system=system_of(scenario.weak_acids(), float(scenario.organic_charge_density)),
        season=season,
        dials=every,
        sources=sources,
        balance=scenario.balance_water,
        flow_unit="" if scenario.flow is None else scenario.flow.unit,
        train=train,
        targets=tuple(scenario.targets),
        holds=tuple(_goal(every[a], hold) for a, hold in holds.items() if a not in resting),
        notes=tuple(Note("caution", address, RESTS) for address in resting),
    )


def _places(train: Sequence[Operation]) -> Iterator[str]:
    """Ids of all steps in service of a train."""
    for operation in train:
        yield operation.id
        yield from _places(getattr(operation, "train", ()))


def _goal(dial: Dial, hold: DialHold) -> DialGoal:
    low = dial.low if hold.low is None else hold.low
    high = dial.high if hold.high is None else hold.high
    return DialGoal(dial.address, READOUTS[hold.readout], hold.stage, low, high, dial.value)


def _source(scenario: Scenario, position: int, season: str) -> Source:
    water = scenario.waters[position]
    analysis = water.analyses[season]
    return Source(
        id=water.id,
        name=water.title,
        on=water.on,
        path=join(f"waters[{position}].analyses", season),
        entries=tuple(analysis.entries.items()),
        close_with=analysis.close_with,
        flow_unit="" if water.flow is None else water.flow.unit,
        train=_train(scenario, water.train, f"waters.{water.id}."),
    )


def _train(scenario: Scenario, train: Sequence[Step], prefix: str) -> tuple[Operation, ...]:
    return tuple(
        _OPERATIONS[step.kind](scenario, step, step.id, step_name(scenario, step), f"{prefix}train.{step.id}")
        for step in train
        if step.on
    )


def _dose(scenario: Scenario, step: DoseStep, *place: str) -> DoseOperation:
    quantity = step.dose if step.hold is None else step.hold.ceiling
    held = None if step.hold is None else READOUTS[step.hold.readout]
    setting, ends = "", ()
    if step.chemical in SETTINGS:
        product = SETTINGS[step.chemical]
        setting = product.name
        ends = tuple((value, _at_setting(step.chemical, value)) for value in (product.low, product.high))
    return DoseOperation(*place, scenario.product(step), quantity.unit, held, setting, ends)


_at_setting = lru_cache(maxsize=64)(with_setting)


_OPERATIONS: dict[str, Callable[..., Operation]] = {
    "dose": _dose,
    "air": lambda scenario, step, *place: AirOperation(*place),
    "limestone": lambda scenario, step, *place: LimestoneOperation(*place, step.solid),
    "settle": lambda scenario, step, *place: SettleOperation(*place, step.full, tuple(step.solids)),
    "side_stream": lambda scenario, step, *place: SideStreamOperation(
        *place, _train(scenario, step.train, f"{place[-1]}.")
    ),
    "temperature": lambda scenario, step, *place: TemperatureOperation(*place, step.temperature.unit),
    "concentrate": lambda scenario, step, *place: ConcentrateOperation(*place),
}
"""The operation of each kind of step, from the step and its place: id, name, address."""
