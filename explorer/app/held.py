"""Dials that are computed: which they are, why they cannot be turned, and what they came to."""

from __future__ import annotations

import math
from collections.abc import Mapping

from explorer.scenario.dials import is_share
from explorer.scenario.evaluate import Outcome
from explorer.scenario.holding import Holding, words_of
from explorer.scenario.model import Scenario

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
