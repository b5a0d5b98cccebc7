"""What may be off and how far: the tolerances of the scenario as a table that is edited in place."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from explorer.app.choosers import dial_picker
from explorer.app.desk import beside
from explorer.app.entry import Entries, message, show_number
from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import STUDY_STYLES
from explorer.app.state import Session
from explorer.app.tables import Group, Row, table
from explorer.app.text import in_sentence, plain, unit_text
from explorer.scenario.dials import Dial, neat
from explorer.scenario.model import Scenario, Tolerance
from explorer.studies.spread import spread_of
from explorer.studies.suggestions import SOURCE, Suggestion, suggested_tolerance, suggested_tolerances

HEADING = ("What may be off", "Stands at", "Sides", "By", "Unit", "Distribution", "Together as", "Remove")
WORDS = (0, 2, 3, 4, 5, 6, 7)

SAME, SIDES = "same", "sides"
KINDS = {SAME: "±", SIDES: "− +"}
DISTRIBUTIONS = {"uniform": "uniform", "normal": "normal"}

NEW_PERCENT = 5
"""Half-width of a dial for which there is no usual one."""

EMPTY = (
    "Nothing may be off yet. Add what you know of the analyses, pumps and meters, or take over usual"
    " half-widths and edit them."
)
OFF_NOTE = "out of service here"
HELD_NOTE = "held: its controller makes up for it"
TOGETHER_HINT = "Dials with the same word are off together: one tank, one meter, one method"
NORMAL_HINT = "The ends of a normal error lie at two standard deviations"


@dataclass(frozen=True)
class Line:
    """A tolerance in the table: its dial (None where this season has none), and whether it counts here."""

    address: str
    tolerance: Tolerance
    dial: Dial | None
    live: bool
    held: bool
    along: list[str]

    @property
    def note(self) -> str:
        """What is off with it, or why it counts for nothing here; "" where there is nothing to say."""
        if not self.live:
            return HELD_NOTE if self.held else OFF_NOTE
        return f"moves along: {'; '.join(map(in_sentence, self.along))}" if self.along else ""

    @property
    def label(self) -> str:
        return plain(self.address if self.dial is None else self.dial.label, 90)


class ToleranceTable(LiveView):
    """The table, with suggestions below what is entered."""

    css = (*STUDY_STYLES, "sheet.css")

    def __init__(self, session: Session, **settings: Any) -> None:
        self.session = session
        self.entries = Entries()
        super().__init__(sizing_mode="stretch_both", margin=0, **settings)

    def describe(self) -> Node:
        lines, usual = self.lines(), self.suggestions()
        rows: list[Row | Group] = [self._row(line) for line in lines]
        beside_values = list(self._beside_values())
        if beside_values:
            rows += [Group("Entered beside values of the analyses"), *beside_values]
        if usual:
            rows += [Group(f"Usual half-widths ({SOURCE}), not entered yet")]
            rows += [self._offer(self.session.dials[address], offer) for address, offer in usual.items()]
        hint = None if lines else node("p", "nothing", text=EMPTY)
        return node(
            "div", "pane",
            node("div", "controls", *self._adders(usual), message(self.entries.refusal("add"))),
            node("div", "card grow", hint, table("Tolerances", _heading(), rows, words=WORDS, look="loose")),
        )  # fmt: skip

    # ---- what there is -------------------------------------------------------------------------------

    def lines(self) -> list[Line]:
        """The tolerances of the scenario in their order."""
        scenario, dials = self.session.scenario, self.session.dials
        spread = spread_of(scenario)
        moved = spread.moved
        return [
            Line(
                address,
                tolerance,
                dials.get(address),
                address in moved or not any(tolerance.sides),
                address in self.session.held,
                spread.follows(address),
            )
            for address, tolerance in scenario.tolerances.items()
        ]

    def suggestions(self) -> dict[str, Suggestion]:
        """Usual tolerances of dials that have none, neither here nor beside their value."""
        known = self.session.scenario.tolerances.keys() | {dial.address for dial, _ in self._stated()}
        found = suggested_tolerances(self.session.scenario)
        return {address: offer for address, offer in found.items() if address not in known}

    def _stated(self) -> Iterator[tuple[Dial, float]]:
        """Dials with a ± beside their value in the analysis and no tolerance of their own."""
        scenario, dials = self.session.scenario, self.session.dials
        for water in scenario.waters:
            analysis = water.analyses.get(scenario.season)
            for key, entry in analysis.entries.items() if analysis else ():
                address = f"waters.{water.id}.analysis.{key}"
                if entry.plus_minus and address in dials and address not in scenario.tolerances:
                    yield dials[address], entry.plus_minus

    # ---- rows ----------------------------------------------------------------------------------------

    def _row(self, line: Line) -> Row:
        tolerance, dial, key = line.tolerance, line.dial, f"tolerance:{line.address}"
        minus, plus = tolerance.sides
        kind = SAME if minus == plus and tolerance.minus is None and tolerance.plus is None else SIDES
        name = node(
            "span", "", node("span", text=line.label),
            node("small", "aside", text=plain(line.note, 200)) if line.note else None,
            message(self.entries.refusal(key)),
        )  # fmt: skip
        together, refused = self.entries.text(
            f"{key}:shared", f"Together as, {line.label}", tolerance.shared,
            lambda text: self._set(line, shared=text.strip()), maxlength=80,
        )  # fmt: skip
        drop = node(
            "button", "more", text="×", key=f"{key}:drop", type="button", title="Remove this tolerance",
            aria_label=f"Remove the tolerance of {line.label}", on=lambda value: self._drop(line),
        )  # fmt: skip
        cells = [
            name,
            _standing(dial),
            self.entries.choice(f"{key}:kind", f"One or both sides, {line.label}", KINDS, kind,
                                lambda chosen: self._set_kind(line, chosen)),
            self._widths(line, kind, key),
            self.entries.choice(f"{key}:unit", f"Unit, {line.label}", _units(dial), tolerance.unit,
                                lambda chosen: self._set_unit(line, chosen)),
            self.entries.choice(f"{key}:distribution", f"Distribution, {line.label}", DISTRIBUTIONS,
                                tolerance.distribution, lambda chosen: self._set(line, distribution=chosen)),
            node("span", "", together, refused),
            drop,
        ]  # fmt: skip
        return Row(cells, "" if line.live else "idle", key)

    def _widths(self, line: Line, kind: str, key: str) -> Node:
        minus, plus = line.tolerance.sides

        def field(name: str, label: str, value: float) -> tuple[Node, Node]:
            return self.entries.number(
                f"{key}:{name}", f"{label}, {line.label}", show_number(value),
                lambda number: self._set(line, **{name: neat(number)}), low=0.0,
            )  # fmt: skip

        if kind == SAME:
            return node("span", "widths", *field("plus_minus", "Half-width", plus))
        down, up = field("minus", "Width downwards", minus), field("plus", "Width upwards", plus)
        sides = (
            node("span", "side", node("span", text=sign), part[0]) for sign, part in (("−", down), ("+", up))
        )
        return node("span", "widths", *sides, down[1], up[1])

    def _beside_values(self) -> Iterator[Row]:
        for dial, width in self._stated():
            text = show_number(width)
            cells = [
                plain(dial.label, 90),
                _standing(dial),
                "±",
                text,
                unit_text(dial.unit),
                "uniform",
                "",
                "",
            ]
            yield Row(cells, key=f"stated:{dial.address}")

    def _offer(self, dial: Dial, offer: Suggestion) -> Row:
        tolerance = offer.tolerance
        minus, plus = tolerance.sides
        text = show_number(plus) if minus == plus else f"− {show_number(minus)}  + {show_number(plus)}"
        add = node(
            "button", "button small", text="Add", key=f"offer:{dial.address}", type="button",
            aria_label=f"Add the usual tolerance of {plain(dial.label, 90)}",
            on=lambda value: self._add({dial.address: offer}),
        )  # fmt: skip
        cells = [
            plain(dial.label, 90), _standing(dial), "±" if minus == plus else "", text,
            _units(dial)[tolerance.unit], tolerance.distribution, offer.reason, add,
        ]  # fmt: skip
        return Row(cells, "offer", f"offer-row:{dial.address}")

    def _adders(self, usual: dict[str, Suggestion]) -> list[Node]:
        pick = dial_picker(
            self.session, "add", None, self._add_dial, "Choose a dial that may be off", label="+ Add a dial ▾"
        )
        if not usual:
            return pick
        words = f"Add all {len(usual)} usual half-widths"
        every = node(
            "button", "button", text=words, key="add-all", type="button",
            on=lambda value: self._add(usual), title=f"Half-widths of {SOURCE}, there to be edited",
        )  # fmt: skip
        return [*pick, every]

    # ---- changes -------------------------------------------------------------------------------------

    def _set(self, line: Line, **parts: Any) -> str:
        def change(scenario: Scenario) -> None:
            raw = scenario.tolerances[line.address].to_dict() | parts
            kept = {name: part for name, part in raw.items() if part is not None}
            _put(scenario, {line.address: Tolerance.from_dict(kept, f"tolerances.{line.address}")})

        return beside(self.session.edit(f"Tolerance of {line.label}", change))

    def _set_kind(self, line: Line, kind: str) -> None:
        minus, plus = line.tolerance.sides
        if kind == SAME:
            parts = {"plus_minus": neat(max(minus, plus)), "minus": None, "plus": None}
        else:
            parts = {"plus_minus": None, "minus": neat(minus), "plus": neat(plus)}
        self._refuse(line, self._set(line, **parts))

    def _set_unit(self, line: Line, unit: str) -> None:
        """Another unit says the same in other words: the widths are converted."""
        value = abs(line.dial.value) if line.dial is not None else 0.0
        if not value:
            self._refuse(line, "stands at zero, of which no part can be taken; allowed only its own unit")
            return
        factor = 100 / value if unit == "%" else value / 100
        widths = {
            name: neat(float(f"{getattr(line.tolerance, name) * factor:.4g}"))
            for name in ("plus_minus", "minus", "plus")
            if getattr(line.tolerance, name) is not None
        }
        self._refuse(line, self._set(line, unit=unit, **widths))

    def _drop(self, line: Line) -> None:
        def change(scenario: Scenario) -> None:
            kept = scenario.tolerances.items()
            scenario.tolerances = {address: part for address, part in kept if address != line.address}

        self._refuse(line, self.session.edit(f"Remove the tolerance of {line.label}", change))

    def _add(self, offers: dict[str, Suggestion]) -> None:
        """Enter usual tolerances, all in one step."""

        def change(scenario: Scenario) -> None:
            _put(scenario, {address: offer.tolerance.copy() for address, offer in offers.items()})

        label = "Add a tolerance" if len(offers) == 1 else f"Add {len(offers)} tolerances"
        self.entries.refuse("add", refusal=self.session.edit(label, change))

    def _add_dial(self, address: str) -> None:
        dial = self.session.dials[address]
        if address in self.session.scenario.tolerances:
            self.entries.refuse("add", refusal=f"{plain(dial.label, 90)} has a tolerance already")
            return
        offer = suggested_tolerance(self.session.scenario, dial)
        if offer is None:
            own = not dial.value
            new = Tolerance(plus_minus=neat(dial.step) if own else NEW_PERCENT, unit="" if own else "%")
            offer = Suggestion(new, "")
        self._add({address: offer})

    def _refuse(self, line: Line, refusal: str) -> None:
        self.entries.refuse(f"tolerance:{line.address}", refusal=refusal)


def _heading() -> list[str | Node]:
    hints = {"Together as": TOGETHER_HINT, "Distribution": NORMAL_HINT}
    return [node("span", text=text, title=hints[text]) if text in hints else text for text in HEADING]


def _put(scenario: Scenario, tolerances: dict[str, Tolerance]) -> None:
    scenario.tolerances = {**scenario.tolerances, **tolerances}


def _units(dial: Dial | None) -> dict[str, str]:
    """Units a tolerance of a dial can have: its own, or percent of its value."""
    if dial is None:
        own = "unit of the dial"
    elif dial.unit == "%":
        own = "points"
    else:
        own = unit_text(dial.unit) or ("pH" if dial.label.startswith("pH") else "absolute")
    return {"": own, "%": "% of it"}


def _standing(dial: Dial | None) -> str:
    """Where a dial stands, with its unit."""
    if dial is None:
        return "–"
    unit = unit_text(dial.unit)
    return f"{show_number(dial.value)}{f' {unit}' if unit else ''}"
