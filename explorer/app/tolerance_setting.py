"""What the tolerance view is set to: readout, samples, seed, and which of its two pages is open."""

from __future__ import annotations

import json
from dataclasses import dataclass
from typing import Any

from explorer.app.state import Session
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import READOUTS
from explorer.studies.spread import spread_of
from explorer.studies.tolerance import USUAL_SAMPLES, USUAL_SEED

RESULTS, TABLE = "results", "table"
SAMPLES = (512, 2048, 8192)
MOST_SEED = 999_999

_ELSEWHERE = ("title", "note", "options")
"""Parts of a scenario on which no spread depends."""


@dataclass(frozen=True)
class Setting:
    """A readout, the number of samples and their seed."""

    readout: str
    samples: int
    seed: int

    def inputs(self, scenario: Scenario) -> str:
        """Everything the spread depends on, as text."""
        return json.dumps([plant_text(scenario), self.readout, self.samples, self.seed], sort_keys=True)


def plant_text(scenario: Scenario) -> str:
    """Everything about a plant on which a spread depends, as text."""
    plant = {key: part for key, part in scenario.to_dict().items() if key not in _ELSEWHERE}
    return json.dumps(plant, sort_keys=True)


def setting(session: Session) -> Setting:
    """What is chosen: at first the readout of the first target, and the usual samples."""
    chosen = session.choices.get("tolerance", {})
    readout = chosen.get("readout")
    if readout not in READOUTS:
        readout = next((target.readout for target in session.scenario.targets), "ph")
    samples = chosen.get("samples")
    return Setting(
        readout, samples if samples in SAMPLES else USUAL_SAMPLES, int(chosen.get("seed", USUAL_SEED))
    )


def anything_off(session: Session) -> bool:
    """Whether anything in the scenario may be off."""
    return len(spread_of(session.scenario)) > 0


def page(session: Session) -> str:
    """The open page; where nothing may be off it is the table, in which that is entered."""
    chosen = session.choices.get("tolerance", {}).get("page", RESULTS)
    return TABLE if chosen == TABLE or not anything_off(session) else RESULTS


def choose(session: Session, **parts: Any) -> None:
    """Change what is chosen."""
    session.choose(tolerance={**session.choices.get("tolerance", {}), **parts})
