"""The question the other way round: how far may a dial be off for a result to stay near enough?"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Any

from explorer.app import tolerance_setting as settings
from explorer.app.choosers import dial_picker
from explorer.app.entry import Entries, show_number
from explorer.app.errand import REST, Errand, progress
from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import STUDY_STYLES
from explorer.app.state import Session
from explorer.app.text import in_sentence, unit_text
from explorer.scenario.dials import Dial
from explorer.scenario.readouts import READOUTS, Readout, format_value
from explorer.scenario.words import brief_label
from explorer.studies.progress import Watch
from explorer.studies.ranking import Allowed, allowed_tolerance

USUAL_WITHIN = {"ph": 0.2}
"""How near a result has to stay at first, in its unit, where five percent of its value would be no use."""

KINDS = (".dose", ".strength", ".share", ".flow")
"""Ends of the addresses of dials that are asked about first, best first."""


@dataclass(frozen=True)
class Question:
    """How far may ``dial`` be off for ``readout`` to stay within ± ``within``?"""

    dial: str
    readout: str
    within: float


class AllowedCard(LiveView):
    """The question and its answer. ``readout``: key of the readout that the view shows."""

    css = ("sheet.css", *STUDY_STYLES)

    def __init__(self, session: Session, readout: Callable[[], str], **properties: Any) -> None:
        self.session, self.readout = session, readout
        self.entries, self.errand = Entries(), Errand()
        self.answer: tuple[Question, Allowed] | None = None
        super().__init__(sizing_mode="stretch_width", margin=0, **properties)
        self.errand.param.watch(lambda *events: self.refresh(), ["busy", "part", "stopped", "refusal"])

    def question(self) -> Question | None:
        """What is asked: the chosen dial and distance, else the first dose; None where there is no dial."""
        chosen = self.session.choices.get("allowed", {})
        free = [address for address in self.session.dials if not self.session.fixed(address)]
        usual = (address for kind in KINDS for address in free if address.endswith(kind))
        dial = chosen.get("dial") if chosen.get("dial") in free else next(usual, None)
        if dial is None:
            return None
        key = self.readout()
        within = chosen.get("within", {}).get(key) or self._usual(READOUTS[key])
        return Question(dial, key, within)

    def follow(self, rest: float = REST) -> None:
        """Ask anew unless the answer shown is to the same question."""
        scenario, asked = self.session.solved, self.question()
        self.refresh()
        if scenario is None or asked is None:
            return

        def work(watch: Watch) -> Iterator[tuple[Question, Allowed]]:
            yield asked, allowed_tolerance(scenario, [asked.dial], asked.readout, asked.within)

        self.errand.start(work, self._take, rest, lambda: f"{settings.plant_text(scenario)} {asked}")

    def drop(self) -> None:
        """The answer is wanted no longer."""
        self.errand.drop()

    def _take(self, found: tuple[Question, Allowed]) -> None:
        self.answer = found
        self.refresh()

    def describe(self) -> Node:
        asked = self.question()
        if asked is None:
            return node("div", "found")
        readout, dial = READOUTS[asked.readout], self.session.dials[asked.dial]
        pick = dial_picker(
            self.session, "allowed:dial", dial, lambda address: self._choose(dial=address),
            "The dial that may be off",
        )  # fmt: skip
        box, refused = self.entries.number(
            "allowed:within", f"How near {in_sentence(readout.label)} has to stay",
            show_number(asked.within), self._near, low=0.0, unit=unit_text(readout.unit),
        )  # fmt: skip
        unit = node("span", "unit", text=unit_text(readout.unit)) if readout.unit else None
        near = f"for {in_sentence(brief_label(readout))} ±"
        return node(
            "div", "found asked", node("h3", text="How far may a dial be off?"),
            node("div", "controls", *pick, node("div", "group", node("span", text=near), box, unit),
                 progress(self.errand, lambda: self.follow(0.0), "Largest tolerance")),
            refused, node("p", "hint", text=self._words(asked, dial), role="status"),
        )  # fmt: skip

    def _words(self, asked: Question, dial: Dial) -> str:
        if self.answer is None or self.answer[0] != asked or self.errand.refusal:
            return "" if self.errand.refusal else "…"
        found, readout = self.answer[1], READOUTS[asked.readout]
        width = f"± {show_number(float(f'{found.half_width:.3g}'))} {unit_text(found.unit)}".rstrip()
        if found.unit == "%" and dial.value:
            own = show_number(float(f"{abs(dial.value) * found.half_width / 100:.2g}"))
            points = "points" if dial.unit == "%" else unit_text(dial.unit)
            width += f" (± {own} {points})".replace(" )", ")")
        ends = (format_value(found.nominal + side * asked.within, readout) for side in (-1, 1))
        near = f"{' to '.join(ends)} {unit_text(readout.unit)}".rstrip()
        now = format_value(found.nominal, readout)
        if not found.limited:
            return f"It stays within {near} (now {now}) with anything up to {width}."
        return f"{width} keeps it within {near} (now {now}), nothing else being off."

    def _near(self, within: float) -> str:
        if not within > 0:
            return "0 is no distance; allowed above 0"
        chosen = self.session.choices.get("allowed", {})
        self._choose(within={**chosen.get("within", {}), self.readout(): within})
        return ""

    def _choose(self, **parts: Any) -> None:
        self.session.choose(allowed={**self.session.choices.get("allowed", {}), **parts})

    def _usual(self, readout: Readout) -> float:
        """A twentieth of the value, in one figure, and not less than ten times its last digit."""
        if readout.key in USUAL_WITHIN:
            return USUAL_WITHIN[readout.key]
        point, least = self.session.point, 10.0 ** (1 - readout.digits)
        value = 0.0 if point is None else abs(float(point.readout(readout.key))) / 20
        return max(float(f"{value:.1g}"), least) if math.isfinite(value) else least
