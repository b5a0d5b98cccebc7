"""Measured points in a view: laid over its plots, compared with the model, pasted in and taken out."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
import panel as pn

from explorer.app.entry import Entries, message
from explorer.app.live_view import Node, node
from explorer.app.runner import Conflate
from explorer.app.state import Session
from explorer.app.tables import csv_button
from explorer.app.text import plain
from explorer.scenario.errors import ScenarioError
from explorer.scenario.model import MeasuredPoints, Scenario
from explorer.scenario.observing import drop_measured, keep_measured
from explorer.scenario.readouts import READOUTS
from explorer.studies.measured import Comparison, all_compared, measured_table, read_points
from explorer.studies.pictures import Dots

LONGEST_PASTE = 200_000
"""Characters of pasted text that are looked at."""

TOO_LARGE = "the file is larger than 1 MB; allowed are up to 2000 points as text"


class Comparisons:
    """How far the model is from every set of measured points, worked out off the event loop.

    ``changed`` is called when there is something new to show.
    """

    def __init__(self, session: Session, changed: Callable[[], None]) -> None:
        self.session, self.changed = session, changed
        self.found: dict[str, Comparison] = {}
        self._runner = Conflate(pn.state.curdoc)

    def follow(self) -> None:
        """The operating point or the sets are others than before."""
        scenario = self.session.solved
        if scenario is None or not (scenario.measured or self.found):
            return
        self._runner.submit(lambda: list(all_compared(scenario)), self._take)

    def dots(self, sets: Iterable[tuple[MeasuredPoints, np.ndarray]], readout: str) -> list[Dots]:
        """Of some sets, with the places of their points along x, those of a readout, as a plot shows them."""
        return [
            Dots(plain(part.name, 60), x, np.array([pair[1] for pair in part.points]), self._words(part.name))
            for part, x in sets
            if part.readout == readout
        ]

    def _words(self, name: str) -> str:
        return self.found[name].brief() if name in self.found else ""

    def _take(self, comparisons: list[Comparison]) -> None:
        self.found = {comparison.name: comparison for comparison in comparisons}
        self.changed()


@dataclass(frozen=True)
class Against:
    """What measured points of a view are against: ``parts`` of the file form, and the same in words."""

    parts: Mapping[str, Any]
    words: str


class MeasuredPanel:
    """The button "Measured…" and what it opens: the sets shown here, and a form for new points.

    axis: what new points are against, None where there is nothing. sets: those that the view shows.
    """

    def __init__(
        self,
        session: Session,
        comparisons: Comparisons,
        axis: Callable[[], Against | None],
        sets: Callable[[], Iterable[MeasuredPoints]],
    ) -> None:
        self.session, self.comparisons = session, comparisons
        self.axis, self.sets = axis, sets
        self.entries = Entries()
        self.readout, self.name, self.pasted, self.refusal = "ph", "", "", ""
        self._forms = 0

    def nodes(self, key: str = "measured") -> list[Node]:
        """The button and its panel."""
        axis = self.axis()
        if axis is None:
            return []
        count = len(list(self.sets()))
        button = node(
            "button", "button", text=f"Measured ({count})" if count else "Measured…", key=f"{key}-button",
            type="button", popovertarget=key, aria_haspopup="dialog", aria_expanded="false",
            title="Measured points laid over the plots",
        )  # fmt: skip
        body = node(
            "div", "wide form", node("h3", text="Measured points"), self._shown(key),
            node("p", text=f"New points against {axis.words}"), *self._form(key, axis),
            key=key, id=key, popover="auto", role="dialog", aria_label="Measured points",
        )  # fmt: skip
        return [button, body]

    def _shown(self, key: str) -> Node:
        rows = [self._set(part, f"{key}:drop:{part.name}") for part in self.sets()]
        nothing = node("p", text="None here yet: paste bench or plant data below, or open a CSV file.")
        if not rows:
            return nothing
        save = csv_button(self.session, "measured points", self._table, f"{key}:csv")
        return node("div", "", node("ul", "sets", *rows), save)

    def _table(self) -> list[list[Any]]:
        return measured_table(self.comparisons.found.values())

    def _set(self, part: MeasuredPoints, key: str) -> Node:
        """A set and how far the model is from it."""
        compared, name = self.comparisons.found.get(part.name), plain(part.name, 60)
        words = f"{name}: {len(part.points)} points of {READOUTS[part.readout].label}"
        words = words if compared is None else plain(compared.sentence(), 390)
        remove = node(
            "button", "link", text="Remove", key=key, type="button", data_stays=True,
            aria_label=f"Remove {name}", on=self._drop(part.name),
        )  # fmt: skip
        return node("li", "", node("span", text=words), remove)

    def _form(self, key: str, axis: Against) -> list[Node]:
        form = f"{key}:{self._forms}"
        names = {readout.key: readout.label for readout in READOUTS.values()}
        name, refused = self.entries.text(
            f"{form}:name", "Name of the points", self.name, self._named, placeholder="Name, e.g. jar test",
            maxlength=80,
        )  # fmt: skip
        what = self.entries.choice(f"{form}:readout", "What was measured", names, self.readout, self._choose)
        paste = node(
            "textarea", "paste", key=f"{form}:paste", rows=5, value=self.pasted, spellcheck="false",
            aria_label="Points: dial value or dose, then what was measured, a pair a line",
            placeholder="0   7.42\n5   7.93", on=self._paste,
        )  # fmt: skip
        chooser = node(
            "input", key=f"{form}:file", type="file", accept=".csv,.txt,.tsv,text/csv,text/plain",
            aria_label="CSV file with points", on=lambda file: self._file(file, axis),
        )  # fmt: skip
        add = node(
            "button", "button strong", text="Add the points", key=f"{form}:add", type="button",
            data_stays=True, on=lambda value: self._add(axis),
        )  # fmt: skip
        from_file = node("label", "button file", node("span", text="From a CSV file…"), chooser)
        hint = "A pair a line, or value, readout, value; columns parted by blanks, tabs, semicolons, commas."
        return [
            node("div", "row", name, what), refused, paste, node("p", text=hint),
            node("div", "row", add, from_file), message(self.refusal),
        ]  # fmt: skip

    def _named(self, text: str) -> str:
        self.name = plain(text, 80)
        return ""

    def _choose(self, readout: str) -> None:
        self.readout = readout

    def _paste(self, text: Any) -> None:
        self.pasted = str(text)[:LONGEST_PASTE]

    def _file(self, file: Any, axis: Against) -> None:
        if not isinstance(file, dict) or not isinstance(file.get("text"), str):
            self.refusal = TOO_LARGE
            return
        self.pasted = file["text"][:LONGEST_PASTE]
        self.name = self.name or plain(str(file.get("name", "")).rpartition(".")[0], 80)
        self._add(axis)

    def _add(self, axis: Against) -> None:
        """Keep what is in the form; a refusal names the line."""
        try:
            points = read_points(self.pasted, self.readout)
        except ScenarioError as error:
            self.refusal = str(error)
            return
        name = self.name or "Measured"

        def change(scenario: Scenario) -> None:
            keep_measured(scenario, name, axis.parts, points)

        self.refusal = self.session.edit("Measured points", change, rebuild=False)
        if not self.refusal:
            self.name = self.pasted = ""
            self._forms += 1

    def _drop(self, name: str) -> Callable[[Any], None]:
        def act(value: Any) -> None:
            self.refusal = self.session.edit(
                f"Remove {plain(name, 40)}", lambda scenario: drop_measured(scenario, name), rebuild=False
            )

        return act
