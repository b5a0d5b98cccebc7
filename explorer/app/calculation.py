"""One calculation for a page: operating point and sweep of a scenario, and who may run it."""

from __future__ import annotations

import logging
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import Protocol

from explorer.scenario.evaluate import Outcome, evaluate
from explorer.scenario.model import Scenario
from explorer.studies.sweep import Sweep, sweep

logger = logging.getLogger(__name__)

Questions = Iterable[Callable[[Outcome], None]]
Wanted = tuple[str, str]
"""A readout and the stage it is wanted at."""


@dataclass(frozen=True)
class Results:
    """What one calculation brought: both results, or the sentence that says why there are none.

    ``curve`` numbers the inputs the sweep depends on; ``scenario`` is what has been solved.
    """

    point: Outcome | None
    swept: Sweep | None
    message: str = ""
    curve: int = 0
    scenario: Scenario | None = None


class Runner(Protocol):
    """Runs calculations; may drop a waiting one when a newer one arrives, never applies them out of order."""

    def submit(self, compute: Callable[[], Results], apply: Callable[[Results], None]) -> None: ...


class Immediate:
    """Runner without a queue: computes and applies before ``submit`` returns (tests, headless use)."""

    def submit(self, compute: Callable[[], Results], apply: Callable[[Results], None]) -> None:
        apply(compute())


def warm(wanted: Iterable[Wanted], *outcomes: Outcome) -> None:
    """Work out readouts before they are asked for; stages that an outcome does not have are passed over."""
    for key, stage in wanted:
        for outcome in outcomes:
            if stage in outcome:
                outcome.readout(key, stage)


def solve(
    scenario: Scenario,
    wanted: Iterable[Wanted] = (),
    questions: Questions = (),
    swept: Sweep | None = None,
    curve: int = 0,
) -> Results:
    """Solve the operating point and the sweep of ``scenario``, warm the ``wanted`` readouts of both, and put
    the ``questions`` to the operating point.

    swept: a sweep that still holds and is taken as it is. Never raises: what the user can mend comes back as
    a sentence in ``Results.message``; anything else is logged and said to be so.
    """
    try:
        point = evaluate(scenario)
        swept = swept or sweep(scenario)
        warm(wanted, point, swept.outcome)
        for question in questions:
            question(point)
    except ValueError as error:
        return Results(None, None, str(error), curve)
    except Exception:
        logger.exception("the scenario could not be calculated")
        return Results(None, None, "This could not be calculated; the log of the server says more.", curve)
    return Results(point, swept, curve=curve, scenario=scenario)
