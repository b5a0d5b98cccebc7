"""Holding a readout with a dial: the mark beside the dial, what it came to, and the form of what is held.

One form for every dial. It is a draft until "Hold" is pressed; what is held is changed field by field.
"""

from __future__ import annotations

import math
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from explorer.app.choosers import readout_choices
from explorer.app.entry import message, show_number
from explorer.app.live_view import Node, node
from explorer.app.pickers import Act, picker
from explorer.app.text import compact, in_sentence, plain, unit_text
from explorer.scenario.dials import Dial, fine_step
from explorer.scenario.editing import tidy
from explorer.scenario.errors import ScenarioError
from explorer.scenario.holding import (
    Holding,
    downstream,
    goal_text,
    met,
    place_name,
    place_words,
    release,
    set_hold,
    words_of,
)
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import READOUTS
from explorer.scenario.stage import FINISHED
from explorer.studies.axes import nice_step

if TYPE_CHECKING:
    from explorer.app.desk import Desk

SPANS = {"ph": (5.0, 11.0)}
"""Ends of the slider of a held readout, where others would be no use."""

SIGN, HELD_SIGN = "◎", "◉"
NEW_CEILING = 4
"""Limit of a dose that begins to be held, over the dose as it stands."""


def step_dial(held: Holding) -> Dial:
    """Stands for the dose of a step that holds a readout: it has no dial of its own."""
    low, high = held.low or 0.0, held.high
    return Dial(
        held.address, held.label, held.unit, math.nan, low, high, fine_step(high or 0.0), "", True,
        lambda value: None,
    )  # fmt: skip


def dial_part(desk: Desk, dial: Dial, *, span: tuple[float, float] | None = None, **look: Any) -> list[Node]:
    """A dial on its card with the button that holds a readout with it; below it what it holds."""
    held = desk.session.holdings.get(dial.address)
    inside = held is not None and held.address in desk.session.held
    if inside and held.high is not None:
        span = dial.low if held.low is None else held.low, held.high
    button = _button(desk, dial, held) if held is not None or not desk.session.fixed(dial.address) else None
    parts = [desk.dial_row(dial, span=span, beside=button, **look)]
    if held is not None:
        goal = goal_row(desk, held)
        parts += [_state(desk, held, inside), *([goal] if goal is not None else [])]
    if desk.holding is not None and desk.holding.address == dial.address:
        parts.append(_form(desk, dial, held))
    return parts


def hold_act(desk: Desk, dial: Dial | None) -> Act:
    """The line of a card's menu that opens the form."""
    words = "Hold a readout with this"
    if dial is None:
        return Act("hold", words, None)
    held = dial.address in desk.session.holdings
    return Act("hold", "What this holds" if held else words, lambda: toggle(desk, dial))


def toggle(desk: Desk, dial: Dial) -> None:
    """Open the form of a dial, and close it when it is open: one at a time."""
    if desk.holding is not None and desk.holding.address == dial.address:
        desk.holding = None
    else:
        desk.holding = desk.session.holdings.get(dial.address) or _draft(desk, dial)


def settled(desk: Desk) -> Holding | None:
    """The form that is open, after a change elsewhere: as the hold now is; None where the dial has gone."""
    if desk.holding is None:
        return None
    address, every = desk.holding.address, desk.session.holdings
    if address in every:
        return every[address]
    return desk.holding if address in desk.session.dials else None


def _draft(desk: Desk, dial: Dial) -> Holding:
    """What a new hold starts from: a dose holds the pH behind its step, anything else the first target."""
    scenario = desk.scenario
    dosing = dial.address.endswith(".dose")
    aimed = [target.readout for target in scenario.targets]
    readout = "ph" if dosing or not aimed else aimed[0]
    stage = dial.address.split(".")[-2] if dosing else FINISHED
    high = max(NEW_CEILING * dial.value, 1.0) if dial.high is None else None
    draft = Holding(dial.address, dial.label, dial.unit, readout, 0.0, stage, None, high)
    return replace(draft, value=_now(desk, draft))


def _now(desk: Desk, held: Holding) -> float:
    """The readout as it is, with its digits: to hold it there changes nothing yet."""
    value = desk.reading(held.readout, held.stage)
    return round(value, READOUTS[held.readout].digits) if math.isfinite(value) else held.value


# ---- on the card -------------------------------------------------------------------------------------------


def _button(desk: Desk, dial: Dial, held: Holding | None) -> Node:
    title = "Hold a readout with this dial" if held is None else f"This dial {words_of(held)}"
    opened = desk.holding is not None and desk.holding.address == dial.address
    return node(
        "button", "aim" if held is None else "aim on", text=SIGN if held is None else HELD_SIGN,
        key=f"{dial.address}:aim", type="button", on=lambda value: toggle(desk, dial), title=title,
        aria_label=f"{title}: {plain(dial.label, 80)}", aria_expanded=str(opened).lower(),
    )  # fmt: skip


def _state(desk: Desk, held: Holding, inside: bool) -> Node:
    """What is held and where, and whether that is reached."""
    readout = READOUTS[held.readout]
    tag = node("span", "tag", text=words_of(held), title=f"{readout.label}, {readout.unit}".rstrip(", "))
    if not inside:
        words, look = "▲ rests: the place is out of service", "poor"
    elif desk.session.point is None or met(desk.session.point, held):
        where = "" if held.step else f" · {place_words(desk.scenario, held.stage)}"
        words, look = f"computed{where}", "soft"
    else:
        best = goal_text(readout, round(desk.reading(held.readout, held.stage), readout.digits))
        words, look = f"▲ cannot be reached: {best} at best", "poor"
    return node("div", "state", tag, node("span", look, text=words))


def goal_row(desk: Desk, held: Holding) -> Node | None:
    """The held value, to be turned; None where the dial it is about is not there now."""
    dial = desk.session.dials.get(held.goal)
    if dial is None:
        return None
    return desk.dial_row(dial, span=_span(desk, dial, held), digits=READOUTS[held.readout].digits)


def _span(desk: Desk, dial: Dial, held: Holding) -> tuple[float, float] | None:
    if held.readout in SPANS:
        return SPANS[held.readout]
    readout = READOUTS[held.readout]
    if held.value >= 0 and readout.sign_words is None:
        return None
    # Readouts with a sign: the same to both sides, and still while the handle is dragged.
    end = desk.reached.get(dial.address, 0.0)
    if abs(dial.value) > end:
        end = 5 * nice_step(max(2.2 * abs(dial.value), 50 * 10.0**-readout.digits), 5)
        desk.reached[dial.address] = end
    return -end, end


# ---- the form ----------------------------------------------------------------------------------------------


def _form(desk: Desk, dial: Dial, held: Holding | None) -> Node:
    shown = held or desk.holding
    key = f"hold:{dial.address}"
    lines = [*_readout(desk, shown, key), *_value(desk, shown, key)]
    lines += [*_place(desk, shown, key), *_limits(desk, dial, shown, key)]
    if held is None:
        take = node("button", "press strong", text="Hold", key=f"{key}:take", type="button",
                    on=lambda value: _take(desk, key))  # fmt: skip
        leave = node("button", "link", text="Cancel", key=f"{key}:leave", type="button",
                     on=lambda value: toggle(desk, dial))  # fmt: skip
    else:
        take = node("button", "press", text="Done", key=f"{key}:leave", type="button",
                    on=lambda value: toggle(desk, dial))  # fmt: skip
        leave = node("button", "link danger", text="Release", key=f"{key}:release", type="button",
                     title="The dial stays where it is and is set by hand again",
                     on=lambda value: _release(desk, held, key))  # fmt: skip
    title = "Hold a readout with this dial" if held is None else "This dial holds"
    return node(
        "div", "paste-panel", node("h4", text=title), node("div", "form", *lines),
        message(desk.entries.refusal(key)), node("div", "below", take, leave), key=key, data_reveal=True,
    )  # fmt: skip


def _readout(desk: Desk, shown: Holding, key: str) -> list[Node]:
    def take(name: str) -> None:
        # The old number means nothing in the new unit: start from the water as it is.
        value = _now(desk, replace(shown, readout=name, value=0.0))
        desk.entries.refuse(f"{key}:value")
        desk.entries.refuse(f"{key}:readout", refusal=_put(desk, shown, readout=name, value=value))

    label = compact(READOUTS[shown.readout].label)
    chosen = picker(f"{key}:readout", label, readout_choices(), take, look="chosen", hint="Search readouts")
    return [_caption("Readout"), node("div", "pair", *chosen), desk.refusal(f"{key}:readout")]


def _value(desk: Desk, shown: Holding, key: str) -> list[Node]:
    readout = READOUTS[shown.readout]
    box, refused = desk.entries.number(
        f"{key}:value", f"Held {in_sentence(readout.label)}", show_number(shown.value),
        lambda number: _put(desk, shown, value=number), unit=unit_text(readout.unit),
    )  # fmt: skip
    unit = node("span", "unit", text=unit_text(readout.unit))
    return [_caption("at"), node("div", "pair", box, unit), refused]


def _place(desk: Desk, shown: Holding, key: str) -> list[Node]:
    places = list(dict.fromkeys([*downstream(desk.scenario, shown.address), shown.stage]))
    names = {place: place_name(desk.scenario, place) for place in places}

    def take(place: str) -> None:
        parts: dict[str, Any] = {"stage": place}
        if shown.address not in desk.session.holdings and shown.value == _now(desk, shown):
            # Nobody has entered a value yet: it goes on following the water.
            parts["value"] = _now(desk, replace(shown, stage=place))
        desk.entries.refuse(f"{key}:stage", refusal=_put(desk, shown, **parts))

    box = desk.entries.choice(f"{key}:stage", "Where the readout is held", names, shown.stage, take)
    return [_caption("where"), node("div", "pair", box), desk.refusal(f"{key}:stage")]


def _limits(desk: Desk, dial: Dial, shown: Holding, key: str) -> list[Node]:
    """How far the dial may go; emptied, its own limit counts, if it has one."""

    def end(name: str, words: str, own: float | None) -> tuple[Node, Node]:
        return desk.entries.number(
            f"{key}:{name}", f"{words} of {in_sentence(dial.label)}", show_number(getattr(shown, name)),
            lambda number: _put(desk, shown, **{name: number}),
            low=dial.low if dial.bounded else None, high=None if shown.step else dial.high, unit=dial.unit,
            empty=None if own is None else lambda: _put(desk, shown, **{name: None}),
            placeholder="" if own is None else show_number(own),
        )  # fmt: skip

    low = end("low", "Lowest", dial.low)
    high = end("high", "Highest", None if shown.step else dial.high)
    unit = node("span", "unit", text=unit_text(dial.unit))
    pair = node("div", "pair", low[0], node("span", "unit", text="to"), high[0], unit)
    return [_caption("dial within"), pair, low[1], high[1]]


def _caption(text: str) -> Node:
    return node("span", "caption", text=text)


# ---- changes -----------------------------------------------------------------------------------------------


def _stands(desk: Desk, address: str) -> float:
    """Where a dial stands, with figures a person would write."""
    value = desk.session.value(address) if _known(desk, address) else math.nan
    if not math.isfinite(value):
        dial = desk.session.dials.get(address)
        return 0.0 if dial is None else dial.value
    return float(f"{value:.5g}")


def _known(desk: Desk, address: str) -> bool:
    return address in desk.session.dials or address in desk.session.held


def _put(desk: Desk, shown: Holding, **parts: Any) -> str:
    """Change parts of a hold, or of the draft; "" or the refusal."""
    address, stands = shown.address, _stands(desk, shown.address)
    if address in desk.session.holdings:
        label = f"Hold with {in_sentence(shown.label)}"
        return desk.edit(label, lambda scenario: set_hold(scenario, address, stands, **parts))
    draft = replace(shown, **parts)
    refusal = _trial(desk, draft, stands)
    if not refusal:
        desk.holding = draft
    return refusal


def _trial(desk: Desk, draft: Holding, stands: float) -> str:
    """Why a hold cannot be as drafted, "" when it can."""
    trial = desk.scenario.copy()
    try:
        _apply(trial, draft, stands)
        tidy(trial)
        Scenario.from_dict(trial.to_dict())
    except ScenarioError as error:
        return error.message
    return ""


def _apply(scenario: Scenario, draft: Holding, stands: float) -> None:
    set_hold(
        scenario, draft.address, stands, readout=draft.readout, value=draft.value, stage=draft.stage,
        low=draft.low, high=draft.high,
    )  # fmt: skip


def _take(desk: Desk, key: str) -> None:
    draft = desk.holding
    if any(desk.entries.refusal(f"{key}:{field}") for field in ("value", "low", "high")):
        desk.entries.refuse(key, refusal="a field above has to be mended first")
        return
    stands = _stands(desk, draft.address)
    label = f"Hold with {in_sentence(draft.label)}"
    refusal = desk.edit(label, lambda scenario: _apply(scenario, draft, stands))
    desk.entries.refuse(key, refusal=refusal)
    if not refusal:
        desk.holding = None


def _release(desk: Desk, held: Holding, key: str) -> None:
    stands = _stands(desk, held.address)
    label = f"Release {in_sentence(held.label)}"
    refusal = desk.edit(label, lambda scenario: release(scenario, held.address, stands))
    desk.entries.refuse(key, refusal=refusal)
    if held.address not in desk.session.holdings:
        desk.holding = None
