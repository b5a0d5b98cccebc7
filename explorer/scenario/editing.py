"""Structural changes to a scenario, in place: waters, steps, seasons, entries, options.

Each function leaves the scenario fit to be saved, or raises ScenarioError and leaves it as it was: what hung
on a removed part (its tolerances, the sweep over it) goes with it, and shares still add up. A train is named
by the address before its steps: "" after blending, "waters.river." of a water, "train.contactor." of a side
stream.
"""

import itertools
import math
import re
import unicodedata
from collections.abc import Iterable, Iterator
from typing import Any

from explorer.scenario.dials import dials, neat
from explorer.scenario.errors import ScenarioError, shown, unknown
from explorer.scenario.fields import NAME_LENGTH
from explorer.scenario.hold_rule import stages, waiting_shares
from explorer.scenario.model import Measured, Option, Quantity, Scenario, SideStreamStep, Step, Water
from explorer.scenario.observed_rule import known_dials, misfits
from explorer.scenario.rules import RESERVED_IDS
from explorer.scenario.shares import WHOLE, in_service
from explorer.scenario.steps import STEP_KINDS, DoseStep
from explorer.scenario.water import Analysis

Owner = Scenario | Water | SideStreamStep
"""What has a train."""

SHARE_DECIMALS = 9

NEW_WATER: dict[str, Measured] = {
    "temperature": Measured(10, unit="°C", assumed=True),
    "ph": Measured(7.5, assumed=True),
    "alkalinity": Measured(100, unit="mg/L as CaCO3", assumed=True),
    "calcium": Measured(40, unit="mg/L", assumed=True),
    "magnesium": Measured(8, unit="mg/L", assumed=True),
    "sodium": Measured(12, unit="mg/L", assumed=True),
    "potassium": Measured(2, unit="mg/L", assumed=True),
    "chloride": Measured(20, unit="mg/L", assumed=True),
    "sulfate": Measured(30, unit="mg/L", assumed=True),
}
"""A moderately hard water whose charges balance, to be overwritten; every value is marked as assumed."""

NEW_STEP: dict[str, dict[str, Any]] = {
    "air": {"approach": 80},
    "limestone": {"approach": 80},
    "side_stream": {"fraction": 50},
    "temperature": {"temperature": Quantity(20, "°C")},
    "concentrate": {"cycles": 2},
}
"""Settings a new step starts with."""

NEW_DOSE = 1
"""In the usual unit of the chemical: small, but it can be seen."""


def unique_id(scenario: Scenario, name: str, also_taken: Iterable[str] = ()) -> str:
    """An id made of a name that no water or step has yet."""
    plain = unicodedata.normalize("NFKD", name).encode("ascii", "ignore").decode().lower()
    stem = re.sub(r"[^a-z0-9]+", "_", plain).strip("_").lstrip("0123456789_")[: NAME_LENGTH - 6] or "part"
    places = (*scenario.waters, *(step for _, step in scenario.steps()))
    taken = {*RESERVED_IDS, *also_taken, *(place.id for place in places)}
    numbered = (f"{stem}_{number}" for number in itertools.count(2))
    return next(candidate for candidate in itertools.chain((stem,), numbered) if candidate not in taken)


def add_water(scenario: Scenario, like: str | None = None, name: str = "") -> str:
    """Add a source water and return its id; it has no share until it is given one.

    ``like``: id of a water whose analyses and train it takes over.
    """
    if like is None:
        analyses = {season: Analysis(entries=dict(NEW_WATER)) for season in scenario.seasons}
        water = Water(name=name or "New water", analyses=analyses)
    else:
        water = _water(scenario, like).copy()
        water.name = name or _copied(water.title)
    first = scenario.waters[0]
    water.share, water.flow = None, None
    if first.flow is None:
        water.share = 0
    else:
        water.flow = Quantity(0, first.flow.unit)
    water.id = unique_id(scenario, water.name)
    _give_ids(scenario, water.train, (water.id,))
    scenario.waters = [*scenario.waters, water]
    return water.id


def duplicate_water(scenario: Scenario, water_id: str) -> str:
    """Add a copy of a water, without a share, and return its id."""
    return add_water(scenario, like=water_id)


def remove_water(scenario: Scenario, water_id: str) -> None:
    """Remove a water; the other shares grow in proportion."""
    gone = _water(scenario, water_id)
    rest = [water for water in scenario.waters if water is not gone]
    if not any(water.on for water in rest):
        raise ScenarioError(
            f"waters.{water_id}", "no other water is in service; allowed to remove others only"
        )
    if gone.share is not None:
        shares = in_service({water.id: water.share for water in rest})
        for water in rest:
            water.share = neat(round(shares[water.id], SHARE_DECIMALS))
        rest[-1].share = neat(round(WHOLE - sum(water.share for water in rest[:-1]), SHARE_DECIMALS))
    scenario.waters = rest
    if scenario.balance_water == water_id:
        scenario.balance_water = None
    tidy(scenario)


def switch_water(scenario: Scenario, water_id: str) -> None:
    """Take a water out of service, or put it back."""
    switched = _water(scenario, water_id)
    if switched.on and not any(water.on for water in scenario.waters if water is not switched):
        raise ScenarioError(
            f"waters.{water_id}", "no other water is in service; allowed with another one running"
        )
    switched.on = not switched.on


def rename(scenario: Scenario, part_id: str, name: str) -> None:
    """Give a water or step another name; its id, and with it every address, stays."""
    parts = [*scenario.waters, *(step for _, step in scenario.steps())]
    part = next((part for part in parts if part.id == part_id), None)
    if part is None:
        raise ScenarioError("", unknown(part_id, "a water or step", (part.id for part in parts)))
    if fault := type(part).fields()["name"].fault(name):
        raise ScenarioError(f"{part_id}.name", fault)
    part.name = name


def trains(scenario: Scenario) -> Iterator[tuple[str, Owner]]:
    """Every train: the address before its steps, and the object whose ``train`` it is."""

    def below(prefix: str, owner: Owner) -> Iterator[tuple[str, Owner]]:
        yield prefix, owner
        for step in owner.train:
            if isinstance(step, SideStreamStep):
                yield from below(f"{prefix}train.{step.id}.", step)

    for water in scenario.waters:
        yield from below(f"waters.{water.id}.", water)
    yield from below("", scenario)


def add_step(
    scenario: Scenario, prefix: str, kind: str, chemical: str | None = None, position: int | None = None
) -> str:
    """Add a step to the train at an address, at the end or at a position, and return its id.

    ``chemical`` is for dose steps; settings start with usual values.
    """
    if kind not in STEP_KINDS:
        raise ScenarioError("step", unknown(kind, "a kind of step", STEP_KINDS))
    settings = NEW_STEP.get(kind, {})
    title = STEP_KINDS[kind].kind_title
    if kind == DoseStep.kind:
        known = scenario.known_chemicals()
        if chemical not in known:
            raise ScenarioError("chemical", unknown(chemical, "a chemical", known))
        title = known[chemical].name
        settings = {"chemical": chemical, "dose": Quantity(NEW_DOSE, known[chemical].default_unit)}
    owners = dict(trains(scenario))
    if prefix not in owners:
        raise ScenarioError("", unknown(prefix, "a train", owners))
    owner = owners[prefix]
    place = len(owner.train) if position is None else min(max(position, 0), len(owner.train))
    step = STEP_KINDS[kind](id=unique_id(scenario, title), **settings)
    owner.train = [*owner.train[:place], step, *owner.train[place:]]
    return step.id


def remove_step(scenario: Scenario, step_id: str) -> None:
    """Remove a step, and the steps of its side stream."""
    owner, place = _located(scenario, step_id)
    owner.train = owner.train[:place] + owner.train[place + 1 :]
    tidy(scenario)


def move_step(scenario: Scenario, step_id: str, by: int) -> None:
    """Move a step within its train, against (negative) or with the flow; it stops at the ends."""
    owner, place = _located(scenario, step_id)
    rest = owner.train[:place] + owner.train[place + 1 :]
    target = min(max(place + by, 0), len(rest))
    owner.train = [*rest[:target], owner.train[place], *rest[target:]]


def duplicate_step(scenario: Scenario, step_id: str) -> str:
    """Add a copy of a step right after it and return its id."""
    owner, place = _located(scenario, step_id)
    twin = owner.train[place].copy()
    if twin.name:
        twin.name = _copied(twin.name)
    _give_ids(scenario, [twin])
    owner.train = [*owner.train[: place + 1], twin, *owner.train[place + 1 :]]
    return twin.id


def switch_step(scenario: Scenario, step_id: str) -> None:
    """Take a step out of service, or put it back."""
    owner, place = _located(scenario, step_id)
    owner.train[place].on = not owner.train[place].on


def change_chemical(scenario: Scenario, step_id: str, chemical: str) -> None:
    """Dose another chemical: the figure of the dose stays, what belonged to the old product goes.

    A unit that the new chemical does not have becomes its usual unit.
    """
    owner, place = _located(scenario, step_id)
    step, known = owner.train[place], scenario.known_chemicals()
    if not isinstance(step, DoseStep):
        raise ScenarioError(step_id, "this step doses nothing; allowed for dose steps")
    if chemical not in known:
        raise ScenarioError("chemical", unknown(chemical, "a chemical", known))
    units, usual = known[chemical].units, known[chemical].default_unit

    def fitting(dose: Quantity) -> Quantity:
        return dose if dose.unit in units else Quantity(dose.value, usual)

    if step.dose is not None:
        step.dose = fitting(step.dose)
    if step.hold is not None:
        step.hold.ceiling = fitting(step.hold.ceiling)
    step.chemical = chemical
    step.strength = step.basicity = step.ratio = step.price = step.tank = None
    tidy(scenario)


def set_entry(analysis: Analysis, key: str, measured: Measured | None) -> None:
    """Set one entry of an analysis; None takes it out."""
    entries = {**analysis.entries, key: measured}
    analysis.entries = {key: entry for key, entry in entries.items() if entry is not None}


def add_season(scenario: Scenario, name: str, like: str | None = None) -> None:
    """Add a season whose analyses start as those of another, the one shown if none is named."""
    _check_new_season(scenario, name)
    source = scenario.season if like is None else like
    scenario.seasons = [*scenario.seasons, name]
    for water in scenario.waters:
        water.analyses = {**water.analyses, name: water.analyses[source].copy()}


def remove_season(scenario: Scenario, name: str) -> None:
    """Remove a season and its analyses; one has to stay."""
    if scenario.seasons == [name]:
        raise ScenarioError("seasons", "the last season cannot go; allowed one or more")
    if name not in scenario.seasons:
        raise ScenarioError("seasons", unknown(name, "one of the seasons", scenario.seasons))
    scenario.seasons = [season for season in scenario.seasons if season != name]
    scenario.season = scenario.season if scenario.season != name else scenario.seasons[0]
    for water in scenario.waters:
        water.analyses = {season: part for season, part in water.analyses.items() if season != name}
    tidy(scenario)


def rename_season(scenario: Scenario, old: str, new: str) -> None:
    """Give a season another name."""
    if old == new:
        return
    if old not in scenario.seasons:
        raise ScenarioError("seasons", unknown(old, "one of the seasons", scenario.seasons))
    _check_new_season(scenario, new)
    names = {season: new if season == old else season for season in scenario.seasons}
    scenario.seasons = list(names.values())
    scenario.season = names[scenario.season]
    for water in scenario.waters:
        water.analyses = {names[season]: analysis for season, analysis in water.analyses.items()}


def keep_option(scenario: Scenario, name: str, **details: str) -> None:
    """Keep the scenario as it stands under a name; ``details`` are the note, the time, the method."""
    frozen = scenario.copy()
    frozen.options = []
    scenario.options = [*scenario.options, Option(name=name, scenario=frozen, **details)]


def take_option(scenario: Scenario, name: str) -> Scenario:
    """A working copy of a kept option, with all options of the scenario beside it."""
    option = next((option for option in scenario.options if option.name == name), None)
    if option is None:
        raise ScenarioError(
            "options", unknown(name, "an option", (option.name for option in scenario.options))
        )
    working = option.scenario.copy()
    working.options = list(scenario.options)
    return working


def tidy(scenario: Scenario) -> None:
    """Drop the holds, the tolerances, the sweep and the measured points of what is no longer there; fit the
    sweep to its dial."""
    places, waiting = stages(scenario), waiting_shares(scenario)
    known = waiting.union(known_dials(scenario))
    scenario.holds = {
        address: hold for address, hold in scenario.holds.items() if address in known and hold.stage in places
    }
    known = waiting.union(known_dials(scenario))
    scenario.tolerances = {address: part for address, part in scenario.tolerances.items() if address in known}
    if scenario.sweep is not None and scenario.sweep.dial not in known:
        scenario.sweep = None
    _clip_sweep(scenario)
    there = known_dials(scenario) if scenario.measured else {}
    scenario.measured = [part for part in scenario.measured if not any(misfits(scenario, part, there))]


def _clip_sweep(scenario: Scenario) -> None:
    """Keep a sweep inside the range of its dial, which may have become narrower; none is left of no range."""
    dial = None if scenario.sweep is None else dials(scenario).get(scenario.sweep.dial)
    if dial is None:
        return
    sweep, high = scenario.sweep, math.inf if dial.high is None else dial.high
    for end in ("start", "stop"):
        value = getattr(sweep, end)
        if not dial.low <= value <= high:
            setattr(sweep, end, neat(min(max(value, dial.low), high)))
    if sweep.start == sweep.stop:
        scenario.sweep = None


def _water(scenario: Scenario, water_id: str) -> Water:
    try:
        return scenario.water(water_id)
    except KeyError:
        ids = (water.id for water in scenario.waters)
        raise ScenarioError("waters", unknown(water_id, "a water", ids)) from None


def _located(scenario: Scenario, step_id: str) -> tuple[Owner, int]:
    """The object in whose train a step stands, and its position there."""
    for _, owner in trains(scenario):
        for place, step in enumerate(owner.train):
            if step.id == step_id:
                return owner, place
    raise ScenarioError("train", unknown(step_id, "a step", (step.id for _, step in scenario.steps())))


def _give_ids(scenario: Scenario, steps: list[Step], taken: tuple[str, ...] = ()) -> tuple[str, ...]:
    """New ids for steps that are about to join the scenario; returns all ids given so far."""
    for step in steps:
        step.id = unique_id(scenario, step.id, taken)
        taken = (*taken, step.id)
        if isinstance(step, SideStreamStep):
            taken = _give_ids(scenario, step.train, taken)
    return taken


def _copied(name: str) -> str:
    return f"{name[: NAME_LENGTH - 7]} (copy)"


def _check_new_season(scenario: Scenario, name: str) -> None:
    if name in scenario.seasons:
        raise ScenarioError("seasons", f"{shown(name)} is there already; allowed another name")
    if fault := Scenario.fields()["seasons"].fault([name]):
        raise ScenarioError("seasons", fault)
