"""The ledger view: what every source, dose, solid and gas brings or takes, and sums to check by hand."""

from __future__ import annotations

import math
from collections.abc import Iterator
from itertools import groupby

import numpy as np

from explorer.app.live_view import Node, node
from explorer.app.pickers import segments
from explorer.app.sheet import SheetView
from explorer.app.tables import Group, Row, csv_button, over, table
from explorer.app.text import plain, unit_text
from explorer.scenario.errors import ScenarioError
from explorer.scenario.words import number_text
from explorer.studies.hand_checks import HandCheck, figure, hand_checks
from explorer.studies.ledger import SUM, Column, Ledger, Line, ledger

LITRE, DAY = "litre", "day"
"""Whether amounts are per litre of finished water, or a day."""

FIGURES = 3
"""Significant figures of the largest amount of a column; the others have as many decimals."""


class LedgerView(SheetView):
    """The ledger of the operating point as a table, whether it closes, and the hand checks."""

    watched = ("point", "stale", "choices")

    def describe(self) -> Node:
        found = self._ledger()
        look = "pane stale" if self.session.stale else "pane"
        if not isinstance(found, Ledger):
            return node("div", look, node("p", "nothing", text=found))
        per = self._per(found)
        return node(
            "div", look,
            node("div", "controls", self._switch(found, per), _closing(found), node("span", "push"),
                 csv_button(self.session, "ledger", lambda: found.table(per_day=per == DAY))),
            node("div", "card grow", self._table(found, per)),
            node("div", "card", *self._checks(), role="region", aria_label="Hand checks"),
        )  # fmt: skip

    def _ledger(self) -> Ledger | str:
        """The ledger, or why there is none."""
        if self.session.point is None:
            return "There is no result yet."
        try:
            return ledger(self.session.solved, self.session.point)
        except ScenarioError as error:
            return f"{error}."

    # ---- table ---------------------------------------------------------------------------------------

    def _per(self, found: Ledger) -> str:
        return DAY if self.session.choices.get("ledger") == DAY and math.isfinite(found.flow) else LITRE

    def _switch(self, found: Ledger, per: str) -> Node:
        options = {
            LITRE: ("mg/L", "Per litre of finished water"),
            DAY: ("kg/d", "Per day at the present flow"),
        }
        no_flow = () if math.isfinite(found.flow) else (DAY,)
        return segments("per", "Amounts", options, per, self._choose, no_flow)

    def _choose(self, per: str) -> None:
        self.session.choose(ledger=per)

    def _table(self, found: Ledger, per: str) -> Node:
        def scaled(amounts: np.ndarray) -> np.ndarray:
            return found.loads(amounts) if per == DAY else amounts

        ends = {"Finished water, the sum of all lines": found.finished}
        if not found.closed:
            ends = {"Sum of the lines": found.total, "Finished water": found.finished}
        everything = [scaled(part) for part in (*(line.amounts for line in found.lines), *ends.values())]
        digits = [_digits(values) for values in np.transpose(everything)]

        def row(text: str, amounts: np.ndarray, signed: bool, look: str = "") -> Row:
            figures = [_amount(*pair, signed) for pair in zip(scaled(amounts), digits, strict=True)]
            return Row([plain(text, 160), *figures], look)

        def lines() -> Iterator[Row | Group]:
            for place, group in groupby(found.lines, key=lambda line: line.place):
                yield Group(plain(place, 80))
                yield from (row(line.text, line.amounts, *_manner(line)) for line in group)

        caption = "Ledger, " + ("amounts a day" if per == DAY else "amounts per litre of finished water")
        return table(
            caption, ["Stage", *(_heading(column, per) for column in found.columns)], lines(),
            foot=[row(text, amounts, False, "total") for text, amounts in ends.items()], look="wide",
        )  # fmt: skip

    # ---- hand checks ---------------------------------------------------------------------------------

    def _checks(self) -> list[Node]:
        checks = hand_checks(self.session.solved, self.session.point)
        if not checks:
            return [node("p", "nothing", text="No hand check fits this case.")]
        return [
            node("h3", text="Check by hand"),
            table("Hand checks: the arithmetic, its result, and that of the engine",
                  ["On paper", "By hand", "Engine", "Difference"], map(_check, checks), look="loose"),
        ]  # fmt: skip

    def follow(self, changed: set[str]) -> None:
        super().follow(changed)


def _heading(column: Column, per: str) -> Node:
    unit = unit_text(column.unit)
    unit = unit.replace("mg/L", "kg/d") if per == DAY else unit
    return over(plain(column.label, 40), unit)


def _manner(line: Line) -> tuple[bool, str]:
    """Whether a line's amounts carry a sign, and its look."""
    if line.kind == SUM:
        return False, "sum"
    return line.kind != "source", line.kind


def _digits(values: np.ndarray) -> int:
    """Decimals for the amounts of a column."""
    largest = float(np.max(np.abs(values), initial=0.0))
    return int(np.clip(FIGURES - 1 - math.floor(math.log10(largest)), 0, 4)) if largest > 0 else 0


def _amount(value: float, digits: int, signed: bool) -> str:
    """An amount; nothing where nothing is added or taken."""
    return number_text(float(value), digits, signed) if value else ""


def _closing(found: Ledger) -> Node:
    parts = np.abs(found.relative)
    off = float(np.max(parts, initial=0.0))
    if found.closed:
        hint = f"Largest difference {off:.0e} of what came and went"
        words = "The lines add up to the finished water in every column"
        return node("span", "status ok", text=f"✓ {words}", title=hint)
    worst = plain(found.columns[int(np.argmax(parts))].label, 40)
    words = f"{worst} does not add up: {100 * off:.2g} % of what came and went is not explained"
    return node("span", "status bad", text=f"✕ {words}")


def _check(check: HandCheck) -> Row:
    def with_unit(value: float) -> str:
        return f"{figure(value)} {unit_text(check.unit)}".strip()

    words = check.sentence.removesuffix(" ")
    percent = number_text(check.percent, 1, signed=True)
    return Row([plain(words, 390), with_unit(check.hand), with_unit(check.engine), f"{percent} %"])
