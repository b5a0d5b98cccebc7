"""Source waters and their analyses."""

from typing import Any, Self

from explorer.scenario.entity import OPTIONAL, Children, Entity, Table
from explorer.scenario.errors import ScenarioError, join, shown
from explorer.scenario.fields import (
    MOST_NAMED,
    NOTE_LENGTH,
    TITLE_LENGTH,
    Choice,
    Flag,
    Id,
    Number,
    Text,
    Value,
    check_keys,
    object_fault,
    text_fault,
)
from explorer.scenario.measured import read_measured, write_measured
from explorer.scenario.quantity import Amount, ordered
from explorer.scenario.steps import Step
from explorer.treatment.analysis import Measured

PROVENANCE_KEYS = ("lab", "sampled", "file", "by", "note")
"""Laboratory; date or period of sampling; report or file; who entered the figures; anything else."""


class _Entries(Value):
    """Measured entries by analysis key or id of a user's acid."""

    __slots__ = []

    @property
    def allowed(self) -> str:
        return "measured entries by analysis key"

    def fault(self, value: Any) -> str:
        measured = isinstance(value, dict) and all(isinstance(entry, Measured) for entry in value.values())
        return "" if measured else f"{shown(value)} is something else; allowed {self.allowed}"


class _Provenance(Value):
    """Texts under the PROVENANCE_KEYS."""

    __slots__ = []

    @property
    def allowed(self) -> str:
        return f"an object with the texts {', '.join(PROVENANCE_KEYS)}"

    def fault(self, value: Any) -> str:
        return object_fault(value)

    def read(self, raw: Any, path: str) -> dict[str, str]:
        provenance: dict[str, str] = super().read(raw, path)
        check_keys(provenance, PROVENANCE_KEYS, path)
        for key, text in provenance.items():
            limit = NOTE_LENGTH if key == "note" else TITLE_LENGTH
            if fault := text_fault(text, limit, lines=key == "note"):
                raise ScenarioError(join(path, key), fault)
        return provenance


class Analysis(Entity):
    """What is known of a water in one season.

    In the file the entries stand beside ``close_with`` and ``provenance`` in one object.
    """

    entries = _Entries({}, label="Entries", doc="Measured values by analysis key.")
    close_with = Choice(
        "none",
        choices=("none", "sodium", "chloride"),
        what="an ion that may be adjusted",
        label="Close the ion balance with",
        doc="Conservative ion adjusted until the charges balance; logged. pH and alkalinity never are.",
    )
    provenance = _Provenance({}, label="Provenance", doc="Laboratory, date of sampling, file.")

    def __init__(self, **values: Any) -> None:
        self._entry_parts: dict[str, tuple[str, ...]] = {}
        super().__init__(**values)

    @classmethod
    def from_dict(cls, raw: Any, path: str = "") -> Self:
        if fault := object_fault(raw):
            raise ScenarioError(path, fault)
        own = cls.fields().keys() - {"entries"}
        analysis = super().from_dict({key: part for key, part in raw.items() if key in own}, path)
        given = {key: part for key, part in raw.items() if key not in own}
        if fault := object_fault(given, MOST_NAMED):
            raise ScenarioError(path, fault)
        analysis.entries = {key: read_measured(key, part, join(path, key)) for key, part in given.items()}
        analysis._entry_parts = {key: tuple(part) for key, part in given.items()}
        analysis._written = tuple(raw)
        return analysis

    def to_dict(self) -> dict[str, Any]:
        parts = super().to_dict()
        parts.pop("entries", None)
        entries = {
            key: write_measured(measured, self._entry_parts.get(key, ()))
            for key, measured in self.entries.items()
        }
        return ordered(entries | parts, self._written)

    def copy(self) -> Self:
        twin = super().copy()
        twin._entry_parts = dict(self._entry_parts)
        return twin


class Water(Entity):
    """A source water: its part in the blend, an analysis for every season, and its own train."""

    id = Id(None, required=True, label="Id", doc="Handle used in addresses.")
    named = OPTIONAL
    share = Number(
        None,
        unit="%",
        bounds=(0, 100),
        step=1,
        label="Share",
        doc="Part of the blended flow; shares add to 100.",
    )
    flow = Amount(
        None,
        quantity="flow",
        label="Flow",
        doc="Flow of this water, where flows are given instead of shares.",
    )
    on = Flag(True, label="In service", doc="A water out of service keeps its settings but does not flow.")
    note = Text("", limit=NOTE_LENGTH, lines=True, label="Note", doc="Anything worth knowing of this water.")
    analyses = Table(
        {}, item=Analysis, most=12, required=True, label="Analyses", doc="One analysis for every season."
    )
    train = Children([], item=Step, label="Train", doc="Steps before blending, in flow order.")

    @property
    def title(self) -> str:
        """Name, or the id where there is none."""
        return self.name or self.id
