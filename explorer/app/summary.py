"""What is said in words around the tiles: banner, message, verdict, cautions, foot line."""

from __future__ import annotations

from typing import Any

from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import VIEW_STYLES
from explorer.app.state import Session
from explorer.app.text import plain
from explorer.studies.finding import finding, foot_line
from explorer.studies.verdict import Verdict

_GLYPHS = {"error": "✕", "caution": "▲", "info": "i"}


def session_verdict(session: Session) -> Verdict:
    """The verdict on what the session shows."""
    if session.point is None:
        return Verdict("No result yet.", "", False)
    return finding(session.point, session.swept)


class Message(LiveView):
    """Banner of a water that is not for drinking, and the message line."""

    css = VIEW_STYLES

    def __init__(self, session: Session, **settings: Any) -> None:
        self.session = session
        super().__init__(sizing_mode="stretch_width", **settings)
        session.param.watch(self._changed, ["message", "structure"])
        self.refresh()

    def describe(self) -> Node:
        session = self.session
        alarm = banner = None
        if session.message:
            after = " The last result stays on screen." if session.stale else ""
            alarm = node(
                "div", "alarm",
                node("span", "said", text=plain(session.message, 400) + after),
                node("button", "", text="Dismiss", key="dismiss", type="button", on=self._dismiss),
                key="alarm", role="alert",
            )  # fmt: skip
        if not session.scenario.potable:
            words = "▲ Not drinking water: this scenario is for other uses."
            banner = node("div", "banner", key="banner", text=words)
        return node("div", "", alarm, banner)

    def _dismiss(self, value: Any) -> None:
        self.session.message = ""

    def _changed(self, *events: Any) -> None:
        self.visible = bool(self.session.message) or not self.session.scenario.potable
        self.refresh()


class Summary(LiveView):
    """The verdict line, with the list of cautions at its end."""

    css = VIEW_STYLES

    def __init__(self, session: Session, **settings: Any) -> None:
        self.session = session
        super().__init__(sizing_mode="stretch_width", **settings)
        session.want("verdict", ["ccpp"])
        session.param.watch(self._changed, ["point", "stale", "structure"])
        self.refresh()

    def describe(self) -> Node:
        said = session_verdict(self.session)
        glyph, tone = {True: ("✓", "good"), False: ("✕", "bad"), None: ("", "open")}[said.good]
        return node(
            "div", "verdict stale" if self.session.stale else "verdict",
            node("p", f"finding {tone}",
                 node("span", "mark", text=glyph, aria_hidden="true"), node("strong", text=said.lead),
                 node("span", text=said.rest), role="status"),
            *self._notes(),
        )  # fmt: skip

    def _notes(self) -> list[Node]:
        point = self.session.point
        notes = list(point.notes) if point is not None else []
        serious = [note for note in notes if note.level != "info"]
        if not notes:
            return []
        count = len(serious) or len(notes)
        word = ("caution" if serious else "note") + ("s" if count > 1 else "")
        mark = "▲ " if serious else ""
        rows = [
            node("li", "",
                 node("span", f"level {note.level}", text=_GLYPHS.get(note.level, "i")),
                 node("span", text=f"{self._place(note.where)}{plain(note.text, 400)}"))
            for note in sorted(notes, key=lambda note: list(_GLYPHS).index(note.level))
        ]  # fmt: skip
        return [
            node("button", "link caution" if serious else "link", text=f"{mark}{count} {word}",
                 key="notes-button", type="button", popovertarget="notes", aria_expanded="false"),
            node("div", "wide", node("ul", "notes", *rows), key="notes", id="notes", popover="auto",
                 aria_label="Notes and cautions"),
        ]  # fmt: skip

    def _place(self, where: str) -> str:
        """The note's place in the words of the scenario, "" where it has none."""
        names = {water.id: water.name for water in self.session.scenario.waters}
        names |= {step.id: step.name for _, step in self.session.scenario.steps()}
        found = next((names[part] for part in where.split(".") if names.get(part)), "")
        return f"{plain(found, 60)}: " if found else ""

    def _changed(self, *events: Any) -> None:
        self.refresh()


class Foot(LiveView):
    """The foot line."""

    css = VIEW_STYLES

    def __init__(self, session: Session, **settings: Any) -> None:
        self.session = session
        super().__init__(sizing_mode="stretch_width", **settings)
        session.param.watch(self._changed, ["point"])
        self.refresh()

    def describe(self) -> Node:
        return node("p", "foot", text=foot_line(self.session.point))

    def _changed(self, *events: Any) -> None:
        self.refresh()
