"""Choosing a dial with its range, or a readout: the same lists and fields in every view."""

from __future__ import annotations

import math
from collections.abc import Callable

from explorer.app.entry import Entries, show_number
from explorer.app.live_view import Node, node
from explorer.app.pickers import Choice, picker
from explorer.app.state import Session
from explorer.app.text import compact, plain, unit_text
from explorer.scenario.dials import Dial
from explorer.scenario.outcome import BLEND, FINISHED, Outcome
from explorer.scenario.readouts import READOUTS
from explorer.scenario.words import brief_label
from explorer.studies.axes import nice_step


def default_range(dial: Dial) -> tuple[float, float]:
    """Range a dial is first drawn over.

    Percent and temperature: the bounds of the dial. pH: two units to both sides. Everything else: from the
    lower bound to a round number about twice the value.
    """
    top = math.inf if dial.high is None else dial.high
    if dial.unit in {"%", "°C"} and top - dial.low <= 100:
        return dial.low, top
    if dial.label.startswith("pH"):
        middle = round(dial.value)
        return max(dial.low, middle - 2.0), min(top, middle + 2.0)
    span = 2 * max(abs(dial.value - dial.low), 10 * dial.step)
    step = nice_step(span)
    return dial.low, min(top, dial.low + math.ceil(span / step - 1e-9) * step)


def dial_picker(
    session: Session,
    key: str,
    chosen: Dial | None,
    choose: Callable[[str], object],
    title: str,
    label: str = "Choose a dial ▾",
) -> list[Node]:
    """A button with the chosen dial on it, else the ``label``, and the searchable list of all dials; those
    that are held are marked."""
    groups: dict[str, list[Choice]] = {}
    for dial in session.dials.values():
        held = " · held" if dial.address in session.held else ""
        line = Choice(dial.address, plain(dial.label, 90), f"{unit_text(dial.unit)}{held}", dial.address)
        groups.setdefault(plain(dial.group, 60), []).append(line)
    shown = f"{plain(chosen.label, 60)} ▾" if chosen else label
    return picker(key, shown, groups, choose, look="button", hint="Search dials", title=title)


def readout_choices() -> dict[str, list[Choice]]:
    """All readouts under their headings, for a searchable list."""
    groups: dict[str, list[Choice]] = {}
    for readout in READOUTS.values():
        words = f"{readout.short} {readout.key}"
        line = Choice(readout.key, compact(readout.label), unit_text(readout.unit), words)
        groups.setdefault(readout.group, []).append(line)
    return groups


def readout_picker(
    key: str, chosen: str, choose: Callable[[str], object], title: str, look: str = "button"
) -> list[Node]:
    """A button with the chosen readout on it, and the searchable list of all readouts."""
    label = f"{brief_label(READOUTS[chosen])} ▾"
    return picker(key, label, readout_choices(), choose, look=look, hint="Search readouts", title=title)


def stage_picker(
    key: str,
    point: Outcome,
    chosen: str,
    choose: Callable[[str], object],
    title: str,
    look: str = "button",
) -> list[Node]:
    """A button with the chosen place of the plant on it, and the searchable list of all places."""
    waters = [stage for stage in point.stages if stage.kind == "water"]
    steps = [stage for stage in point.stages if stage.kind not in ("water", "blend")]
    groups = {
        "Plant": [Choice(FINISHED, "Finished water"), Choice(BLEND, "Blend")],
        "Source waters": [Choice(stage.id, plain(stage.name, 60)) for stage in waters],
        "Behind a step": [Choice(stage.id, plain(stage.name, 60)) for stage in steps],
    }
    names = {choice.key: choice.label for choices in groups.values() for choice in choices}
    return picker(key, f"{names[chosen]} ▾", groups, choose, look=look, hint="Search places", title=title)


def range_fields(
    entries: Entries,
    key: str,
    what: str,
    ends: tuple[float, float],
    dial: Dial,
    take: Callable[[tuple[float, float]], str],
) -> list[Node]:
    """Fields for both ends of the range of a dial, and the places of their messages.

    what: what the range is of, for screen readers. take: gets the new ends, returns "" or a refusal.
    """
    unit = unit_text(dial.unit)

    def end(name: str, label: str, position: int) -> tuple[Node, Node]:
        def read(number: float) -> str:
            other = ends[1 - position]
            if math.isclose(number, other):
                return "from and to have to differ"
            return take((number, other) if position == 0 else (other, number))

        low = dial.low if dial.bounded else None
        return entries.number(
            name, f"{label}, end of {what}", show_number(ends[position]), read, low=low, high=dial.high,
            unit=unit,
        )  # fmt: skip

    start, start_refused = end(f"{key}start", "From", 0)
    stop, stop_refused = end(f"{key}stop", "To", 1)
    return [
        node("div", "group", node("span", text="from"), start, node("span", text="to"), stop,
             node("span", "unit", text=unit)),
        start_refused, stop_refused,
    ]  # fmt: skip
