"""The meeting view: large type, one large plot, the verdict, and a strip with the few dials in play."""

from __future__ import annotations

from typing import Any, ClassVar

import param
from panel.custom import JSComponent

from explorer.app.choosers import dial_picker
from explorer.app.desk import Desk
from explorer.app.hold_panel import goal_row
from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import VIEW_STYLES, styles, water_colour
from explorer.app.state import Session
from explorer.app.text import plain
from explorer.scenario.dials import Dial
from explorer.scenario.holding import Holding
from explorer.scenario.readouts import READOUTS
from explorer.scenario.words import brief_label

MOST_PICKED = 4
"""Dials a user may add to the strip."""


def in_meeting(session: Session) -> bool:
    """Whether the page is in the meeting view."""
    return bool(session.choices.get("meeting"))


class MeetingSwitch(JSComponent):
    """The button that turns the meeting view on and off."""

    active = param.Boolean(default=False)

    _esm = "meeting.js"

    def __init__(self, session: Session, **settings: Any) -> None:
        self._session = session
        super().__init__(active=in_meeting(session), stylesheets=styles(VIEW_STYLES), **settings)
        session.param.watch(self._changed, "choices")

    def _handle_msg(self, data: Any) -> None:
        if isinstance(data, dict) and isinstance(data.get("on"), bool):
            self._session.choose(meeting=data["on"])

    def _changed(self, event: Any) -> None:
        self.active = in_meeting(self._session)


class Strip(LiveView):
    """Season, temperature, and the dials in play: shares, the swept dial, and those the user adds.

    Empty outside of the meeting view, where the rail has all dials.
    """

    css: ClassVar[tuple[str, ...]] = (*VIEW_STYLES, "meeting.css")

    def __init__(self, session: Session, **settings: Any) -> None:
        self.session = session
        self.desk = Desk(session)
        super().__init__(sizing_mode="stretch_width", **settings)
        session.param.watch(self._changed, ["values", "structure", "point", "choices"])
        self.refresh()

    def describe(self) -> Node:
        if not in_meeting(self.session):
            return node("div", "strip")
        picked = self._picked()
        dials = [self._dial(address) for address in self._given()]
        dials += [self._dial(address, picked=True) for address in picked]
        add = self._add() if len(picked) < MOST_PICKED else []
        return node(
            "div", "strip", node("p", "now", text=self._now()), *dials, *add,
            role="group", aria_label="Dials in play",
        )  # fmt: skip

    def _now(self) -> str:
        scenario = self.session.scenario
        temperature = f"{self.desk.words('temperature', 'finished')} °C"
        parts = [plain(scenario.season, 30), temperature, self.desk.flow_text(scenario.total_flow())]
        return " · ".join(part for part in parts if part)

    def _given(self) -> list[str]:
        """Addresses of the dials that are always there."""
        scenario, dials = self.session.scenario, self.session.dials
        ids = [water.id for water in scenario.waters if water.on]
        amounts = [f"waters.{name}.{part}" for name in ids for part in ("share", "flow")]
        held = self.session.held
        amounts += [held[address].goal for address in amounts if address in held]
        swept = self.session.swept
        return [
            address
            for address in dict.fromkeys([*amounts, swept.address if swept is not None else ""])
            if address in dials
        ]

    def _picked(self) -> list[str]:
        """Addresses of the dials the user has added, as far as they are still there."""
        given = self._given()
        wanted = self.session.choices.get("dials", ())
        return [address for address in wanted if address in self.session.dials and address not in given]

    def _dial(self, address: str, picked: bool = False) -> Node:
        dial = self.session.dials[address]
        name, colour = self._named(dial)
        away = None
        if picked:
            label = f"Take {plain(dial.label, 80)} off the strip"
            away = node(
                "button", "more", text="×", key=f"{address}:away", type="button", aria_label=label,
                title=label,
                on=lambda value: self._pick(address, False),
            )  # fmt: skip
        swatch = node("span", "swatch", colour=colour) if colour else None
        head = node("div", "caption", swatch, node("span", text=name, title=name), away)
        goal = self._goals().get(address)
        row = self.desk.dial_row(dial, colour=colour) if goal is None else goal_row(self.desk, goal)
        return node("div", "dial", head, row, key=f"strip:{address}")

    def _goals(self) -> dict[str, Holding]:
        """Holds by the address of the held value."""
        return {hold.goal: hold for hold in self.session.held.values()}

    def _named(self, dial: Dial) -> tuple[str, str | None]:
        """What a dial is called on the strip, and the colour of its water if it is a share."""
        for place, water in enumerate(self.session.scenario.waters):
            if dial.address in (f"waters.{water.id}.share", f"waters.{water.id}.flow"):
                return plain(water.title, 60), water_colour(place)
        if dial.address in self._goals():
            return f"{brief_label(READOUTS[self._goals()[dial.address].readout])}, held", None
        return plain(dial.label, 60), None

    def _add(self) -> list[Node]:
        return dial_picker(
            self.session, "strip:add", None, lambda address: self._pick(address, True),
            "Add a dial to the strip", "+ Dial",
        )  # fmt: skip

    def _pick(self, address: str, wanted: bool) -> None:
        others = [other for other in self._picked() if other != address]
        self.session.choose(dials=[*others, address] if wanted else others)

    def _changed(self, *events: Any) -> None:
        if in_meeting(self.session) or len(self.nodes) > 1:
            self.refresh()
            self.desk.entries.forget(standing=self)
