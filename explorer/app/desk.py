"""What the cards of the rail share: the session, the fields, what is open, and how numbers are worded."""

import math
import re
from collections.abc import Callable
from typing import Any

import numpy as np

from explorer.app.choosers import default_range
from explorer.app.entry import Entries, message, show_number
from explorer.app.hold_panel import settled
from explorer.app.live_view import Node, node
from explorer.app.other_units import Originals
from explorer.app.state import Change, Session
from explorer.app.text import unit_text
from explorer.chemistry import System
from explorer.scenario import editing
from explorer.scenario.dials import Dial, fine_step, is_share
from explorer.scenario.model import Analysis, Scenario, Water
from explorer.scenario.operations import Dose
from explorer.scenario.own_parts import own_parts
from explorer.scenario.readouts import MINUS, READOUTS, format_value
from explorer.scenario.words import number_text
from explorer.studies.axes import nice_step
from explorer.treatment.analysis import Examination, examine
from explorer.treatment.units import from_base

_PATH = re.compile(r"^[\w\-]+(\[\d+\])?(\.[\w\-]+(\[\d+\])?)*: ")
_COARSE = 12.0  # a slider longer than this many times its value cannot be set by hand
POSITIONS = 200
"""Steps from one end of a slider to the other, at least: about one a pixel."""


def beside(sentence: str) -> str:
    """A refusal as it stands beside the field itself: without the path that leads to the field."""
    return _PATH.sub("", sentence)


class Desk:
    """One rail's working state apart from the scenario; lives as long as the browser tab.

    opened: key of the card that shows its details ("" for none, one at a time). unfolded: key of the analysis
    row that shows its note. naming: key of the card being renamed. originals: entries as they were before
    their unit was changed. pasting: the laboratory sheet being taken over (``paste_panel.Pasting``), or None.
    defining: the substance of the user's own being defined (``own_substance.Definition``), or None.
    holding: the hold whose form is open (``holding.Holding``), or None. reached: ends of sliders by address.
    """

    def __init__(self, session: Session) -> None:
        self.session = session
        self.entries = Entries()
        self.opened = self.unfolded = self.naming = ""
        self.originals = Originals()
        self.pasting: Any = None
        self.defining: Any = None
        self.holding: Any = None
        self.reached: dict[str, float] = {}
        self._examined: tuple[Any, Examination] | None = None

    @property
    def scenario(self) -> Scenario:
        return self.session.scenario

    # ---- results in words ----------------------------------------------------------------------------

    def reading(self, readout: str, stage: str) -> float:
        """A result at a stage; nan while there is none (not solved yet, or the stage is new)."""
        if self.session.point is None:
            return math.nan
        try:
            value = self.session.point.readout(readout, stage)
        except (KeyError, ValueError):
            return math.nan
        return float(np.asarray(value))

    def words(self, readout: str, stage: str) -> str:
        """The same as text without unit."""
        return format_value(self.reading(readout, stage), READOUTS[readout])

    def rise(self, readout: str, before: str, after: str) -> str:
        """How much a result rises from one stage to another, signed; "" where it stays or there is none."""
        difference = self.reading(readout, after) - self.reading(readout, before)
        words = format_value(abs(difference), READOUTS[readout])
        if not math.isfinite(difference) or not words.strip("0."):
            return ""
        return f"{'+' if difference > 0 else MINUS}{words}"

    def dose(self, step_id: str) -> float:
        """Dose of a step in its entered unit, as computed where it is held; nan while there is none."""
        dose = self.dosing(step_id)
        return math.nan if dose is None else float(dose.value)

    def dosing(self, step_id: str) -> Dose | None:
        """What a dose step adds, None while there is no result."""
        point = self.session.point
        return point.dosing.get(step_id) if point is not None else None

    def uses(self) -> list[tuple[str, float]]:
        """Chemicals with their use in kg a day: of product, or of active substance where none is known."""
        point = self.session.point
        found: dict[str, float] = {}
        for dose in point.dosing.values() if point is not None else ():
            # g/m³ times m³/h, over a day.
            active = 1000 * float(dose.moles) * dose.chemical.molar_mass
            product = float(dose.product)
            use = (product if math.isfinite(product) else active) * float(dose.flow) * 24 / 1000
            if math.isfinite(use):
                found[dose.chemical.name] = found.get(dose.chemical.name, 0.0) + use
        return list(found.items())

    def part(self, water: Water) -> float:
        """Part (0 to 1) of a water in the blend, as computed where shares are held."""
        point = self.session.point
        if point is not None and any(map(is_share, self.session.held)):
            return float(point.parts.get(water.id, 0.0))
        return self.scenario.fractions()[water.id]

    def flow_text(self, flow: float | None) -> str:
        """A flow [m³/h] in the unit in which flow was entered; "" where none was."""
        given = self.scenario.flow or next((water.flow for water in self.scenario.waters if water.flow), None)
        if flow is None or given is None:
            return ""
        value = float(from_base(flow, given.unit, "flow"))
        return f"{number_text(value, 1 if abs(value) < 1000 else 0)} {given.unit}"

    def tolerance(self, dial: Dial) -> str:
        """Half-width of a dial in words, "±5 %"; "" where none is stated."""
        stated = self.scenario.tolerances.get(dial.address)
        if stated is None:
            return ""
        minus, plus = stated.sides
        # Percent of a percentage and percentage points are not the same.
        points = " points" if dial.unit == "%" else ""
        unit = f" {stated.unit}" if stated.unit else points
        return f"±{plus:g}{unit}" if minus == plus else f"+{plus:g} −{minus:g}{unit}"

    def examination(self, analysis: Analysis, system: System) -> Examination:
        """What an analysis says about itself; worked out again only when the analysis has changed.

        Raises AnalysisError.
        """
        given = (system, analysis.close_with, tuple(analysis.entries.items()))
        if self._examined is None or self._examined[0] != given:
            self._examined = given, examine(analysis.entries, system, close_with=analysis.close_with)
        return self._examined[1]

    # ---- changes -------------------------------------------------------------------------------------

    def turn(self, address: str, value: float) -> str:
        """Turn a dial; "" or the refusal, fit to stand beside its field."""
        return beside(self.session.turn(address, value))

    def edit(self, label: str, change: Change, key: str = "") -> str:
        """Change the scenario; "" or the refusal, fit to stand beside the field."""
        return beside(self.session.edit(label, change, key))

    def act(self, place: str, label: str, change: Change) -> Callable[[], None]:
        """What a button does that changes the scenario; a refusal stands at the card ``place``."""
        # With its path: the part at fault may be another than the one the button belongs to.
        return lambda: self.entries.refuse(place, refusal=self.session.edit(label, change))

    def refusal(self, place: str) -> Node:
        """Where the refusals of :meth:`act` stand."""
        return message(self.entries.refusal(place))

    def open(self, key: str) -> None:
        """Open a card, and close it when it is open: one card at a time."""
        self.opened = "" if self.opened == key else key
        self.unfolded = ""

    def unfold(self, key: str) -> None:
        """Unfold what more there is about a line of the analysis, and fold it when it is unfolded."""
        self.unfolded = "" if self.unfolded == key else key

    def settle(self) -> None:
        """After another scenario or a removal: nothing stays open that is no longer there."""
        standing = {f"waters.{water.id}" for water in self.scenario.waters}
        for prefix, owner in editing.trains(self.scenario):
            standing |= {f"{prefix}train.{step.id}" for step in owner.train}
        if self.opened not in {*standing, "about"}:
            self.opened = ""
        if self.naming not in standing:
            self.naming = ""
        self.holding = settled(self)
        if self.defining is not None and self.defining.id not in {
            "",
            *(part.id for part in own_parts(self.scenario)),
        }:
            self.defining = None
        if self.pasting is not None and f"waters.{self.pasting.water}" not in {*standing, "waters."}:
            self.pasting = None

    def rename(self, key: str) -> None:
        """Let the name of a card be typed."""
        self.naming = key

    def sweep(self, dial: Dial, span: tuple[float, float] | None = None) -> None:
        """Put a dial on the x axis; a refusal stands at its field."""
        start, stop = span or default_range(dial)
        refusal = beside(self.session.set_sweep(dial=dial.address, start=start, stop=stop))
        self.entries.refuse(dial.address, show_number(dial.value), refusal)

    # ---- parts of cards ------------------------------------------------------------------------------

    def dial_row(
        self,
        dial: Dial,
        *,
        what: str = "",
        colour: str | None = None,
        span: tuple[float, float] | None = None,
        digits: int | None = None,
        beside: Node | None = None,
    ) -> Node:
        """A dial as slider and exact number with its unit; both at rest while it is computed.

        what: a word on what the number is, behind the unit. span: ends of the slider, where they are not to
        follow from the dial. digits: decimals shown, those of the slider's step where None. beside: what
        stands at the end of the row.
        """
        reason = self.session.fixed(dial.address)
        value = self.session.value(dial.address) if reason else dial.value
        low, high = span or (dial.low, self._reached(dial))
        step = fine_step(100 * (high - low) / POSITIONS)
        shown = show_number(value, step if digits is None else 10.0**-digits)
        hint = f"{dial.label} {reason}" if reason else None

        def slide(value: Any) -> None:
            self.entries.refuse(
                dial.address, show_number(float(value), step), self.turn(dial.address, float(value))
            )

        slider = node(
            "input", "slider", key=f"{dial.address}:slider", on=slide, type="range", min=low, max=high,
            step=step, value=value if math.isfinite(value) else low, colour=colour, aria_label=dial.label,
            aria_valuetext=f"{shown} {dial.unit}".strip(), disabled=bool(reason), title=hint,
        )  # fmt: skip
        number, refusal = self.entries.number(
            dial.address, dial.label, shown, lambda value: self.turn(dial.address, value),
            low=dial.low if dial.bounded else None, high=dial.high, unit=dial.unit,
            disabled=bool(reason), hint=hint, placeholder="–" if reason else "",
        )  # fmt: skip
        words = f"{unit_text(dial.unit)} {what}".strip()
        unit = node("span", "unit", text=words, title=dial.label) if words else None
        return node("div", "row fixed" if reason else "row", slider, number, unit, beside, refusal)

    def _reached(self, dial: Dial) -> float:
        """Right end of a dial's slider: its limit, or a round number near its value where that is far off.

        The end stays where it is while the value is inside, so that the handle does not slip while dragged.
        """
        wide = dial.high is None or dial.high - dial.low > _COARSE * max(abs(dial.value), 10 * dial.step)
        if not wide and dial.address not in self.reached:
            return dial.high
        end = self.reached.get(dial.address, -math.inf)
        if dial.value > end:
            span = max(2.2 * (dial.value - dial.low), 50 * dial.step)
            end = dial.low + 5 * nice_step(span, 5)
        end = end if dial.high is None else min(end, dial.high)
        self.reached[dial.address] = end
        return end

    def name_field(self, key: str, part_id: str, shown: str) -> list[Node]:
        """The field that stands in for the name of a water or step while it is renamed, and its message."""

        def take(text: str) -> str:
            refusal = self.edit(
                f"Rename {shown}", lambda scenario: editing.rename(scenario, part_id, text.strip())
            )
            if not refusal:
                self.naming = ""
            return refusal

        return list(self.entries.text(f"{key}:name", "Name", shown, take, autofocus=True, maxlength=80))


def heading(text: str) -> Node:
    """Heading of a part of the rail."""
    return node("h2", text=text)


def facts(*words: str | tuple[str, str] | None, hint: str = "") -> Node:
    """Short facts in one line, each kept together; a pair is a fact with its look. hint: units in full."""
    pairs = [(word, "") if isinstance(word, str) else word for word in words if word]
    return node("p", "facts", *(node("span", look, text=text) for text, look in pairs), title=hint or None)
