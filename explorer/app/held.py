"""Dials that are computed: which they are, what they came to, and how that is worded everywhere."""

from __future__ import annotations

import math
from collections.abc import Mapping

from explorer.scenario.dials import is_share, step_name
from explorer.scenario.evaluate import Outcome
from explorer.scenario.holding import Holding
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import READOUTS, Readout, format_value
from explorer.scenario.stage import BLEND, FINISHED
from explorer.scenario.words import formula_text, in_sentence, plain

Held = Mapping[str, Holding]


def fixed(scenario: Scenario, held: Held, address: str) -> str:
    """Why a dial cannot be turned by hand, as the end of a sentence about it; "" where it can."""
    if address in held:
        return f"is computed: it {words_of(held[address])}; release the hold to set it by hand"
    if takes_rest(scenario, held, address):
        return "takes what a held share leaves; release that hold to set it by hand"
    return ""


def takes_rest(scenario: Scenario, held: Held, address: str) -> bool:
    """Whether a share is what the held ones leave: it is the only other one, or that of the balance water."""
    if not is_share(address) or not any(map(is_share, held)):
        return False
    free = [water.id for water in scenario.waters if water.on and f"waters.{water.id}.share" not in held]
    taking = [scenario.balance_water] if scenario.balance_water in free else free
    return taking == [address.split(".")[1]]


def is_computed(held: Held, address: str) -> bool:
    """Whether a dial may stand elsewhere than entered: it is held, or a share beside a held one."""
    return address in held or (is_share(address) and any(map(is_share, held)))


def computed(point: Outcome | None, address: str) -> float:
    """Value of a dial that is computed; nan without a result."""
    try:
        return math.nan if point is None else float(point.stands(address))
    except (KeyError, TypeError):
        # The plant has changed since, or the result is of a sweep.
        return math.nan


def met(point: Outcome | None, hold: Holding) -> bool:
    """Whether a hold is met; without a result it counts as met."""
    if point is None:
        return True
    if hold.step:
        return hold.step not in point.dosing or bool(point.dosing[hold.step].met)
    return hold.address not in point.held or bool(point.held[hold.address].met)


def words_of(hold: Holding) -> str:
    """What a hold does, briefly: "holds pH 8.20"."""
    readout = READOUTS[hold.readout]
    return f"holds {in_sentence(formula_text(readout.short))} {goal_text(readout, hold.value)}"


def goal_text(readout: Readout, value: float) -> str:
    """A held value: with the digits of the readout, or more where more were entered."""
    text = format_value(value, readout)
    return text if math.isclose(value, round(value, readout.digits), abs_tol=1e-9) else f"{value:.6g}"


def place_words(scenario: Scenario, stage: str) -> str:
    """Where a readout is taken, in a few words."""
    if stage in (FINISHED, BLEND):
        return {FINISHED: "finished water", BLEND: "blend"}[stage]
    return _water(scenario, stage) or f"behind {place_name(scenario, stage)}"


def place_name(scenario: Scenario, stage: str) -> str:
    """Name of a place of the plant."""
    if stage in (FINISHED, BLEND):
        return {FINISHED: "Finished water", BLEND: "Blend"}[stage]
    return _water(scenario, stage) or plain(step_name(scenario, scenario.step(stage)), 60)


def _water(scenario: Scenario, stage: str) -> str:
    return next((plain(water.title, 60) for water in scenario.waters if water.id == stage), "")
