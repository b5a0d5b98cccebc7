"""What a report is about: one scenario in one season, and everything worked out from it, once."""

from collections.abc import Iterator, Sequence
from functools import cached_property

import numpy as np

from explorer.chemistry.components import FAMILIES
from explorer.scenario.dials import step_name
from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.evaluate import Outcome, evaluate
from explorer.scenario.model import Scenario, SideStreamStep, Step
from explorer.scenario.readouts import READOUTS, Readout, format_value, in_words
from explorer.studies.alarms import alarms, place_of
from explorer.studies.finding import finding
from explorer.studies.ledger import Ledger, ledger
from explorer.studies.pictures import Axis
from explorer.studies.sweep import Sweep, sweep
from explorer.studies.sweep_pictures import swept_axis
from explorer.studies.verdict import Verdict
from explorer.treatment.notes import Note

USUAL = (
    "ph", "alkalinity", "calcium", "ccpp", "buffer_intensity", "dic", "hardness", "langelier_index",
    "larson_ratio", "chloride_sulfate_ratio", "conductivity",
)  # fmt: skip
"""Results of most interest, after those with a target."""


def value_text(value: float, readout: Readout) -> str:
    """A result as the page and the command line show it, without unit; with the word for its sign."""
    if readout.sign_words:
        return in_words(value, readout).removesuffix(readout.unit_text)
    return format_value(value, readout)


def span_text(low: float, high: float, readout: Readout) -> str:
    """Two results as a range, with the word for their sign once where both have the same."""
    first, last = value_text(low, readout), value_text(high, readout)
    word = first.split(" ")[0] + " " if " " in first else ""
    return f"{first} to {last.removeprefix(word)}"


class Case:
    """A scenario as it stands, in its own season. Raises ScenarioError where it cannot be evaluated."""

    def __init__(self, scenario: Scenario) -> None:
        self.scenario = scenario
        self.season = scenario.season
        self.outcome: Outcome = evaluate(scenario)
        self.swept: Sweep = sweep(scenario)

    @cached_property
    def verdict(self) -> Verdict:
        """The decision sentence."""
        return finding(self.outcome, self.swept)

    @cached_property
    def along(self) -> Axis:
        """The dial of the sweep."""
        return swept_axis(self.swept)

    @cached_property
    def alarms(self) -> list[Note]:
        """Every alarm, of the point and of the sweep, and what else there is to beware of."""
        beside = [note for note in self.outcome.notes if not note.key and note.level != "info"]
        return [*alarms(self.scenario, self.outcome, self.swept), *beside]

    @cached_property
    def ledger(self) -> Ledger | None:
        """What everything brings and takes; None where there is no answer."""
        unanswered = str(self.outcome.reasons())
        return None if unanswered else ledger(self.scenario, self.outcome)

    def results(self, most: int) -> list[str]:
        """Readouts worth a row: those with targets, then the usual ones that have a value."""
        aimed = [target.readout for target in self.scenario.targets]
        usual = [key for key in USUAL if np.isfinite(self.swept.outcome.readout(key)).any()]
        return list(dict.fromkeys([*aimed, *usual]))[: max(most, len(dict.fromkeys(aimed)))]

    def value(self, key: str, stage: str = "finished") -> float:
        """A readout at the operating point."""
        return float(self.outcome.readout(key, stage))

    def places(self) -> Iterator[tuple[str, list[tuple[int, Step]]]]:
        """Every train with the words for where it stands, in the order of flow; empty ones left out. A step
        on a side stream follows the one it belongs to, with the number of side streams it is in."""
        places = [(f"{water.title}, before the blend", water.train) for water in self.scenario.waters]
        for place, train in [*places, ("After the blend", self.scenario.train)]:
            if train:
                yield place, list(_with_sides(train, 0))

    def name(self, step: Step) -> str:
        """Name of a step."""
        return step_name(self.scenario, step)

    def place_of(self, where: str) -> str:
        """Name of what a note or address is about; "" where it has none."""
        return place_of(self.outcome, where)

    def family_name(self, family: str) -> str:
        """Printed name of a family of species. Raises ScenarioError for one that is not known."""
        names = {key: key for key in FAMILIES} | {a.id: a.name or a.id for a in self.scenario.acids}
        if family not in names:
            raise ScenarioError("family", unknown(family, "a family of species", names))
        return names[family]

    def readouts(self) -> list[str]:
        """Readouts that the finished water has."""
        return [key for key in READOUTS if np.isfinite(self.value(key))]


def _with_sides(train: Sequence[Step], depth: int) -> Iterator[tuple[int, Step]]:
    for step in train:
        yield depth, step
        if isinstance(step, SideStreamStep):
            yield from _with_sides(step.train, depth + 1)
