"""What is held in a scenario, whichever way its file says it; setting and releasing holds, in place.

A dose that holds a readout right behind its own step, from nothing up to a ceiling, stands in that step
(``hold``) and is found along one train; every other hold stands under ``holds`` by the address of its dial.
Which of the two a hold becomes follows from what it says. Page and report show both alike.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

from explorer.scenario.compile import compiled
from explorer.scenario.dials import dials, neat, step_name, turn
from explorer.scenario.editing import trains
from explorer.scenario.entity import Entity
from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.evaluate import Outcome
from explorer.scenario.model import DialHold, DoseStep, Hold, Quantity, Scenario, Step
from explorer.scenario.readouts import READOUTS, Readout, format_value
from explorer.scenario.stage import BLEND, FINISHED
from explorer.scenario.words import formula_text, in_sentence, plain, short_number


@dataclass(frozen=True)
class Holding:
    """One hold: the dial at ``address`` (``label``, ``unit``) is computed so that ``readout`` at ``stage``
    has the ``value`` [unit of the readout], from ``low`` to ``high`` [unit of the dial; None: its own limit].

    ``step``: id of the dose step in which it stands, "" for one of the scenario.
    """

    address: str
    label: str
    unit: str
    readout: str
    value: float
    stage: str
    low: float | None
    high: float | None
    step: str = ""

    @property
    def goal(self) -> str:
        """Address of the held value."""
        return _goal(self.address, bool(self.step))


def _goal(address: str, in_step: bool) -> str:
    return f"{address.removesuffix('.dose')}.hold.value" if in_step else f"{address}.hold.value"


def holdings(scenario: Scenario, season: str | None = None) -> dict[str, Holding]:
    """Every hold by the address of the dial that is computed: those of steps in flow order, then the rest."""
    found = {}
    for address, step in _dose_steps(scenario).items():
        if step.hold is not None:
            held, ceiling = step.hold, step.hold.ceiling
            label = f"{step.fields()['dose'].label} of {step_name(scenario, step)}"
            found[address] = Holding(
                address, label, ceiling.unit, held.readout, held.value, step.id, None, ceiling.value, step.id
            )
    every = dials(scenario, season) if scenario.holds else {}
    for address, held in scenario.holds.items():
        dial = every.get(address)
        label, unit = (address, "") if dial is None else (dial.label, dial.unit)
        found[address] = Holding(
            address, label, unit, held.readout, held.value, held.stage, held.low, held.high
        )
    return found


def resting(scenario: Scenario, season: str | None = None) -> set[str]:
    """Held dials of the scenario that stand as entered: the place of their readout is out of service."""
    if not scenario.holds:
        return set()
    return scenario.holds.keys() - {goal.address for goal in compiled(scenario, season).holds}


def met(outcome: Outcome, hold: Holding) -> bool:
    """Whether a hold is met at an outcome of a single point; one that is not in force there counts as met."""
    if hold.step:
        return hold.step not in outcome.dosing or bool(outcome.dosing[hold.step].met)
    return hold.address not in outcome.held or bool(outcome.held[hold.address].met)


def words_of(hold: Holding) -> str:
    """What a hold does, briefly: "holds pH 8.20"."""
    readout = READOUTS[hold.readout]
    return f"holds {in_sentence(formula_text(readout.short))} {goal_text(readout, hold.value)}"


def goal_text(readout: Readout, value: float) -> str:
    """A held value: with the digits of the readout, or more where more were entered."""
    exact = abs(value - round(value, readout.digits)) < 1e-9
    return format_value(value, readout) if exact else short_number(value)


def place_words(scenario: Scenario, stage: str) -> str:
    """Where a readout is taken, in a few words inside a sentence."""
    if stage in (FINISHED, BLEND):
        return in_sentence(place_name(scenario, stage))
    name = place_name(scenario, stage)
    return name if stage in (water.id for water in scenario.waters) else f"behind {name}"


def place_name(scenario: Scenario, stage: str) -> str:
    """Name of a place of the plant."""
    if stage in (FINISHED, BLEND):
        return {FINISHED: "Finished water", BLEND: "Blend"}[stage]
    water = next((water.title for water in scenario.waters if water.id == stage), None)
    return plain(step_name(scenario, scenario.step(stage)) if water is None else water, 60)


def set_hold(scenario: Scenario, address: str, stands: float, **parts: Any) -> None:
    """Hold a readout with the dial at ``address``, or change ``parts`` of its hold: readout, value, stage,
    low, high. ``stands``: value of the dial now, from which it goes on where nothing can be told.

    What hangs on the held value (its tolerance, a sweep over it) stays with it. Raises ScenarioError for an
    address without a dial; whether the hold itself can be is for the rules of the scenario.
    """
    standing = holdings(scenario).get(address)
    wanted: dict[str, Any] = {"readout": None, "value": None, "stage": FINISHED, "low": None, "high": None}
    wanted |= {} if standing is None else {key: getattr(standing, key) for key in wanted}
    wanted |= {key: neat(part) for key, part in parts.items()}
    step = _dose_steps(scenario).get(address)
    if step is None and address not in dials(scenario):
        raise ScenarioError("holds", unknown(address, "a dial of this scenario", dials(scenario)))
    in_step = step is not None and wanted["stage"] == step.id and not wanted["low"]
    in_step = in_step and wanted["high"] is not None
    if in_step:
        _hold_in_step(scenario, step, address, wanted)
    else:
        if step is not None and step.hold is not None:
            step.dose, step.hold = Quantity(neat(stands), step.hold.ceiling.unit), None
        hold = scenario.holds.get(address)
        if hold is None:
            hold = DialHold(readout=wanted["readout"], value=wanted["value"])
            scenario.holds = {**scenario.holds, address: hold}
        _put(hold, wanted)
    if standing is not None:
        _carry(scenario, standing.goal, _goal(address, in_step))


def release(scenario: Scenario, address: str, value: float) -> None:
    """Let the dial at ``address`` stand at ``value``, no longer held. Raises ScenarioError if it is not."""
    held = holdings(scenario)
    if address not in held:
        raise ScenarioError("holds", unknown(address, "a dial that is held", held))
    if held[address].step:
        step = scenario.step(held[address].step)
        step.dose, step.hold = Quantity(neat(value), step.hold.ceiling.unit), None
        return
    scenario.holds = {key: hold for key, hold in scenario.holds.items() if key != address}
    if address in dials(scenario):
        turn(scenario, address, value)


def downstream(scenario: Scenario, address: str) -> list[str]:
    """Ids of the places that a dial reaches, in flow order: those where a hold can be met."""
    common = [BLEND, *_ids(scenario.train), FINISHED]
    parts = address.split(".")
    own = scenario.water(parts[1]) if parts[0] == "waters" and parts[2] not in ("share", "flow") else None
    places = common if own is None else [own.id, *_ids(own.train), *common]
    steps = [parts[place + 1] for place, part in enumerate(parts[:-1]) if part == "train"]
    return places[places.index(steps[-1]) :] if steps else places


def _ids(train: Sequence[Step]) -> Iterator[str]:
    """Ids of the steps in the order in which the water passes; those on a side stream before it joins."""
    for step in train:
        yield from _ids(getattr(step, "train", ()))
        yield step.id


def _dose_steps(scenario: Scenario) -> dict[str, DoseStep]:
    """Dose steps by the address of their dose."""
    return {
        f"{prefix}train.{step.id}.dose": step
        for prefix, owner in trains(scenario)
        for step in owner.train
        if isinstance(step, DoseStep)
    }


def _hold_in_step(scenario: Scenario, step: DoseStep, address: str, wanted: dict[str, Any]) -> None:
    unit = (step.dose if step.hold is None else step.hold.ceiling).unit
    ceiling = Quantity(wanted["high"], unit)
    if step.hold is None:
        step.hold = Hold(readout=wanted["readout"], value=wanted["value"], ceiling=ceiling)
    else:
        _put(step.hold, {"readout": wanted["readout"], "value": wanted["value"], "ceiling": ceiling})
    step.dose = None
    scenario.holds = {key: hold for key, hold in scenario.holds.items() if key != address}


def _put(part: Entity, values: dict[str, Any]) -> None:
    for name, value in values.items():
        setattr(part, name, value)


def _carry(scenario: Scenario, old: str, new: str) -> None:
    """Let what refers to one address refer to another."""
    if old == new:
        return
    scenario.tolerances = {new if key == old else key: part for key, part in scenario.tolerances.items()}
    if scenario.sweep is not None and scenario.sweep.dial == old:
        scenario.sweep.dial = new
    for part in scenario.measured:
        if part.dial == old:
            part.dial = new
