"""What a result rests on: every assumption that nobody measured, and where the measured figures come from."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from explorer.chemistry.constants import solids
from explorer.scenario.compile import compiled
from explorer.scenario.dials import dials, step_name, usual_settings
from explorer.scenario.evaluate import Outcome
from explorer.scenario.fields import Number
from explorer.scenario.holding import goal_text, holdings, met, place_words, resting
from explorer.scenario.measured import ENTRY_RULES
from explorer.scenario.model import AirStep, DoseStep, LimestoneStep, Scenario, SettleStep, Step
from explorer.scenario.readouts import NO_VALUE, READOUTS
from explorer.scenario.words import in_sentence, range_text, short_number
from explorer.studies.hand_checks import figure
from explorer.treatment.analysis import CARBONATE_KEYS, Balance, Measured, examine
from explorer.treatment.chemicals import density

ASSUMED = "assumed"
COMMON_PRACTICE = "common practice"
USUAL_PRODUCT = "usual product, nothing entered"
HYDROXIDES = {"aluminium": "aluminium_hydroxide", "iron": "iron_hydroxide"}


@dataclass(frozen=True)
class Assumption:
    """``what`` is taken to be ``value`` ``unit``; ``basis``: why; ``source``: who says so, or "assumed"."""

    what: str
    value: str
    unit: str
    basis: str
    source: str


@dataclass(frozen=True)
class Provenance:
    """Where an analysis is from, and its charge balance as entered and with the closing ion adjusted.

    Texts are "" where nothing was entered. ``closed_with``: the ion, "" for none.
    """

    water: str
    season: str
    lab: str
    sampled: str
    file: str
    by: str
    note: str
    before: Balance
    after: Balance
    closed_with: str
    remarks: tuple[str, ...]


@dataclass(frozen=True)
class HeldValue:
    """A dial that is computed: ``dial`` takes ``takes`` ``unit``, within ``limits``, so that ``readout`` has
    the value ``goal`` at ``where``. ``state``: whether it does, in words."""

    dial: str
    takes: str
    unit: str
    limits: str
    readout: str
    goal: str
    where: str
    state: str
    met: bool


def held_values(scenario: Scenario, outcome: Outcome) -> list[HeldValue]:
    """Every hold and what an outcome of a single point made of it: doses in flow order, then other dials."""
    every, rests, found = dials(scenario, outcome.season), resting(scenario, outcome.season), []
    for address, hold in holdings(scenario, outcome.season).items():
        readout, dial = READOUTS[hold.readout], every.get(address)
        there = dial is not None or (hold.step in outcome.dosing)
        takes = figure(float(outcome.stands(address))) if there else NO_VALUE
        low = dial.low if hold.low is None and dial is not None else hold.low
        high = dial.high if hold.high is None and dial is not None else hold.high
        is_met = met(outcome, hold)
        state = "met"
        if not there or address in rests:
            state, is_met = "rests: out of service", True
        elif not is_met:
            best = round(float(outcome.readout(hold.readout, hold.stage)), readout.digits)
            state = f"cannot be reached: {goal_text(readout, best)} at best"
        found.append(
            HeldValue(
                hold.label, takes, hold.unit, range_text(low or 0.0, high, ""), readout.label,
                f"{goal_text(readout, hold.value)}{readout.unit_text}",
                place_words(scenario, hold.stage), state, is_met,
            )
        )  # fmt: skip
    return found


def assumptions(scenario: Scenario, outcome: Outcome) -> list[Assumption]:
    """Everything that an outcome of a single point takes for granted, in the order of flow."""
    found = [*_of_analyses(scenario, outcome)]
    for _, step in scenario.steps():
        if any(stage.id == step.id for stage in outcome.stages):
            found += _of_product(scenario, step, outcome) if isinstance(step, DoseStep) else []
            found += _of_defaults(scenario, step)
    return [*found, *_of_chemistry(scenario, outcome)]


def provenance(scenario: Scenario) -> Iterator[Provenance]:
    """Every analysis of every season, waters in service only."""
    for season in scenario.seasons:
        plan = compiled(scenario, season)
        for source in plan.sources:
            if not source.on:
                continue
            analysis = scenario.water(source.id).analyses[season]
            entries = dict(source.entries)
            before = examine(entries, plan.system)
            closing = source.close_with != "none"
            after = examine(entries, plan.system, close_with=source.close_with) if closing else before
            given = analysis.provenance
            yield Provenance(
                source.name,
                season,
                *(given.get(key, "") for key in ("lab", "sampled", "file", "by", "note")),
                before.balance,
                after.balance,
                source.close_with if closing else "",
                tuple(f"{note.where}: {note.text}" for note in after.notes if note.level != "info"),
            )


def _of_analyses(scenario: Scenario, outcome: Outcome) -> Iterator[Assumption]:
    plan = compiled(scenario, outcome.season)
    for source in plan.sources:
        if not source.on:
            continue
        entries = dict(source.entries)
        for key, entry in entries.items():
            what = f"{_label(scenario, key)} of {source.name}"
            if entry.assumed:
                yield Assumption(what, short_number(entry.central), entry.unit, entry.note, ASSUMED)
            if entry.below is not None:
                limit = f"half the limit of detection {short_number(entry.below)}"
                yield Assumption(what, short_number(entry.central), entry.unit, limit, COMMON_PRACTICE)
        yield from _of_reading(source.name, entries)
        missing = examine(entries, plan.system).missing
        if missing:
            first, *others = (_label(scenario, key) for key in missing)
            what = f"{', '.join([first, *map(in_sentence, others)])} of {source.name}"
            yield Assumption(what, "0", "mg/L", "not in the analysis", ASSUMED)
        if source.close_with != "none":
            basis = f"{source.close_with} adjusted until the charges balance"
            yield Assumption(f"Charge of {source.name}", "0", "meq/L", basis, "as entered")


def _of_reading(name: str, entries: dict[str, Measured]) -> Iterator[Assumption]:
    """The temperature of a reading that nobody stated."""
    pair = [key for key in CARBONATE_KEYS if key in entries][:2]
    reading = next((key for key in ("ph", "co2") if key in pair), None)
    if reading is not None and entries[reading].read_at is None:
        water = entries["temperature"]
        what = f"Reading temperature of {in_sentence(ENTRY_RULES[reading].label)} of {name}"
        yield Assumption(what, short_number(water.central), water.unit, "that of the water", ASSUMED)


def _label(scenario: Scenario, key: str) -> str:
    own = next((acid for acid in scenario.acids if acid.id == key), None)
    return (own.name or own.id) if own is not None else ENTRY_RULES[key].label


def _of_product(scenario: Scenario, step: DoseStep, outcome: Outcome) -> Iterator[Assumption]:
    """Strength, density and setting of a product, where the usual ones stand in for entered ones."""
    chemical, name = outcome.dosing[step.id].chemical, step_name(scenario, step)
    for key, value in usual_settings(scenario, step).items():
        if getattr(step, key) is None:
            field = step.fields()[key]
            source = chemical.sources.get(key, COMMON_PRACTICE)
            yield Assumption(
                f"{field.label} of {name}", short_number(value), field.unit, USUAL_PRODUCT, source
            )
    strength = chemical.usual_strength if step.strength is None else step.strength
    heavy = np.nan if strength is None else float(density(chemical, strength))
    if np.isfinite(heavy):
        basis, source = f"at {short_number(strength)} %", chemical.sources.get("density", COMMON_PRACTICE)
        yield Assumption(f"Density of {name}", figure(heavy, 3), "kg/L", basis, source)


def _of_defaults(scenario: Scenario, step: Step) -> Iterator[Assumption]:
    """Settings of a step that were left as they are unless somebody says otherwise."""
    written = step.to_dict()
    for key, field in step.fields().items():
        value = getattr(step, key)
        told = isinstance(value, str | list | int | float) and not isinstance(value, bool)
        if key in written or not told or value in ("", []) or key == "train" or _moot(step, key):
            continue
        text = short_number(value) if isinstance(field, Number) else _listed(value)
        unit = field.unit if isinstance(field, Number) else ""
        yield Assumption(f"{field.label} of {step_name(scenario, step)}", text, unit, "not entered", ASSUMED)


def _moot(step: Step, key: str) -> bool:
    """Whether a setting asks nothing here: of the air where the CO2 left is stated, of the solids where none
    form."""
    if isinstance(step, AirStep):
        return step.approach is None
    return isinstance(step, SettleStep) and key == "solids" and not lets_precipitate(step)


def lets_precipitate(step: Step) -> bool:
    """Whether carbonate or hydroxide may leave the water, or enter it from a bed, in a step."""
    if isinstance(step, SettleStep):
        return step.full or step.residual is not None
    return isinstance(step, LimestoneStep)


def _listed(value: object) -> str:
    return ", ".join(value) if isinstance(value, list) else str(value)


def _of_chemistry(scenario: Scenario, outcome: Outcome) -> Iterator[Assumption]:
    if any(np.any(stage.total("organic_carbon") > 0) for stage in outcome.stages):
        density = short_number(scenario.organic_charge_density)
        source = "Oliver, Thurman & Malcolm 1983"
        yield Assumption("Acid groups of organic carbon", density, "µeq/mg C", "all waters alike", source)
    for component, solid in HYDROXIDES.items():
        if solid in outcome.stage().solids or any(solid in stage.solids for stage in outcome.stages):
            constant = solids()[solid]
            basis = f"log K of {constant.text}; sets what stays dissolved"
            value = figure(constant.log_k25, 3)
            yield Assumption(f"Solubility of {component} floc", value, "", basis, constant.source)
    gas = [stage.name for stage in outcome.stages if stage.kind == "air"]
    open_to_air = f"except in {', '.join(gas)}" if gas else "no gas comes or goes"
    yield Assumption("Contact with air", "none", "", open_to_air, ASSUMED)
    running = {stage.id for stage in outcome.stages}
    settled = [
        step_name(scenario, step)
        for _, step in scenario.steps()
        if step.id in running and lets_precipitate(step)
    ]
    where = f"except in {', '.join(settled)}; " if settled else ""
    basis = f"{where}hydroxides of aluminium and iron form at once"
    yield Assumption("Precipitation", "none", "", basis, "supersaturation is not precipitation")
    yield Assumption("Reactions", "at their end", "", "kinetics are not modelled", ASSUMED)
