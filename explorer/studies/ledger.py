"""Ledger: what each source, dose, solid and gas brings into a litre of finished water, or takes from it.

Every amount is per litre of *finished* water, so that the lines add up to what leaves the plant. Doses count
what the chemical's formula says; solids, gas and chlorine reactions are the stoichiometry that explains the
rest of a step's change. What no stoichiometry explains is the residual: rounding, or something is wrong.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from explorer.chemistry.components import COMPONENT
from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import Outcome
from explorer.scenario.model import ConcentrateStep, DoseStep, Scenario, SideStreamStep, Step
from explorer.scenario.outcome import BLEND
from explorer.scenario.stage import Stage
from explorer.studies.processes import NOTICEABLE, explained
from explorer.treatment.catalogue import SETTINGS
from explorer.treatment.chemicals import Chemical, totals_vector, with_setting
from explorer.treatment.units import default_unit, from_base, substance_units

CLOSED = 1e-9
"""Residual, relative to what came in and went out, up to which the ledger counts as closed."""

HARDNESS = "hardness"
HOURS = 24

SUM = "sum"
"""Kind of a line that says how much there is so far; it does not count in the total."""


@dataclass(frozen=True)
class Column:
    """One quantity of the ledger in its usual unit."""

    key: str
    label: str
    unit: str


@dataclass(frozen=True)
class Line:
    """What one thing adds (negative: takes) per litre of finished water, by column, in the columns' units.

    ``kind``: source, dose, solid, gas, reaction, water, or sum. ``stage``: where it happens. ``place``: the
    water, blend or side stream it belongs to.
    """

    kind: str
    stage: str
    place: str
    text: str
    amounts: np.ndarray


@dataclass(frozen=True)
class Ledger:
    """Lines in flow order; ``total``: their sum, ``finished``: what the plant's water holds, by column.

    ``residual``: finished less total, ``relative``: the same as a part of all that came and went. ``flow``:
    m³/h of finished water, nan where none is given.
    """

    columns: tuple[Column, ...]
    lines: tuple[Line, ...]
    total: np.ndarray
    finished: np.ndarray
    residual: np.ndarray
    relative: np.ndarray
    flow: float
    season: str

    @property
    def closed(self) -> bool:
        """Whether every column closes."""
        return bool(np.all(np.abs(self.relative) <= CLOSED))

    def loads(self, amounts: np.ndarray) -> np.ndarray:
        """kg a day for amounts of the columns (in their bases); nan where no flow is given."""
        return amounts * self.flow * HOURS / 1000

    def column(self, key: str) -> int:
        """Position of a column. Raises KeyError."""
        return {column.key: position for position, column in enumerate(self.columns)}[key]

    def to_dict(self) -> dict[str, Any]:
        """Plain data; kg_per_day is None where no flow is given."""

        def by_key(amounts: np.ndarray) -> dict[str, float]:
            return {column.key: float(value) for column, value in zip(self.columns, amounts, strict=True)}

        known = np.isfinite(self.flow)
        return {
            "season": self.season,
            "units": {column.key: column.unit for column in self.columns},
            "lines": [
                {
                    "kind": line.kind,
                    "stage": line.stage,
                    "place": line.place,
                    "text": line.text,
                    "amounts": by_key(line.amounts),
                    "kg_per_day": by_key(self.loads(line.amounts)) if known else None,
                }
                for line in self.lines
            ],
            "total": by_key(self.total),
            "finished": by_key(self.finished),
            "residual": by_key(self.residual),
            "relative": by_key(self.relative),
            "closed": self.closed,
        }

    def table(self, per_day: bool = False) -> list[list[Any]]:
        """Rows for a spreadsheet, the heading first; ``per_day``: amounts in kg a day."""
        units = [column.unit.replace("mg/L", "kg/d") if per_day else column.unit for column in self.columns]
        named = zip(self.columns, units, strict=True)
        heading = ["Where", "What", *(f"{column.label} [{unit}]" for column, unit in named)]
        lines = [(line.place, line.text, line.amounts) for line in self.lines]
        lines += [("", "Total of the lines", self.total), ("", "Finished water", self.finished)]
        lines.append(("", "Residual", self.residual))
        return [
            heading,
            *(
                [place, text, *(self.loads(part) if per_day else part).tolist()]
                for place, text, part in lines
            ),
        ]


def ledger(scenario: Scenario, outcome: Outcome) -> Ledger:
    """The ledger of an outcome of a single point of this scenario.

    Raises ScenarioError for an outcome of many points and for one without an answer.
    """
    if outcome.shape:
        raise ScenarioError("", "a ledger is of one water; allowed single dial values")
    finished = outcome.stage()
    if not np.isfinite(finished.totals).all():
        raise ScenarioError("", f"there is no ledger: {outcome.reasons()}")
    entries = list(_Walk(scenario, outcome).plant())
    counted = [entry for entry in entries if entry.kind != SUM]
    total = np.sum([entry.moles for entry in counted], axis=0)
    unexplained = np.abs(_moles(finished) - total) > NOTICEABLE
    used = np.any([entry.moles != 0 for entry in entries], axis=0) | unexplained
    columns = _columns(scenario, finished, used)

    def shown(moles: np.ndarray) -> np.ndarray:
        return np.array([_amount(column, moles, finished) for column in columns])

    turnover = shown(np.sum([np.abs(entry.moles) for entry in counted], axis=0))
    residual = shown(_moles(finished) - total)
    return Ledger(
        columns=columns,
        lines=tuple(Line(e.kind, e.stage, e.place, e.text, shown(e.moles)) for e in entries),
        total=shown(total),
        finished=shown(_moles(finished)),
        residual=residual,
        relative=residual / np.where(turnover > 0, turnover, 1.0),
        flow=float(finished.flow),
        season=outcome.season,
    )


def _columns(scenario: Scenario, stage: Stage, used: np.ndarray) -> tuple[Column, ...]:
    found = []
    for key, there in zip(stage.system.keys, used, strict=True):
        if there and key in COMPONENT:
            found.append(Column(key, COMPONENT[key].label, default_unit(key)))
        elif there:
            found.append(Column(key, next(a.name or a.id for a in scenario.acids if a.id == key), "mg/L"))
        if key == "magnesium" and used[[stage.system.index[ion] for ion in ("calcium", "magnesium")]].any():
            found.append(Column(HARDNESS, "Total hardness", default_unit(HARDNESS)))
    return tuple(found)


def _amount(column: Column, moles: np.ndarray, stage: Stage) -> float:
    row = stage.system.index
    if column.key == HARDNESS:
        return float(from_base(moles[row["calcium"]] + moles[row["magnesium"]], column.unit, HARDNESS))
    own = next((acid for acid in stage.system.acids if acid.id == column.key), None)
    quantity = column.key if own is None else substance_units(own.molar_mass)
    return float(from_base(moles[row[column.key]], column.unit, quantity))


# ---- the way through the plant -----------------------------------------------------------------------------


@dataclass(frozen=True)
class _Entry:
    """A line in moles: (n,) per litre of finished water."""

    kind: str
    stage: str
    place: str
    text: str
    moles: np.ndarray


class _Walk:
    """Goes through a plant against the flow for the weights, and lists what happens with the flow.

    The weight of a stage is how many litres of its water there are for a litre of finished water.
    """

    def __init__(self, scenario: Scenario, outcome: Outcome) -> None:
        self.scenario, self.outcome = scenario, outcome

    def plant(self) -> Iterator[_Entry]:
        """Every entry in flow order."""
        blend = self.outcome.stage(BLEND)
        weight, common = self._train(self.scenario.train, blend, 1.0, "", "Plant")
        met = np.zeros(len(blend.system.keys))
        for water in self.scenario.waters:
            part = float(self.outcome.parts.get(water.id, 0.0))
            if not part:
                continue
            raw, end = self.outcome.stage(water.id), self.outcome.ends[water.id]
            start, own = self._train(water.train, raw, weight * part, f"waters.{water.id}.", water.title)
            text = f"{water.title}, {100 * part:.4g} % of the blend"
            yield _Entry("source", raw.id, water.title, text, start * _moles(raw))
            yield from own
            reached = weight * part * _moles(end)
            if own:
                yield _Entry(SUM, end.id, water.title, f"{water.title} as it reaches the blend", reached)
            met += reached
        yield from self._explained(blend, "Blend", weight * _moles(blend) - met)
        yield _Entry(SUM, blend.id, "Blend", "Blend", weight * _moles(blend))
        yield from common

    def _train(
        self, train: Sequence[Step], first: Stage, weight: float, prefix: str, place: str
    ) -> tuple[float, list[_Entry]]:
        """Weight of the water before a train, and its entries, from the weight behind it."""
        running = [step for step in train if step.on]
        befores = [first, *(self.outcome.stage(step.id) for step in running)]
        entries: list[_Entry] = []
        for step, before in reversed(list(zip(running, befores, strict=False))):
            weight, own = self._step(step, before, weight, f"{prefix}train.{step.id}", place)
            entries = own + entries
        return weight, entries

    def _step(
        self, step: Step, before: Stage, weight: float, address: str, place: str
    ) -> tuple[float, list[_Entry]]:
        after, inputs = self.outcome.stage(step.id), self.outcome.inputs
        entries: list[_Entry] = []
        came = weight
        if isinstance(step, ConcentrateStep):
            cycles = float(inputs[f"{address}.cycles"])
            came = weight * cycles
            text = f"{after.name}: pure water leaves, {cycles:.4g} times as much of the rest"
            entries.append(_Entry("water", after.id, place, text, np.zeros_like(_moles(after))))
        elif isinstance(step, SideStreamStep):
            fraction = float(inputs[f"{address}.fraction"]) / 100
            aside, entries = self._train(step.train, before, weight * fraction, f"{address}.", after.name)
            came = weight * (1 - fraction) + aside
        elif isinstance(step, DoseStep):
            dose = self.outcome.dosing[step.id]
            text = f"{after.name}, {float(dose.value):.4g} {dose.unit}"
            added = totals_vector(self._product(step, address), after.system) * float(dose.moles)
            entries.append(_Entry("dose", after.id, place, text, weight * added))
        known = sum((entry.moles for entry in entries), came * _moles(before))
        return came, [*entries, *self._explained(after, place, weight * _moles(after) - known)]

    def _product(self, step: DoseStep, address: str) -> Chemical:
        """The chemical, with the basicity or ratio at which the outcome has it."""
        if step.chemical not in SETTINGS:
            return self.scenario.product(step)
        return with_setting(
            step.chemical, float(self.outcome.inputs[f"{address}.{SETTINGS[step.chemical].name}"])
        )

    @staticmethod
    def _explained(after: Stage, place: str, change: np.ndarray) -> Iterator[_Entry]:
        """Solids, gas and reactions behind a change, one entry each."""
        for process, words, part in explained(change, after.kind, after.system):
            yield _Entry(process.kind, after.id, place, f"{after.name}: {words.lower()}", part)


def _moles(stage: Stage) -> np.ndarray:
    return np.ravel(stage.totals)
