"""Kept options on the page: their results, and which of them the readouts are compared with."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from explorer.app.calculation import Immediate, Runner, Wanted, warm
from explorer.app.state import Session
from explorer.scenario.evaluate import Outcome, evaluate
from explorer.scenario.readouts import MINUS, Readout, format_value
from explorer.scenario.words import number_text
from explorer.studies.compare import Case, current_case, option_cases, overlay
from explorer.studies.pictures import Line
from explorer.studies.sweep import Sweep

MOST_CURVES = 5
"""Kept options whose curves are drawn at most, the first ones."""


@dataclass(frozen=True)
class Kept:
    """A kept option with its results; None where it has none (``swept`` also where it is not drawn)."""

    case: Case
    point: Outcome | None
    swept: Sweep | None

    @property
    def letter(self) -> str:
        return self.case.letter

    @property
    def name(self) -> str:
        return self.case.name


def selected(session: Session) -> Kept | None:
    """The option the readouts are compared with, None while there is none."""
    chosen = session.choices.get("option")
    return next((kept for kept in session.kept if kept.name == chosen), None)


def hidden(session: Session) -> list[str]:
    """Names of the options without a curve in the plots."""
    return list(session.choices.get("hidden", ()))


def difference(value: float, other: float, readout: Readout) -> str:
    """How far a value is from that of an option, with the decimals the value is printed with; "" for nan."""
    change = value - other
    if change != change:
        return ""
    decimals = len(format_value(value, readout).partition(".")[2])
    text = number_text(change, decimals, signed=True)
    return text if text.strip("+0." + MINUS) else "±0"


def option_curves(session: Session) -> list[tuple[Line, Sweep]]:
    """The options to draw along the session's sweep: letter, colour and dash of each, and its own sweep.

    Curves along another dial or range than the session's, about to be replaced, are left out.
    """
    swept = session.swept
    found = []
    for place, kept in enumerate(session.kept):
        own = kept.swept
        if own is not None and swept is not None and _along(own) == _along(swept):
            found.append((Line(kept.letter, np.array([]), place, place + 1), own))
    return found


def _along(swept: Sweep) -> tuple[str, float, float, int]:
    """What a sweep runs along: its dial, both ends, and how many points."""
    return swept.address, float(swept.x[0]), float(swept.x[-1]), swept.x.size


class Options:
    """Keeps ``session.kept`` at what is kept in the scenario; dials can be turned without
    solving options anew."""

    def __init__(self, session: Session, runner: Runner | None = None) -> None:
        self.session = session
        self.runner = runner or Immediate()
        self._asked: Any = None
        session.param.watch(self._changed, ["structure", "swept", "choices"])
        self._changed()

    def _changed(self, *events: Any) -> None:
        session = self.session
        cases, away = option_cases(session.scenario), hidden(session)
        swept = session.swept
        line = None if swept is None else _along(swept)
        drawn = [case for case in cases if case.name not in away][:MOST_CURVES]
        # Scenarios are compared by identity, which a frozen option keeps while dials are turned.
        asked = (cases, drawn, line)
        if asked == self._asked:
            return
        self._asked = asked
        if not cases:
            if session.kept:
                session.kept = ()
            return
        first, wanted = current_case(session.scenario.copy()), frozenset(session.wanted)
        self.runner.submit(lambda: _results(first, cases, drawn, line, wanted), self._apply)

    def _apply(self, kept: tuple[Kept, ...]) -> None:
        self.session.kept = kept


def _results(
    first: Case,
    cases: Sequence[Case],
    drawn: Sequence[Case],
    line: tuple[str, float, float, int] | None,
    wanted: frozenset[Wanted],
) -> tuple[Kept, ...]:
    """Results of all cases; ``first`` gives the dial that the curves of the ``drawn`` ones run along."""
    curves: dict[str, Sweep] = {}
    if line is not None and drawn:
        try:
            curves = {case.name: swept for case, swept in overlay([first, *drawn], *line)[1:]}
        except ValueError:
            curves = {}
    found = []
    for case in cases:
        try:
            point = evaluate(case.scenario, season=case.season)
        except ValueError:
            point = None
        swept = curves.get(case.name)
        warm(wanted, *(part for part in (point, swept and swept.outcome) if part is not None))
        found.append(Kept(case, point, swept))
    return tuple(found)
