"""At the head of the rail: what the scenario is about, and where that is written."""

from __future__ import annotations

import re

from explorer.app.desk import Desk
from explorer.app.live_view import Node, node
from explorer.app.text import plain
from explorer.scenario.fields import NOTE_LENGTH
from explorer.scenario.model import Scenario

KEY = "about"

_FIRST = re.compile(r".*?[.?!](?=\s|$)|.*")
"""Up to the first stop that ends a sentence: that of a decimal does not."""

NO_NOTE = "Nothing is noted on this scenario yet."


def first_sentence(note: str) -> str:
    """What a note begins with."""
    return _FIRST.match(note.strip())[0]


def about_card(desk: Desk) -> Node:
    """The first sentence of the note; opened, the whole note to be written, and what the water is for."""
    scenario = desk.scenario
    opened = desk.opened == KEY
    story = plain(first_sentence(scenario.note), 300) or NO_NOTE
    head = node(
        "button", "open", node("span", "story", text=story), key=f"{KEY}:open", type="button",
        on=lambda value: desk.open(KEY), aria_expanded=str(opened).lower(),
        title="What the scenario is about; press to write it",
    )  # fmt: skip
    return node("div", "about opened" if opened else "about", head, *(_form(desk) if opened else []))


def _form(desk: Desk) -> list[Node]:
    scenario = desk.scenario

    def write(text: object) -> None:
        note = str(text).strip()[:NOTE_LENGTH]

        def change(draft: Scenario) -> None:
            draft.note = note

        desk.entries.refuse(KEY, refusal=desk.edit("Note on the scenario", change))

    def use(ticked: bool) -> None:
        def change(draft: Scenario) -> None:
            draft.potable = ticked

        desk.entries.refuse(KEY, refusal=desk.edit("Use of the water", change))

    field = node(
        "textarea", "words note", key=f"{KEY}:note", rows=5, value=scenario.note, on=write,
        maxlength=NOTE_LENGTH, aria_label="Note on the scenario",
        placeholder="The first sentence stands above; the rest goes into the report.",
    )  # fmt: skip
    tick = desk.entries.tick(f"{KEY}:potable", "Drinking water", scenario.potable, use)
    return [node("div", "details", field, tick, desk.refusal(KEY))]
