"""Treatment steps on the rail: a train as a line of cards, each with its setting and what it did."""

from dataclasses import replace

from explorer.app.desk import Desk, facts
from explorer.app.hold_panel import SPANS, dial_part, hold_act
from explorer.app.live_view import Node, node
from explorer.app.own_substance import KINDS, Definition, own_choices, own_panel
from explorer.app.pickers import Act, Choice, menu, picker
from explorer.app.step_form import chemical_choices, main_dial, own_dial, step_form
from explorer.scenario import editing
from explorer.scenario.dials import Dial, step_name
from explorer.scenario.model import DoseStep, Scenario, SideStreamStep, Step
from explorer.scenario.steps import STEP_KINDS

SETTING_WORDS = {
    "approach": "approach",
    "co2": "CO₂ left",
    "fraction": "of the flow",
    "cycles": "cycles",
}
"""What the number on a card is, behind its unit, where the unit does not say it."""


def train_list(desk: Desk, train: list[Step], prefix: str, before: str = "", *ends: Node) -> Node:
    """A train as a list of cards on their line, ended by the way to add a step.

    prefix: address of what the train belongs to, with its dot ("" for the common train). before: id of the
    stage the water comes from. ends: items that stand before the first card.
    """
    items = list(ends)
    for position, step in enumerate(train):
        items.append(step_card(desk, step, prefix, position, len(train), before))
        before = step.id if step.on else before
    items.append(node("li", "added", *add_step(desk, prefix), key=f"{prefix}train:add"))
    return node("ol", "flow", *items)


def step_card(desk: Desk, step: Step, prefix: str, position: int, count: int, before: str) -> Node:
    """The card of one step; ``before`` is the stage the water comes from."""
    key = f"{prefix}train.{step.id}"
    opened = desk.opened == key
    body = [
        node("div", "head", *_head(desk, step, key, position, count)),
        desk.refusal(key),
        None if step.on else node("div", "state", node("span", "tag quiet", text="out of service")),
        _effect(desk, step, before) if step.on else None,
        *_setting(desk, step, key),
    ]
    if opened:
        body.append(node("div", "details", *step_form(desk, step, key), data_reveal=True))
    if isinstance(step, SideStreamStep):
        inner = train_list(desk, step.train, f"{key}.", before)
        body.append(node("div", "inner", node("h3", text="In the side stream"), inner))
    dial = own_dial(desk, step, key)
    held = dial is not None and dial.address in desk.session.held
    look = "card" + (" opened" if opened else "") + (" held" if held else "") + ("" if step.on else " off")
    card = node("div", look, *body)
    return node("li", "" if step.on else "idle", _grip(desk, step, key), card, key=key, data_reveal=opened)


def _grip(desk: Desk, step: Step, key: str) -> Node:
    """The dot on the line, by which a step is dragged along it; by keyboard its menu moves it."""
    step_id, name = step.id, step_name(desk.scenario, step)

    def move(by: int | float | None) -> None:
        if isinstance(by, int):
            desk.act(key, f"Move {name}", lambda scenario: editing.move_step(scenario, step_id, by))()

    return node("span", "grip", key=f"{key}:grip", data_grip=True, title="Drag to another place", on=move)


def _head(desk: Desk, step: Step, key: str, position: int, count: int) -> list[Node]:
    name = step_name(desk.scenario, step)
    if desk.naming == key:
        return desk.name_field(key, step.id, name)
    title = node(
        "button", "open", node("span", "name", text=name), key=f"{key}:open", type="button",
        on=lambda value: desk.open(key), aria_expanded=str(desk.opened == key).lower(), title=name,
    )  # fmt: skip
    dial = main_dial(desk, step, key)
    width = desk.tolerance(dial) if dial else ""
    aside = node("span", "aside", text=width, title="Tolerance of the setting" if width else None)
    acts = _acts(desk, step, key, name, position, count)
    return [title, aside, *menu(key, f"More for {name}", acts)]


def _acts(desk: Desk, step: Step, key: str, name: str, position: int, count: int) -> list[Act]:
    step_id = step.id
    switch = "Take out of service" if step.on else "Put into service"

    def moved(by: int) -> object:
        act = desk.act(key, f"Move {name}", lambda scenario: editing.move_step(scenario, step_id, by))
        return act if 0 <= position + by < count else None

    dial = main_dial(desk, step, key)
    remove = desk.act(key, f"Remove {name}", lambda scenario: editing.remove_step(scenario, step_id))
    return [
        Act("details", "Close" if desk.opened == key else "Open the settings", lambda: desk.open(key)),
        Act("sweep", "Sweep this", (lambda: desk.sweep(dial, _span(dial))) if dial else None),
        hold_act(desk, own_dial(desk, step, key)),
        Act("rename", "Rename", lambda: desk.rename(key)),
        Act("up", "Move up", moved(-1)),
        Act("down", "Move down", moved(1)),
        Act(
            "duplicate", "Duplicate",
            desk.act(key, f"Duplicate {name}", lambda scenario: editing.duplicate_step(scenario, step_id)),
        ),
        Act(
            "switch", switch,
            desk.act(key, f"{switch}: {name}", lambda scenario: editing.switch_step(scenario, step_id)),
        ),
        Act("remove", "Remove", remove, danger=True),
    ]  # fmt: skip


def _effect(desk: Desk, step: Step, before: str) -> Node:
    """What the step did: the dose a hold came to, pH before and after, alkalinity added or taken."""
    words: list[str] = []
    after = desk.words("ph", step.id)
    words.append(
        f"pH {desk.words('ph', before)} → {after}" if desk.rise("ph", before, step.id) else f"pH {after}"
    )
    if gain := desk.rise("alkalinity", before, step.id):
        words.append(f"alk {gain}")
    return facts(*words, hint="What the step did; alkalinity in mg/L as CaCO₃")


def _setting(desk: Desk, step: Step, key: str) -> list[Node]:
    """The one dial of a step that is turned most, on its card."""
    dial = own_dial(desk, step, key)
    if dial is None:
        return []
    return dial_part(desk, dial, what=SETTING_WORDS.get(dial.address.rpartition(".")[2], ""))


def _span(dial: Dial) -> tuple[float, float] | None:
    """Range of a sweep over a held pH."""
    return SPANS["ph"] if dial.address.endswith(".hold.value") and dial.label.startswith("pH") else None


def add_step(desk: Desk, prefix: str) -> list[Node]:
    """The list of everything that can be added at the end of a train."""
    key = f"{prefix}train:add"

    def add(choice: str) -> None:
        kind, _, chemical = choice.partition(":")
        if kind in KINDS:
            desk.defining = Definition(kind, prefix)
            return

        def change(scenario: Scenario) -> None:
            desk.opened = f"{prefix}train.{editing.add_step(scenario, prefix, kind, chemical or None)}"

        desk.entries.refuse(key, refusal=desk.edit("Add a treatment step", change))

    kinds = [
        Choice(f"{kind}:", step.kind_title, "", (step.__doc__ or "").lower())
        for kind, step in STEP_KINDS.items()
        if step is not DoseStep and not (prefix and step.after_joining)
    ]
    doses = [replace(choice, key=f"dose:{choice.key}") for choice in chemical_choices(desk.scenario)]
    groups = {"Dose a chemical": doses, "Other steps": kinds, "Your own": own_choices()}
    words = "+ Add a treatment step" if not prefix else "+ Add a step"
    return [
        *picker(key, words, groups, add, hint="Search chemicals and steps"),
        desk.refusal(key),
        *own_panel(desk, prefix),
    ]
