"""Points measured on the bench or in the plant, kept beside the scenario they are compared with."""

from typing import Any

from explorer.scenario.entity import REQUIRED, Child, Entity
from explorer.scenario.fields import (
    NOTE_LENGTH,
    TITLE_LENGTH,
    Faults,
    Field,
    Text,
    Value,
    list_fault,
    number_fault,
)
from explorer.scenario.quantity import UNIT_LENGTH

MOST_POINTS = 2000


class Pairs(Value):
    """A list of pairs of numbers."""

    __slots__ = []
    fault = Field.fault

    @property
    def allowed(self) -> str:
        return f"a list of 1 to {MOST_POINTS} pairs of numbers"

    def faults(self, value: Any) -> Faults:
        if fault := list_fault(value, 1, MOST_POINTS, self.allowed):
            yield "", fault
            return
        for position, pair in enumerate(value):
            if fault := list_fault(pair, 2, 2, "two numbers"):
                yield f"[{position}]", fault
                continue
            for place, number in enumerate(pair):
                if fault := number_fault(number, "any number"):
                    yield f"[{position}][{place}]", fault

    def duplicate(self, value: list[list[float]]) -> list[list[float]]:
        return [list(pair) for pair in value]


class TitrationAxis(Entity):
    """What the first figure of a measured titration point is: a dose, negative for the opposite chemical."""

    chemical = Text(None, required=True, label="Chemical", doc="Added where the dose is positive.")
    opposite = Text(None, label="Opposite", doc="Added where the dose is negative.")
    unit = Text(None, required=True, limit=UNIT_LENGTH, label="Unit", doc="Of the chemical, or meq/L.")


class MeasuredPoints(Entity):
    """A set of measured points: a readout at a stage against a dial, or against the dose of a titration."""

    named = REQUIRED

    dial = Text(None, limit=TITLE_LENGTH, label="Dial", doc="Address of the dial that was turned.")
    titration = Child(None, item=TitrationAxis, label="Titration", doc="What was added, instead of a dial.")
    readout = Text(None, required=True, label="Readout", doc="Readout that was measured.")
    stage = Text("finished", label="Stage", doc="Where: id of a water or step, blend, or finished.")
    points = Pairs(None, required=True, label="Points", doc="Dial or dose, and what was measured.")
    note = Text("", limit=NOTE_LENGTH, lines=True, label="Note", doc="When, by whom, with which instrument.")
