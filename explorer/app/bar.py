"""The top bar: title, season, options, undo and redo, shipped scenarios."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

from explorer.app.bar_parts import OptionChips, SeasonChips
from explorer.app.entry import Entries
from explorer.app.files import Example
from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import VIEW_STYLES
from explorer.app.state import Session
from explorer.app.text import plain
from explorer.scenario.model import Scenario


class Bar(LiveView):
    """What the scenario is called, which season is shown, and the way back.

    examples: the shipped scenarios by name. open_example: gets the name of the one chosen. new: begins a
    scenario with nothing in it.
    """

    css = VIEW_STYLES

    def __init__(
        self,
        session: Session,
        examples: Mapping[str, Example],
        open_example: Callable[[str], object],
        new: Callable[[], object],
        **settings: Any,
    ) -> None:
        self.session = session
        self.examples = examples
        self.open_example, self.new = open_example, new
        self.entries = Entries()
        self.seasons = SeasonChips(session, self.entries, self.refresh)
        self.options = OptionChips(session, self.entries, self.refresh)
        super().__init__(sizing_mode="stretch_width", **settings)
        watched = ["structure", "values", "unsaved", "can_undo", "can_redo", "choices"]
        session.param.watch(self._changed, watched)
        self.refresh()

    def describe(self) -> Node:
        scenario, session = self.session.scenario, self.session
        title, refusal = self.entries.text(
            "title", "Title of the scenario", scenario.title, self._rename_scenario, look="title",
            maxlength=200,
        )  # fmt: skip
        return node(
            "div", "bar",
            title, refusal,
            node("span", "unsaved", text="● not saved" if session.unsaved else "",
                 title="Changed since it was opened or saved"),
            node("div", "grow"),
            self.seasons.nodes(),
            self.options.nodes(),
            _icon("undo", "Undo", session.undo_label, session.can_undo, session.undo),
            _icon("redo", "Redo", session.redo_label, session.can_redo, session.redo),
            *self._examples(),
        )  # fmt: skip

    def _examples(self) -> list[Node]:
        if not self.examples:
            return []
        sheet = "examples"
        rows = [
            node(
                "button", "", node("strong", text=plain(example.title, 70)),
                node("small", text=plain(example.story, 240)), key=f"example:{name}", type="button",
                on=self._example(name),
            )
            for name, example in self.examples.items()
        ]  # fmt: skip
        new = node(
            "button", "", node("strong", text="New scenario"),
            node("small", text="One water to be filled in; nothing is dosed and no target entered."),
            key="example-new", type="button", on=lambda value: self.new(),
        )  # fmt: skip
        return [
            node("button", "press", text="Examples", key="examples-button", type="button",
                 popovertarget=sheet, aria_haspopup="menu", aria_expanded="false"),
            node("div", "gallery", node("h3", text="Begin"), new,
                 node("h3", text="Examples with invented waters"), *rows, key=sheet, id=sheet, popover="auto",
                 aria_label="New scenario and examples"),
        ]  # fmt: skip

    def _example(self, name: str) -> Callable[[Any], None]:
        return lambda value: self.open_example(name)

    def _rename_scenario(self, text: str) -> str:
        wanted = plain(text, 200)
        if not wanted:
            return "a title is needed"

        def change(scenario: Scenario) -> None:
            scenario.title = wanted

        if wanted == self.session.scenario.title:
            return ""
        return self.session.edit("Title", change, rebuild=False)

    def _changed(self, *events: Any) -> None:
        self.refresh()


def _icon(key: str, word: str, what: str, possible: bool, run: Callable[[], None]) -> Node:
    hint = f"{word}: {plain(what, 60)}" if possible and what else word
    return node(
        "button", f"press icon glyph-{key}", key=key, type="button", aria_label=hint, title=hint,
        disabled=not possible, on=lambda value: run(),
    )  # fmt: skip
