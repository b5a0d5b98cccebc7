"""The left rail: the process drawn as it flows, from source waters through steps to the finished water."""

from typing import Any, ClassVar

from explorer.app.about_card import about_card
from explorer.app.desk import Desk, facts, heading
from explorer.app.hold_panel import dial_part
from explorer.app.live_view import LiveView, Node, node
from explorer.app.own_substance import own_section
from explorer.app.paste_panel import Pasting, paste_panel
from explorer.app.pickers import Choice, picker
from explorer.app.state import Session
from explorer.app.step_card import train_list
from explorer.app.step_form import own_dial
from explorer.app.water_card import water_card
from explorer.scenario import editing
from explorer.scenario.amounts import by_flow, give_flows, give_shares
from explorer.scenario.evaluate import Outcome
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import MINUS, NO_VALUE, READOUTS, format_value
from explorer.scenario.words import number_text

COST_HINT = "kg a day of product, as far as its strength is known; prices, pumps and tanks under Quantities"

PASTED = "paste:"
"""Stands for a pasted analysis where the id of a water to copy would stand; no id has a colon."""


def asked(point: Outcome) -> None:
    """Everything the rail reads from the operating point, asked once so that it is there when it is read."""
    _ = point.held
    for stage in point.stages:
        keys = ["ph", "alkalinity"]
        if stage.kind == "water":
            keys += ["calcium", "charge_balance"]
        if stage.kind == "blend" or stage is point.stages[-1]:
            keys += ["ccpp", "temperature", "cost"]
        for key in keys:
            stage.readout(key)


class Rail(LiveView):
    """Everything that can be set about waters and treatment. A turned dial changes texts in place; only an
    edit of the structure draws cards anew."""

    css: ClassVar[tuple[str, ...]] = ("live_view.css", "rail.css")

    def __init__(self, session: Session, **settings: Any) -> None:
        self.desk = Desk(session)
        super().__init__(**({"sizing_mode": "stretch_width", "margin": 0} | settings))
        session.ask("rail", asked)
        session.param.watch(self._follow, ["values", "structure", "point", "stale"])
        self.refresh()

    @property
    def view(self) -> "Rail":
        """What the page shows."""
        return self

    def describe(self) -> Node:
        return node(
            "div", "rail stale" if self.desk.session.stale else "rail",
            about_card(self.desk),
            node("section", "", *self._waters(), aria_label="Source waters"),
            node("section", "", *self._treatment(), aria_label="Treatment, in order of flow"),
            self._held_elsewhere(),
            own_section(self.desk),
            node("section", "", *self._cost(), key="cost", aria_label="Running cost"),
        )  # fmt: skip

    def _follow(self, *events: Any) -> None:
        if any(event.name == "structure" for event in events):
            self.desk.settle()
        self.refresh()
        self.desk.entries.forget(standing=self)

    def _waters(self) -> list[Node]:
        desk = self.desk
        cards = [water_card(desk, water, place) for place, water in enumerate(desk.scenario.waters)]
        titled = node("div", "titled", heading("Source waters"), self._other_amounts())
        refused = desk.refusal("waters:amounts")
        return [titled, refused, node("ul", "waters", *cards), *self._add_water()]

    def _other_amounts(self) -> Node | None:
        """From shares to flows and back; an only water has nothing to be shared."""
        desk = self.desk
        if len(desk.scenario.waters) < 2:
            return None
        words, change, hint = (
            ("Give shares", give_shares, "Shares of the blend instead of a flow for each water")
            if by_flow(desk.scenario)
            else ("Give flows", give_flows, "A flow for each water instead of shares of the blend")
        )
        act = desk.act("waters:amounts", words, change)
        return node(
            "button", "link", text=words, key="waters:amounts", type="button", on=lambda value: act(),
            title=hint,
        )  # fmt: skip

    def _add_water(self) -> list[Node]:
        desk = self.desk

        def add(like: str) -> None:
            if like == PASTED:
                desk.pasting = Pasting()
                return

            def change(scenario: Scenario) -> None:
                desk.opened = f"waters.{editing.add_water(scenario, like or None)}"

            desk.entries.refuse("waters:add", refusal=desk.edit("Add a source water", change))

        copies = [Choice(water.id, water.title, "copy") for water in desk.scenario.waters]
        new = [
            Choice("", "A new water", "to be filled in"),
            Choice(PASTED, "From a pasted analysis", "or a CSV file", "laboratory sheet spreadsheet"),
        ]
        groups = {"New": new, "Like one of these": copies}
        return [
            *picker("waters:add", "+ Add a source water", groups, add, hint="Search waters"),
            desk.refusal("waters:add"),
            *paste_panel(desk, ""),
        ]

    def _treatment(self) -> list[Node]:
        desk = self.desk
        blend = node("li", "", self._place("Blend", "blend", self._blend_state()), key="blend")
        finished = node("li", "end", self._place("Finished water", "finished"), key="finished")
        line = train_list(desk, desk.scenario.train, "", "blend", blend)
        line.children.append(finished)
        return [heading("Treatment, in order of flow"), line]

    def _held_elsewhere(self) -> Node | None:
        """Dials that are held and stand on no card: settings of products, measured values, …"""
        desk = self.desk
        cards = self._card_dials() if desk.scenario.holds else set()
        lines = []
        for address in desk.scenario.holds:
            dial = desk.session.dials.get(address)
            if dial is not None and address not in cards:
                head = node("div", "head", node("span", "name still", text=dial.label, title=dial.label))
                lines.append(node("li", "card held", head, *dial_part(desk, dial), key=f"held:{address}"))
        if not lines:
            return None
        title = "Held by other dials"
        return node("section", "", heading(title), node("ul", "waters", *lines), key="held", aria_label=title)

    def _card_dials(self) -> set[str]:
        """Dials that have a row on the card of their water or step."""
        desk = self.desk
        found = {f"waters.{water.id}.{part}" for water in desk.scenario.waters for part in ("share", "flow")}
        for prefix, owner in editing.trains(desk.scenario):
            for step in owner.train:
                dial = own_dial(desk, step, f"{prefix}train.{step.id}")
                found |= {dial.address} if dial is not None else set()
        return found

    def _blend_state(self) -> str:
        temperature = f"{self.desk.words('temperature', 'blend')} °C"
        flow = self.desk.flow_text(self.desk.scenario.total_flow())
        return f"{flow} · {temperature}" if flow else temperature

    def _place(self, name: str, stage: str, state: str = "") -> Node:
        """The card of a place on the line that is no step."""
        desk = self.desk
        head = node("div", "head", node("span", "name still", text=name), node("span", "aside", text=state))
        found = facts(
            f"pH {desk.words('ph', stage)}",
            f"alk {desk.words('alkalinity', stage)}",
            _calcium_carbonate(desk.reading("ccpp", stage)),
            hint="Alkalinity in mg/L as CaCO₃; calcium carbonate to equilibrium with calcite",
        )
        return node("div", "card place", head, found)

    def _cost(self) -> list[Node]:
        """Cost of the chemicals, and how much of each is used a day."""
        desk = self.desk
        cost = desk.words("cost", "finished")
        amount = f"{cost} {desk.scenario.currency} per ML" if cost != NO_VALUE else "no prices entered"
        lines = [("Chemicals", amount.replace("  ", " "), "cost total")]
        for name, use in desk.uses():
            lines.append((name, f"{number_text(use, 0 if use >= 10 else 1)} kg/d", "cost"))
        rows = [
            node("div", look, node("span", text=name, title=name), node("span", text=words))
            for name, words, look in lines
        ]
        if len(rows) > 1:
            rows.append(node("p", "hint", text=COST_HINT))
        return [heading("Running cost"), *rows]


def _calcium_carbonate(potential: float) -> str:
    """The precipitation potential with its sign as a word."""
    readout = READOUTS["ccpp"]
    text = format_value(potential, readout)
    if text == NO_VALUE:
        return f"CCPP {text}"
    dissolves, precipitates = readout.sign_words
    return f"{dissolves if text.startswith(MINUS) else precipitates} {text.lstrip(MINUS)} mg/L CaCO₃"
