"""Taking over a laboratory sheet: pasted, understood line by line, corrected, and only then entered."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import PurePath
from typing import Any

from explorer.app.desk import Desk, beside
from explorer.app.entry import message, show_number
from explorer.app.live_view import Node, node
from explorer.app.text import plain, unit_text
from explorer.scenario import editing
from explorer.scenario.analysis_text import (
    KNOWN_KEYS,
    LONGEST_TEXT,
    SheetLine,
    completed,
    entries_of,
    read_sheet,
    understood,
)
from explorer.scenario.fields import NAME_LENGTH
from explorer.scenario.measured import ENTRY_RULES
from explorer.scenario.model import Measured, Scenario

HINT = "Copy the lines of a report or spreadsheet with parameter, value and unit, in any order of columns."
EXAMPLE = "Parameter\tValue\tUnit\npH\t7.25\nAlkalinity\t272\tmg/L CaCO3\nIron\t<0.02\tmg/L"


@dataclass
class Pasting:
    """A sheet on its way into an analysis. water: its id, "" for a new one. file: where the sheet is from."""

    water: str = ""
    lines: tuple[SheetLine, ...] = ()
    file: str = ""
    refusal: str = ""


class PastePanel:
    """The panel of one sheet on the desk; ``key`` is its place on the page."""

    def __init__(self, desk: Desk, pasting: Pasting) -> None:
        self.desk, self.pasting = desk, pasting
        self.key = f"paste:{pasting.water}"
        self.own = {acid.id: acid.name or acid.id for acid in desk.scenario.acids}

    def node(self) -> Node:
        """What the panel shows now."""
        parts = self._preview() if self.pasting.lines else self._question()
        return node("div", "paste-panel", node("h3", text="Paste an analysis"), *parts, key=self.key,
                    data_reveal=True)  # fmt: skip

    # ---- asking for the text -------------------------------------------------------------------------

    def _question(self) -> list[Node]:
        area = node(
            "textarea", "paste", key=f"{self.key}:text", rows=6, value="", spellcheck="false", autofocus=True,
            aria_label="Lines of the analysis", placeholder=EXAMPLE, on=lambda text: self._read(str(text)),
        )  # fmt: skip
        chooser = node(
            "input", key=f"{self.key}:file", type="file", accept=".csv,.txt,.tsv,text/csv,text/plain",
            aria_label="CSV file with the analysis", on=self._read_file,
        )  # fmt: skip
        return [
            node("p", "hint", text=HINT), area, message(self.pasting.refusal),
            node("div", "below", self._button("read", "Read the lines", lambda: None, strong=True),
                 node("label", "link file", node("span", text="From a CSV file"), chooser), self._cancel()),
        ]  # fmt: skip

    def _read(self, text: str, file: str = "") -> None:
        pasting = self.pasting
        try:
            pasting.lines, pasting.refusal = read_sheet(text, self.own), ""
            pasting.file = file
        except ValueError as error:
            pasting.lines, pasting.refusal = (), str(error)

    def _read_file(self, file: Any) -> None:
        if not isinstance(file, dict):
            return
        text = file.get("text")
        if not isinstance(text, str):
            self.pasting.refusal = f"the file is too long for one analysis; allowed {LONGEST_TEXT} characters"
            return
        self._read(text, plain(file.get("name", ""), 100))

    # ---- what was understood -------------------------------------------------------------------------

    def _preview(self) -> list[Node]:
        pasting = self.pasting
        entries = entries_of(pasting.lines)
        count = len(entries)
        rows = [self._row(place, line) for place, line in enumerate(pasting.lines)]
        take = self._button(
            "take", f"Take over {count} {'entry' if count == 1 else 'entries'}", self._take, strong=True,
            disabled=not entries,
        )  # fmt: skip
        return [
            node("ul", "lines", *rows), *self._stays(entries), message(pasting.refusal),
            node("div", "below", take, self._button("back", "Paste again", self._again), self._cancel()),
        ]  # fmt: skip

    def _row(self, place: int, line: SheetLine) -> Node:
        names = {"": "leave out"} | {key: ENTRY_RULES[key].label for key in KNOWN_KEYS} | self.own

        def take(key: str) -> None:
            lines = list(self.pasting.lines)
            lines[place] = understood(line, key, self.own)
            self.pasting.lines = tuple(lines)

        written = plain(f"{line.name}  {line.value} {line.unit}".strip(), 90)
        choice = self.desk.entries.choice(
            f"{self.key}:{place}", f"{plain(line.name, 40) or 'Line'} is", names, line.key, take
        )
        doubt = line.measured is None or line.remark
        return node(
            "li", "doubtful" if doubt else "",
            node("span", "written", text=written, title=written),
            node("div", "pair", choice, node("span", "taken", text=_entry_text(line.measured))),
            node("span", "remark", text=f"▲ {line.remark}" if line.remark else ""),
            key=f"{self.key}:{place}:line",
        )  # fmt: skip

    def _before(self, scenario: Scenario) -> dict[str, Measured]:
        """The analysis that the sheet replaces."""
        if not self.pasting.water:
            return editing.NEW_WATER
        return scenario.water(self.pasting.water).analyses[scenario.season].entries

    def _stays(self, entries: dict[str, Measured]) -> list[Node]:
        """What the sheet does not have and a water needs."""
        before = self._before(self.desk.scenario)
        _, stays = completed(entries, before)
        words = [
            f"{ENTRY_RULES[key].label} is not among the lines: {_entry_text(before[key])} is assumed."
            for key in stays
        ]
        return [node("p", "hint", text=" ".join(words))] if words else []

    def _take(self) -> None:
        desk, pasting = self.desk, self.pasting
        new = not pasting.water
        entries, _ = completed(entries_of(pasting.lines), self._before(desk.scenario))
        name = PurePath(pasting.file).stem[:NAME_LENGTH].strip() or "New water"
        opened = pasting.water

        def change(scenario: Scenario) -> None:
            nonlocal opened
            opened = editing.add_water(scenario, name=name) if new else pasting.water
            for season in scenario.seasons if new else [scenario.season]:
                analysis = scenario.water(opened).analyses[season]
                analysis.entries = dict(entries)
                if pasting.file:
                    analysis.provenance = {**analysis.provenance, "file": pasting.file}

        words = "Add a water from a pasted analysis" if new else "Paste an analysis"
        pasting.refusal = beside(desk.session.edit(words, change))
        if not pasting.refusal:
            desk.pasting, desk.opened = None, f"waters.{opened}"

    def _again(self) -> None:
        self.pasting.lines, self.pasting.refusal = (), ""

    def _cancel(self) -> Node:
        def close() -> None:
            self.desk.pasting = None

        return self._button("cancel", "Cancel", close)

    def _button(
        self, name: str, words: str, act: Callable[[], None], strong: bool = False, disabled: bool = False
    ) -> Node:
        return node(
            "button", "press strong" if strong else "link", text=words, key=f"{self.key}:{name}",
            type="button", on=lambda value: act(), disabled=disabled,
        )  # fmt: skip


def paste_panel(desk: Desk, water_id: str) -> list[Node]:
    """The panel, where a sheet is being taken over for this water ("" for a new one)."""
    pasting = desk.pasting
    return [PastePanel(desk, pasting).node()] if pasting is not None and pasting.water == water_id else []


def _entry_text(measured: Measured | None) -> str:
    if measured is None:
        return "–"
    number = f"<{show_number(measured.below)}" if measured.value is None else show_number(measured.value)
    width = "" if measured.plus_minus is None else f" ± {show_number(measured.plus_minus)}"
    return f"{number}{width} {unit_text(measured.unit)}".strip()
