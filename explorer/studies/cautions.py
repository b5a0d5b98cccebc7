"""Cautions that go with every result: what it is good for, what is left out, what has to be tested next."""

from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np

from explorer.scenario.evaluate import Outcome
from explorer.scenario.model import DoseStep, Scenario
from explorer.scenario.readouts import READOUTS, in_words
from explorer.scenario.words import in_sentence
from explorer.studies.basis import ASSUMED, HYDROXIDES, assumptions, lets_precipitate, provenance

NOT_POTABLE = "Not drinking water: this scenario is for other uses."

ALWAYS = (
    "Results are estimates for discussion. Design responsibility stays with a competent and, where required,"
    " licensed engineer.",
    "“Meets the entered target” says that a value lies within the limits entered here, and nothing more."
    " Local codes come first; the regulator decides what is allowed.",
    "A change of source, coagulant, inhibitor or disinfectant needs the regulator's approval before it"
    " happens, and usually desk study, jar tests, then months of coupons or loops with real pipe.",
)
FOR_DRINKING = "Products must be certified for drinking water; the certificate limits the dose."

EXCLUDED = (
    ("Kinetics", "every reaction is taken to its end at once; contact times are not looked at"),
    ("Lead and copper", "none predicted; pH, inorganic carbon, phosphate and chloride to sulfate are shown"),
    ("By-products and decay", "neither the decay of chlorine and chloramine nor by-products are modelled"),
    ("Biology", "no nitrification, regrowth or uptake of nutrients"),
    ("Deposits", "no exchange with scale, sediment or pipe material that is there already"),
    ("Colour, taste, particles", "only dissolved substances and the solids that doses form"),
)
"""What no result counts, and what that means."""


@dataclass(frozen=True)
class Hazard:
    """What to beware of with a chemical, and the names of the steps that dose it."""

    chemical: str
    steps: tuple[str, ...]
    cautions: tuple[str, ...]


@dataclass(frozen=True)
class Trial:
    """A test that the result still needs, and why here."""

    what: str
    why: str


def standing_cautions(scenario: Scenario) -> tuple[str, ...]:
    """Sentences that go with every result of a scenario."""
    return (*ALWAYS, FOR_DRINKING) if scenario.potable else ALWAYS


def hazards(scenario: Scenario, outcome: Outcome) -> list[Hazard]:
    """Every chemical dosed that has any, in the order of the train."""
    found: dict[str, Hazard] = {}
    for _, step in scenario.steps():
        if isinstance(step, DoseStep) and step.id in outcome.dosing:
            chemical = outcome.dosing[step.id].chemical
            before = found[step.chemical].steps if step.chemical in found else ()
            names = (*before, outcome.stage(step.id).name)
            found[step.chemical] = Hazard(chemical.name, names, chemical.hazards)
    return [hazard for hazard in found.values() if hazard.cautions]


def next_tests(scenario: Scenario, outcome: Outcome) -> list[Trial]:
    """What has to be tested before anybody relies on an outcome of a single point."""
    return [test for find in _FINDERS for test in find(scenario, outcome)]


# ---- tests that follow from what is in the scenario --------------------------------------------------------


def _of_samples(scenario: Scenario, outcome: Outcome) -> Iterator[Trial]:
    """Waters whose analyses cannot be trusted."""
    for source in provenance(scenario):
        if source.season == outcome.season and not source.before.acceptable:
            why = f"its charge balance is {source.before.percent:+.1f} %, allowed {source.before.limit}"
            yield Trial(f"A new, complete analysis of {source.water}", why.replace("-", "−"))


def _of_assumed(scenario: Scenario, outcome: Outcome) -> Iterator[Trial]:
    measured = [
        entry.what
        for entry in assumptions(scenario, outcome)
        if entry.source == ASSUMED and any(entry.what.endswith(water.title) for water in scenario.waters)
    ]
    if measured:
        yield Trial(f"Measurement of {'; '.join(map(in_sentence, measured))}", "assumed, not measured")


def _of_blend(scenario: Scenario, outcome: Outcome) -> Iterator[Trial]:
    names = [outcome.stage(water).name for water, part in outcome.parts.items() if part > 0]
    if len(names) > 1:
        waters = f"{', '.join(names[:-1])} and {names[-1]}"
        what = f"Bench blends of {waters}, at the ends of the range and at its worst ratio"
        yield Trial(
            what, "two good waters can make a poor blend; the calculated curve wants points beside it"
        )


def _of_buffer(_: Scenario, outcome: Outcome) -> Iterator[Trial]:
    readout = READOUTS["buffer_intensity"]
    value = float(outcome.readout(readout.key))
    if value < 0.2:
        what = (
            "pH in the field with an electrode for low ionic strength, and a titration of the finished water"
        )
        yield Trial(what, f"buffer intensity is only {in_words(value, readout)}")


def _of_coagulant(_: Scenario, outcome: Outcome) -> Iterator[Trial]:
    for stage in outcome.stages:
        dose = outcome.dosing.get(stage.id)
        if dose is not None and any(dose.chemical.totals.get(metal) for metal in HYDROXIDES):
            what = f"Jar tests with {stage.name.lower()} on the coldest and on the most coloured water"
            yield Trial(what, "dose, pH window and dissolved metal differ from water to water")


def _of_equipment(scenario: Scenario, outcome: Outcome) -> Iterator[Trial]:
    words = {
        "limestone": "how near the water gets to saturation depends on contact time, grain and temperature",
        "air": "how much carbon dioxide is exchanged depends on the equipment",
        "settle": "how much calcium carbonate stays in solution depends on seeding, inhibitors and time",
    }
    for stage in outcome.stages:
        idle = stage.kind == "settle" and not lets_precipitate(scenario.step(stage.id))
        if stage.kind in words and not idle:
            yield Trial(f"Pilot run of {stage.name}", words[stage.kind])


def _of_disinfectant(_: Scenario, outcome: Outcome) -> Iterator[Trial]:
    finished = outcome.stage()
    free, combined = (np.any(finished.total(key) > 0) for key in ("free_chlorine", "monochloramine"))
    if free:
        yield Trial("Chlorine demand and decay, and by-products after the longest way", "not modelled")
    if combined:
        yield Trial("Formation and decay of chloramine, free ammonia, signs of nitrification", "not modelled")


def _of_pipes(scenario: Scenario, outcome: Outcome) -> Iterator[Trial]:
    if scenario.potable:
        inhibitor = np.any(outcome.stage().total("phosphate") > 0)
        why = "lead and copper are not predicted" + (", nor what the phosphate does" if inhibitor else "")
        yield Trial("Coupons or loops with real pipe, for months, before any change reaches customers", why)
    else:
        yield Trial(
            "Coupons of the materials in contact with the water, with deposits watched", "not modelled"
        )


_FINDERS: tuple[Callable[[Scenario, Outcome], Iterator[Trial]], ...] = (
    _of_samples, _of_assumed, _of_blend, _of_buffer, _of_coagulant, _of_equipment, _of_disinfectant,
    _of_pipes,
)  # fmt: skip
