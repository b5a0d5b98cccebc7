"""The record behind a session: the scenario, its past and future, and what the views show."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

from explorer.scenario.model import Scenario

MOST_STEPS = 200
"""Undo steps kept; the oldest are forgotten."""


@dataclass
class Step:
    """One undo step: its name, what it merges with, and the scenario before it."""

    label: str
    key: str
    before: dict[str, Any]
    at: float
    file_name: str | None = None
    """What the file was called before, where the step opened another."""


@dataclass
class Work:
    """The plain record behind a session: what has to survive a reload of the tab."""

    scenario: Scenario
    file_name: str = ""
    """Of the file that was opened or saved as; "" while there is none."""
    saved: dict[str, Any] | None = None
    choices: dict[str, Any] = field(default_factory=dict)
    past: list[Step] = field(default_factory=list)
    future: list[Step] = field(default_factory=list)

    def copy(self) -> Work:
        """Independent record: the scenario is copied, history entries are never mutated and may be shared."""
        return Work(
            self.scenario.copy(),
            self.file_name,
            self.saved,
            dict(self.choices),
            list(self.past),
            list(self.future),
        )
