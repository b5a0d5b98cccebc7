"""The compare view: options, seasons and sources off side by side, only what differs, and their sweeps."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from contextlib import suppress
from dataclasses import dataclass
from functools import partial
from itertools import groupby
from typing import Any

import panel as pn

from explorer.app.bar_parts import OptionChips
from explorer.app.entry import Entries
from explorer.app.errand import REST, Errand, progress
from explorer.app.live_view import Node, node
from explorer.app.look import COMPARE_GRID_CSS, PLOT_CARD_CSS, VIEW_HOST_CSS, Palette
from explorer.app.plot_heads import ReadoutHead, readout_choice
from explorer.app.plots import LinkedPlots
from explorer.app.sheet import Sheet, Strip
from explorer.app.state import Session
from explorer.app.tables import Group, Row, csv_button, table
from explorer.app.text import plain, unit_text
from explorer.app.tiles import STATES
from explorer.app.view import View
from explorer.scenario.errors import ScenarioError
from explorer.scenario.model import Scenario
from explorer.studies.compare import (
    OPTION,
    Case,
    Comparison,
    compare,
    current_case,
    option_cases,
    overlay,
    season_cases,
    source_off_cases,
)
from explorer.studies.compare import Row as Line
from explorer.studies.compare_pictures import overlay_picture, sign_of
from explorer.studies.pictures import Memory
from explorer.studies.sweep import Sweep
from explorer.studies.sweep_pictures import swept_axis

KINDS: dict[str, tuple[str, Callable[[Scenario], list[Case]]]] = {
    "options": ("Options", option_cases),
    "seasons": ("Other seasons", season_cases),
    "sources": ("Each source off", source_off_cases),
}
"""What the scenario as it stands can be compared with: key, words, and what makes the cases."""

CURVE = "overlay"

HOW = (
    "Nothing to compare yet. “Keep as option” holds everything as it stands, with its results; then turn a"
    " dial, change a step or a season, and both stand here side by side, with only the rows that differ."
)


@dataclass(frozen=True)
class Curves:
    """Sweeps of the cases that can be swept along the dial of the first, among all ``cases``."""

    cases: Sequence[Case]
    found: Sequence[tuple[Case, Sweep]]


class CompareView(View):
    """Table of what differs, and one readout along the sweeps of all cases."""

    watched = ("point", "choices", "stale")

    def __init__(self, session: Session) -> None:
        super().__init__(session)
        self.table: Comparison | None = None
        self.curves: Curves | None = None
        self.errand = Errand()
        self.chips = OptionChips(session, Entries(), self._refresh)
        self.controls = Strip(self._controls)
        self.sheet = Sheet(self._sheet)
        self.plots = LinkedPlots([CURVE], session.turn_along, columns=1, named=True, saved_as="compared")
        self.head = ReadoutHead(session)
        self.head.saved = partial(self.plots.plate, CURVE)
        self._memory = Memory()
        self._asked: tuple[Any, ...] = ()
        self._made: tuple[Scenario | None, dict[str, list[Case]]] = (None, {})
        self.card = pn.Column(
            self.head, pn.pane.Bokeh(self.plots.plots[CURVE].figure, sizing_mode="stretch_both", margin=0),
            sizing_mode="stretch_both", margin=0, css_classes=["plot"], stylesheets=[PLOT_CARD_CSS],
        )  # fmt: skip
        grid = pn.Column(
            self.sheet, self.card, sizing_mode="stretch_both", margin=0, stylesheets=[COMPARE_GRID_CSS]
        )
        self.view = pn.Column(
            self.controls, grid, sizing_mode="stretch_both", margin=0, stylesheets=[VIEW_HOST_CSS]
        )
        self.errand.param.watch(self._errand_changed, ["busy", "part", "stopped", "refusal"])

    def restyle(self, palette: Palette) -> None:
        super().restyle(palette)
        self.plots.restyle(palette)

    # ---- which cases ---------------------------------------------------------------------------------

    @property
    def kinds(self) -> tuple[str, ...]:
        """Kinds of cases that are shown: the user's choice, else options and seasons, or sources off where
        there are neither."""
        kept = self.session.choices.get("compare")
        if kept is not None:
            return tuple(kind for kind in KINDS if kind in kept)
        usual = ("options", "seasons")
        return usual if any(self._cases(kind) for kind in usual) else ("sources",)

    def _cases(self, kind: str) -> list[Case]:
        """Cases of a kind; made once for every scenario, for they are copies of all of it."""
        solved = self.session.solved
        if solved is None:
            return []
        if self._made[0] is not solved:
            self._made = solved, {}
        _, made = self._made
        if kind not in made:
            made[kind] = KINDS[kind][1](solved)
        return made[kind]

    def cases(self) -> list[Case]:
        """The scenario as it stands, and what it is compared with."""
        others = [case for kind in self.kinds for case in self._cases(kind)]
        return [current_case(self.session.solved), *others]

    # ---- calculating ---------------------------------------------------------------------------------

    def follow(self, changed: set[str]) -> None:
        if self.session.point is None:
            self._refresh()
            return
        asked = (self.session.point, self.kinds)
        if asked == self._asked:
            self.show()
            return
        self._asked = asked
        self._start(REST if self.table is not None else 0.0)

    def closed(self) -> None:
        super().closed()
        if self.errand.under_way:
            self.errand.drop()
            self._asked = ()

    def _start(self, rest: float = 0.0) -> None:
        cases = self.cases()
        self._refresh()

        def work(watch: Any) -> Iterator[Comparison | Curves]:
            yield compare(cases)
            # Where there is nothing to sweep the table stands alone.
            with suppress(ScenarioError):
                yield Curves(cases, overlay(cases))

        self.errand.start(work, self._take, rest)

    def _take(self, result: Comparison | Curves) -> None:
        if isinstance(result, Curves):
            self.curves = result
        else:
            self.table = result
        self.show()

    def _errand_changed(self, *events: Any) -> None:
        self.controls.refresh()

    # ---- showing -------------------------------------------------------------------------------------

    def show(self) -> None:
        """Bring table and plot to what was found last."""
        self._refresh()
        self.head.refresh()
        if self.curves is None:
            return
        (now, swept), key = self.curves.found[0], readout_choice(self.session)
        slot = f"{key} {swept.address}"
        previous = self._memory.limits.get(slot)
        picture = overlay_picture(self.curves.cases, self.curves.found, key, now.scenario.targets, previous)
        self._memory.keep(slot, picture)
        along = swept_axis(swept)
        self.plots.set_axis(along)
        self.plots.show({CURVE: picture}, along)
        if swept.address in self.session.dials:
            self.plots.set_point(self.session.value(swept.address), swept.dial.step)
        self.head.say(picture)

    def _refresh(self) -> None:
        self.controls.refresh()
        self.sheet.refresh()

    def _controls(self) -> Node:
        shown = self.kinds
        boxes = [self._box(kind, words, kind in shown) for kind, (words, _) in KINDS.items()]
        ask = self.chips.renaming() if self.chips.renamed is not None else self.chips.keeping()
        return node(
            "div", "controls",
            node("div", "group", node("span", text="Now beside"), *boxes, role="group",
                 aria_label="What is compared"),
            node("div", "group", *ask), progress(self.errand, self._start, "Comparison"),
            node("span", "push"), csv_button(self.session, "comparison", self._csv),
        )  # fmt: skip

    def _box(self, kind: str, words: str, shown: bool) -> Node:
        there = bool(self._cases(kind))
        box = node(
            "input", key=f"kind:{kind}", type="checkbox", checked=shown and there, disabled=not there,
            on=self._toggle(kind),
        )  # fmt: skip
        return node("label", "tick", box, node("span", text=words))

    def _toggle(self, kind: str) -> Callable[[Any], None]:
        def take(on: Any) -> None:
            others = [other for other in self.kinds if other != kind]
            self.session.choose(compare=[*others, kind] if on else others)

        return take

    def _csv(self) -> list[list[Any]]:
        return self.table.table() if self.table is not None else []

    # ---- table ---------------------------------------------------------------------------------------

    def _sheet(self) -> Node:
        look = "pane stale" if self.session.stale else "pane"
        side_by_side = self.table
        if side_by_side is None:
            none = "There is no result yet."
            words = none if self.session.point is None else "The cases are being calculated …"
            return node("div", look, node("p", "nothing", text=words))
        if len(side_by_side.cases) < 2:
            return node("div", look, node("div", "card", node("p", "nothing", text=HOW)))
        rows = list(self._rows(side_by_side))
        nothing = node("p", "nothing", text="Nothing differs between these.")
        heading = [
            "Dial or result",
            *(self._heading(place, case) for place, case in enumerate(side_by_side.cases)),
        ]
        drawn = table("Comparison, only what differs", heading, rows, look="wide compared")
        return node("div", look, node("div", "card grow", drawn if rows else nothing))

    def _heading(self, place: int, case: Case) -> Node:
        colour = "var(--accent)" if not place else f"var(--series-{(place - 1) % 8})"
        options = self.session.scenario.options
        kept = next((option for option in options if case.kind == OPTION and option.name == case.name), None)
        more = [] if kept is None else self.chips.more(kept, f"option:{case.letter}")
        return node(
            "div", "case",
            node("div", "name", node("span", "stroke", colour=colour, aria_hidden="true"),
                 node("span", text=plain(case.title, 40), title=plain(case.note, 300) or None), *more),
            node("small", text=plain(case.note or sign_of(case), 160), title=plain(case.note, 300) or None),
        )  # fmt: skip

    def _rows(self, side_by_side: Comparison) -> Iterator[Row | Group]:
        for place, problem in enumerate(side_by_side.problems):
            if problem:
                yield Row([f"▲ {side_by_side.cases[place].title}: {plain(problem, 300)}",
                           *([""] * len(side_by_side.cases))], "problem")  # fmt: skip
        for section, lines in groupby(side_by_side.rows, key=lambda line: line.section):
            yield Group(section)
            yield from (_row(line) for line in lines)


def _row(line: Line) -> Row:
    unit = node("small", text=unit_text(line.unit)) if line.unit else None
    label = node("span", "", node("span", text=plain(line.label, 90)), unit)
    statuses: Sequence[str] = line.statuses or [""] * len(line.texts)
    return Row([label, *(_value(*pair) for pair in zip(line.texts, statuses, strict=True))])


def _value(text: str, state: str) -> Node | str:
    if not state:
        return plain(text, 80)
    look, words = STATES.get(state, ("none", "no value"))
    return node("span", "", node("span", text=plain(text, 80)), node("small", f"state {look}", text=words))
