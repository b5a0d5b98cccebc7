"""The small form that opens on a readout tile: its targets, entered, changed and taken away in place."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from explorer.app.entry import Entries, message, show_number
from explorer.app.live_view import Node, node
from explorer.app.state import Session
from explorer.app.text import unit_text
from explorer.scenario.fields import TITLE_LENGTH
from explorer.scenario.model import Scenario, Target
from explorer.scenario.readouts import Readout
from explorer.scenario.targets import drop_target, set_target, targets_of

BOUNDS = {"low": "Lowest", "high": "Highest"}


class TargetEditor:
    """The forms of all tiles. What is entered while a form is open is one undo step.

    stay: called before a change, so that the tile stays in its place under the open form.
    """

    def __init__(self, session: Session, entries: Entries, stay: Callable[[], object]) -> None:
        self.session, self.entries, self.stay = session, entries, stay
        self._openings = 0

    def opened(self, value: Any = None) -> None:
        """A form has been opened: what is entered from now on is a step of its own."""
        self._openings += 1
        self.entries.forget()

    def sheet(self, readout: Readout) -> Node:
        """The form of one readout."""
        targets = targets_of(self.session.scenario, readout.key)
        forms = [self._form(readout, number, target) for number, target in enumerate(targets)]
        if not forms:
            forms = [self._form(readout, 0, None)]
        key = sheet_key(readout)
        return node(
            "div", "target", node("h3", text=f"Target: {readout.label}"), *forms,
            node("button", "link", text="Done", key=f"{key}:done", type="button", on=lambda value: None),
            key=key, id=key, popover="auto", role="dialog", aria_label=f"Target of {readout.label}",
            data_side="left",
        )  # fmt: skip

    def _form(self, readout: Readout, number: int, target: Target | None) -> Node:
        key = f"{sheet_key(readout)}:{number}"
        unit = unit_text(readout.unit)
        lines: list[Node] = []
        for bound, word in BOUNDS.items():
            box, refusal = self.entries.number(
                f"{key}:{bound}", f"{word} {readout.label}", show_number(getattr(target, bound, None)),
                self._put(readout, number, bound), unit=unit,
                empty=lambda bound=bound: self._put(readout, number, bound)(None), placeholder="none",
            )  # fmt: skip
            pair = node("div", "pair", box, node("span", "unit", text=unit))
            lines += [node("span", "caption", text=word), pair, refusal]
        basis, refusal = self.entries.text(
            f"{key}:basis", f"Basis of the target of {readout.label}", "" if target is None else target.basis,
            lambda text: self._put(readout, number, "basis")(text.strip()), placeholder="who set it, when",
            maxlength=TITLE_LENGTH, disabled=target is None,
        )  # fmt: skip
        lines += [node("span", "caption", text="Basis"), basis, refusal]
        remove = None
        if target is not None:
            remove = node(
                "button", "link danger", text="Remove the target", key=f"{key}:remove", type="button",
                on=lambda value: self._drop(key, readout, number),
            )  # fmt: skip
        return node("div", "form", *lines, message(self.entries.refusal(key)), remove)

    def _put(self, readout: Readout, number: int, part: str) -> Callable[[Any], str]:
        def take(value: Any) -> str:
            if part != "basis" and value is None and not targets_of(self.session.scenario, readout.key):
                return ""
            return self._edit(
                readout, lambda scenario: set_target(scenario, readout.key, number, **{part: value})
            )

        return take

    def _drop(self, key: str, readout: Readout, number: int) -> None:
        refusal = self._edit(readout, lambda scenario: drop_target(scenario, readout.key, number))
        self.entries.refuse(key, refusal=refusal)

    def _edit(self, readout: Readout, change: Callable[[Scenario], None]) -> str:
        self.stay()
        step = f"target:{readout.key}:{self._openings}"
        refusal = self.session.edit(f"Target of {readout.label}", change, step, together=True)
        return refusal.removeprefix("targets: ")


def sheet_key(readout: Readout) -> str:
    """Key and id of the form of a readout."""
    return f"target:{readout.key}"
