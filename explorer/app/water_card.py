"""A source water on the rail: what it is, how much of it, and, opened, its analysis and its own train."""

import math

from explorer.app.analysis_editor import analysis_editor
from explorer.app.desk import Desk, facts
from explorer.app.held import is_computed
from explorer.app.hold_panel import dial_part, hold_act
from explorer.app.live_view import Node, node
from explorer.app.look import water_colour
from explorer.app.pickers import Act, menu
from explorer.app.step_card import train_list
from explorer.scenario import editing
from explorer.scenario.dials import Dial
from explorer.scenario.model import Scenario, Water
from explorer.scenario.words import number_text
from explorer.treatment.analysis import balance_of


def water_card(desk: Desk, water: Water, position: int) -> Node:
    """The card of one source water; ``position`` gives its colour."""
    key = f"waters.{water.id}"
    opened = desk.opened == key
    colour = water_colour(position)
    body = [
        node("div", "head", *_head(desk, water, key, colour)),
        desk.refusal(key),
        _state(desk, water),
        _facts(desk, water),
        *_amount(desk, water, colour),
    ]
    if opened:
        body.append(node("div", "details", *analysis_editor(desk, water), data_reveal=True))
    if opened or water.train:
        body.append(
            node(
                "div",
                "inner",
                node("h3", text="Before the blend"),
                train_list(desk, water.train, f"{key}.", water.id),
            )
        )
    held = f"{key}.share" in desk.session.held or f"{key}.flow" in desk.session.held
    look = "card" + (" opened" if opened else "") + (" held" if held else "") + ("" if water.on else " off")
    return node("li", look, *body, key=key, data_reveal=opened)


def _head(desk: Desk, water: Water, key: str, colour: str) -> list[Node]:
    swatch = node("span", "swatch", colour=colour)
    if desk.naming == key:
        return [swatch, *desk.name_field(key, water.id, water.title)]
    title = node(
        "button", "open", swatch, node("span", "name", text=water.title), key=f"{key}:open", type="button",
        on=lambda value: desk.open(key), aria_expanded=str(desk.opened == key).lower(), title=water.title,
    )  # fmt: skip
    total = desk.scenario.total_flow()
    flow = desk.flow_text(None if total is None else total * desk.part(water))
    return [
        title,
        node("span", "aside", text=flow),
        *menu(key, f"More for {water.title}", _acts(desk, water, key)),
    ]


def _acts(desk: Desk, water: Water, key: str) -> list[Act]:
    name, water_id = water.title, water.id
    switch = "Take out of service" if water.on else "Put into service"
    remove = desk.act(key, f"Remove {name}", lambda scenario: editing.remove_water(scenario, water_id))
    dial = _dial(desk, water)
    return [
        Act("details", "Close" if desk.opened == key else "Open the analysis", lambda: desk.open(key)),
        Act("sweep", "Sweep this", (lambda: desk.sweep(dial)) if dial else None),
        hold_act(desk, dial),
        Act("rename", "Rename", lambda: desk.rename(key)),
        Act(
            "duplicate", "Duplicate",
            desk.act(key, f"Duplicate {name}", lambda scenario: editing.duplicate_water(scenario, water_id)),
        ),
        Act(
            "switch", switch,
            desk.act(key, f"{switch}: {name}", lambda scenario: editing.switch_water(scenario, water_id)),
        ),
        *_balancing(desk, water, key),
        Act("remove", "Remove", remove if len(desk.scenario.waters) > 1 else None, danger=True),
    ]  # fmt: skip


def _balancing(desk: Desk, water: Water, key: str) -> list[Act]:
    """Whether this water alone takes up the change of another share; of two waters it always does."""
    if len(desk.scenario.waters) < 3 or water.share is None:
        return []
    chosen = desk.scenario.balance_water == water.id

    def change(scenario: Scenario) -> None:
        scenario.balance_water = None if chosen else water.id

    words = "Let all others take the rest" if chosen else "Let it take the rest"
    return [Act("balance", words, desk.act(key, f"{words}: {water.title}", change))]


def _state(desk: Desk, water: Water) -> Node | None:
    """What sets a water apart: out of service, or the one that takes up what the others leave."""
    tag = "" if water.on else "out of service"
    if water.on and desk.scenario.balance_water == water.id:
        tag = "takes the rest"
    return node("div", "state", node("span", "tag quiet", text=tag)) if tag else None


def _facts(desk: Desk, water: Water) -> Node:
    stage = water.id
    return facts(
        f"pH {desk.words('ph', stage)}",
        f"alk {desk.words('alkalinity', stage)}",
        f"Ca {desk.words('calcium', stage)}",
        _balance(desk, stage),
        _of_the_blend(desk, water),
        hint="Alkalinity in mg/L as CaCO₃, calcium in mg/L",
    )


def _of_the_blend(desk: Desk, water: Water) -> str:
    """How much of the blend it is, where a held share makes that another than its entered share."""
    address = f"waters.{water.id}.share"
    moved = is_computed(desk.session.held, address) and not desk.session.fixed(address)
    return f"{number_text(100 * desk.part(water), 1)} % of the blend" if moved and water.on else ""


def _balance(desk: Desk, stage: str) -> tuple[str, str]:
    """The ion balance with its look: said in a word and a glyph where it is poor."""
    if not math.isfinite(desk.reading("charge_balance", stage)):
        return "ion balance –", ""
    balance = balance_of(desk.session.point.solution(stage))
    words = f"ion balance {number_text(balance.percent, 1, signed=True)} %"
    return (words, "") if balance.acceptable else (f"{words} ▲ poor", "poor")


def _amount(desk: Desk, water: Water, colour: str) -> list[Node]:
    """Share or flow of the water as slider and number; nothing to set for a single water with a share."""
    dial = _dial(desk, water)
    return dial_part(desk, dial, colour=colour) if dial else []


def _dial(desk: Desk, water: Water) -> Dial | None:
    dials = desk.session.dials
    return dials.get(f"waters.{water.id}.flow") or dials.get(f"waters.{water.id}.share")
