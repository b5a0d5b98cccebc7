"""Alarms of the whole picture: what an outcome shows by itself, and what only a sweep can show."""

from collections.abc import Iterator

import numpy as np

from explorer.scenario.alarms import BLEND_TURNS, NOT_LINEAR, Finding, Rule, noted
from explorer.scenario.alarms.finding import COMMON_PRACTICE
from explorer.scenario.alarms.water import NEAR_SATURATION
from explorer.scenario.evaluate import Outcome
from explorer.scenario.model import Scenario
from explorer.scenario.outcome import BLEND, FINISHED
from explorer.scenario.readouts import READOUTS, format_value, in_words
from explorer.studies.sweep import Sweep
from explorer.treatment.notes import Note

INTERIOR_MINIMUM = Rule("interior_minimum", "caution", NOT_LINEAR)
ENDS_MISLEAD = Rule("ends_mislead", "caution", COMMON_PRACTICE)


def alarms(scenario: Scenario, outcome: Outcome, sweep: Sweep | None = None) -> list[Note]:
    """Every alarm for an outcome of a scenario, and for a sweep of it where there is one.

    What the sweep shows of the blend replaces what the outcome alone can say of it.
    """
    found = [note for note in outcome.notes if note.key]
    if sweep is None:
        return found
    along = [noted(INTERIOR_MINIMUM, finding) for finding in _interior_minimum(scenario, sweep)]
    if along:
        found = [note for note in found if note.key != BLEND_TURNS]
    told = {"ccpp"} if along else set()
    return [*found, *along, *(noted(ENDS_MISLEAD, finding) for finding in _ends_mislead(sweep, told))]


def _interior_minimum(scenario: Scenario, sweep: Sweep) -> Iterator[Finding]:
    """A blend that dissolves calcium carbonate between two ends that do not."""
    if not sweep.address.endswith(".share"):
        return
    potential = sweep.outcome.readout("ccpp")
    if not min(potential[0], potential[-1]) >= -NEAR_SATURATION:
        return
    lowest = int(np.nanargmin(potential))
    if potential[lowest] < -NEAR_SATURATION:
        worst = min(
            (extreme for extreme in sweep.extremes("ccpp") if extreme.lowest),
            key=lambda extreme: extreme.value,
            default=None,
        )
        x, value = (sweep.x[lowest], potential[lowest]) if worst is None else (worst.x, worst.value)
        running = [water.title for water in scenario.waters if water.on]
        between = f"between {running[0]} and {running[1]}" if len(running) == 2 else "in between"
        text = (
            f"neither end of the sweep dissolves calcium carbonate, but {between} the water"
            f" {in_words(value, READOUTS['ccpp'])} at worst, at {_at(sweep, float(x))}:"
            f" judge the whole range, every ratio may occur somewhere each day"
        )
        yield Finding(FINISHED, text)


def _ends_mislead(sweep: Sweep, told: set[str]) -> Iterator[Finding]:
    """A target that is met at both ends of the sweep, but not all the way between them."""
    for target, value, met, margin in sweep.outcome.targets():
        inside = np.isfinite(value) & ~met
        if target.readout in told or not (met[0] and met[-1] and inside.any()):
            continue
        readout = READOUTS[target.readout]
        worst = int(np.nanargmin(np.where(np.isfinite(margin), margin, np.inf)))
        text = (
            f"{readout.label} meets its target at both ends of the sweep, but is"
            f" {format_value(value[worst], readout)}{readout.unit_text} at {_at(sweep, sweep.x[worst])}:"
            " judge the whole range"
        )
        yield Finding(FINISHED, text)


def _at(sweep: Sweep, x: float) -> str:
    """A place along the sweep in words."""
    label = sweep.dial.label
    if label[1:2].islower():
        label = label[0].lower() + label[1:]
    return f"{label} {x:.3g} {sweep.dial.unit}".rstrip()


def place_of(outcome: Outcome, where: str) -> str:
    """Name of the stage that a note or an address is about; "" where it is about none."""
    names = {stage.id: stage.name for stage in outcome.stages} | {FINISHED: "Finished water", BLEND: "Blend"}
    return next((names[part] for part in where.split(".") if part in names), "")
