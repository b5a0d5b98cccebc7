"""What an alarm is, and what its rules have in common."""

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from explorer.scenario.readouts import READOUTS, in_words
from explorer.scenario.stage import Stage

if TYPE_CHECKING:
    from explorer.scenario.outcome import Outcome

Level = Literal["info", "caution", "error"]

COMMON_PRACTICE = "common practice"

JOINTS = ("blend", "side_stream")
"""Kinds of stages in which streams meet."""


@dataclass(frozen=True)
class Finding:
    """One place where an alarm applies; ``points``: at which points of the outcome (None: at all).

    ``level`` replaces the level of the alarm where the case is better or worse than usual.
    """

    where: str
    text: str
    points: np.ndarray | None = None
    level: Level | None = None


Find = Callable[["Outcome"], Iterator[Finding]]


@dataclass(frozen=True)
class Rule:
    """What an alarm is about: its ``key``, usual ``level``, and ``source``."""

    key: str
    level: Level
    source: str


@dataclass(frozen=True)
class Alarm(Rule):
    """A rule, and what finds it in an outcome."""

    find: Find


def blended(outcome: "Outcome") -> list[Stage]:
    """The waters that take part in the blend."""
    return [outcome.stage(water) for water, part in outcome.parts.items() if np.any(part > 0)]


def worst(stage: Stage, key: str, points: np.ndarray, lowest: bool = False) -> str:
    """The extreme of a readout among the points, with its unit."""
    values = np.broadcast_to(stage.readout(key), points.shape)[points]
    return in_words(np.min(values) if lowest else np.max(values), READOUTS[key])
