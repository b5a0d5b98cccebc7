"""Treatment steps as plain operations on streams: what the steps of a scenario become for an evaluation.

An operation knows its address; the values it works with are looked up there, so that any of them may be an
array. It holds no Param object and keeps no state.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Protocol

import numpy as np

from explorer.scenario.holds import held_dose
from explorer.scenario.readouts import Readout
from explorer.scenario.stage import Stage
from explorer.treatment.chemicals import (
    Chemical,
    dose_in,
    dose_moles,
    product_dose,
    pump_rate,
    totals_vector,
)
from explorer.treatment.notes import Note
from explorer.treatment.steps import air, concentrate, limestone, settle
from explorer.treatment.stream import Stream, blend, dose, set_temperature, split
from explorer.treatment.units import to_base

HOURS = 24
"""A day."""

MIXES_WITH = {"basicity": lambda value: value, "ratio": lambda value: 1 / value}
"""In what a product setting is linear: a product between two settings is a mixture of the two."""


@dataclass(frozen=True)
class Dose:
    """What a dose step adds: ``value`` in ``unit``, ``moles`` in mol/L, into ``flow`` [m³/h].

    ``held``: computed to meet a hold, ``met`` where it does. ``product``: mg/L of product at ``strength``,
    nan where that is not known. ``price``: per kg of product, nan where none is entered.
    """

    chemical: Chemical
    value: np.ndarray
    unit: str
    moles: np.ndarray
    flow: np.ndarray
    product: np.ndarray
    strength: np.ndarray | None
    price: np.ndarray
    held: bool
    met: np.ndarray

    @property
    def active_use(self) -> np.ndarray:
        """kg a day of the pure substance; nan where no flow is given."""
        return self.moles * self.chemical.molar_mass * self.flow * HOURS

    @property
    def product_use(self) -> np.ndarray:
        """kg a day of product; nan where flow or strength are not known."""
        return self.product * self.flow * HOURS / 1000

    @property
    def pump_rate(self) -> np.ndarray:
        """L/h of product; nan for products that are dry."""
        return pump_rate(self.chemical, self.moles, self.flow, self.strength)

    @property
    def cost_per_day(self) -> np.ndarray:
        """In the currency of the price; nan where no price is entered."""
        return self.product_use * self.price


@dataclass
class Run:
    """What an evaluation gathers on its way through the plant. ``inputs``: all dial values by address."""

    inputs: Mapping[str, np.ndarray]
    stages: list[Stage] = field(default_factory=list)
    doses: dict[str, Dose] = field(default_factory=dict)
    notes: list[Note] = field(default_factory=list)

    def follow(self, train: "tuple[Operation, ...]", stage: Stage) -> Stage:
        """The water after a train; every step leaves a stage."""
        for operation in train:
            stage = operation.run(stage, self)
            self.stages.append(stage)
        return stage


class Operation(Protocol):
    """One step in service."""

    def run(self, before: Stage, run: Run) -> Stage:
        """The stage after the step."""
        ...


@dataclass(frozen=True)
class _Operation:
    """``address``: of the step, ``train.caustic``; its values stand below."""

    id: str
    name: str
    address: str

    def after(self, before: Stage, stream: Stream, kind: str) -> Stage:
        """Stage of a step that costs nothing."""
        return Stage(self.id, self.name, kind, stream, before.cost)


@dataclass(frozen=True)
class DoseOperation(_Operation):
    """A chemical dosed in ``unit``; ``held`` is the readout that the dose has to bring to a value.

    ``setting``: name of a product setting (basicity, ratio), with the product at two values of it.
    """

    chemical: Chemical
    unit: str
    held: Readout | None = None
    setting: str = ""
    ends: tuple[tuple[float, Chemical], ...] = ()

    def run(self, before: Stage, run: Run) -> Stage:
        strength, price = (run.inputs.get(f"{self.address}.{name}") for name in ("strength", "price"))
        parts = self._parts(before.stream, run)

        def add(stream: Stream, moles: np.ndarray) -> Stream:
            for vector, part in parts:
                stream = dose(stream, vector, moles * part)
            return stream

        if self.held is None:
            value, met = run.inputs[f"{self.address}.dose"], np.array(True)
            moles = dose_moles(self.chemical, value, self.unit, strength)
        else:
            goal, ceiling = (run.inputs[f"{self.address}.hold.{name}"] for name in ("value", "ceiling"))
            answer = held_dose(
                before.stream, add, self.held, goal, dose_moles(self.chemical, ceiling, self.unit, strength)
            )
            moles, met = answer.moles, answer.met
            value = dose_in(self.chemical, moles, self.unit, strength)
            run.notes += [Note("caution", self.address, text) for text in answer.words]
        product = product_dose(self.chemical, moles, strength)
        price = np.asarray(np.nan if price is None else price, float)
        if np.any(np.isfinite(price) & np.isnan(product) & np.isfinite(moles)):
            text = "a price is entered but no product strength: the cost is not counted"
            run.notes.append(Note("caution", self.address, text))
        run.doses[self.id] = Dose(
            self.chemical, np.asarray(value, float), self.unit, moles, before.flow, product, strength, price,
            self.held is not None, met,
        )  # fmt: skip
        # A mg/L of product is a kg per ML of water.
        return Stage(
            self.id, self.name, "dose", add(before.stream, moles), added(before.cost, product * price)
        )

    def _parts(self, stream: Stream, run: Run) -> list[tuple[np.ndarray, np.ndarray | float]]:
        """What a mole adds, and how much of the dose is that: two parts for a product with a setting."""
        if not self.setting:
            return [(totals_vector(self.chemical, stream.system), 1.0)]
        scale = MIXES_WITH[self.setting]
        (low, first), (high, last) = ((scale(value), chemical) for value, chemical in self.ends)
        part = (scale(run.inputs[f"{self.address}.{self.setting}"]) - low) / (high - low)
        return [(totals_vector(first, stream.system), 1 - part), (totals_vector(last, stream.system), part)]


@dataclass(frozen=True)
class TemperatureOperation(_Operation):
    """The water warmed or cooled to a temperature given in ``unit``."""

    unit: str

    def run(self, before: Stage, run: Run) -> Stage:
        celsius = to_base(run.inputs[f"{self.address}.temperature"], self.unit, "temperature")
        return self.after(before, set_temperature(before.stream, celsius), "temperature")


@dataclass(frozen=True)
class SideStreamOperation(_Operation):
    """Part of the flow through a train of its own, and back."""

    train: tuple[Operation, ...]

    def run(self, before: Stage, run: Run) -> Stage:
        fraction = run.inputs[f"{self.address}.fraction"] / 100
        aside, past = split(before.stream, fraction)
        treated = run.follow(self.train, Stage(self.id, self.name, "aside", aside, before.cost))
        joined = blend([treated.stream, past], [fraction, 1 - fraction])
        cost = added(treated.cost * fraction, before.cost * (1 - fraction))
        return Stage(self.id, self.name, "side_stream", joined, cost)


@dataclass(frozen=True)
class AirOperation(_Operation):
    """Carbon dioxide exchanged with air: part of the way, or to a stated content."""

    def run(self, before: Stage, run: Run) -> Stage:
        approach, co2 = (run.inputs.get(f"{self.address}.{name}") for name in ("approach", "co2"))
        after = air(
            before.stream,
            approach=approach,
            co2=None if co2 is None else to_base(co2, "mg/L", "co2"),
            co2_ppm=run.inputs[f"{self.address}.co2_ppm"],
            altitude=run.inputs[f"{self.address}.altitude"],
        )
        return self.after(before, after, "air")


@dataclass(frozen=True)
class LimestoneOperation(_Operation):
    """A bed of calcium carbonate on the way to saturation."""

    solid: str

    def run(self, before: Stage, run: Run) -> Stage:
        after = limestone(before.stream, run.inputs[f"{self.address}.approach"], self.solid)
        return self.after(before, after, "limestone")


@dataclass(frozen=True)
class SettleOperation(_Operation):
    """Solids leave; ``full``: all that can precipitate does so first."""

    full: bool
    solids: tuple[str, ...]

    def run(self, before: Stage, run: Run) -> Stage:
        residual = np.array(0.0) if self.full else run.inputs.get(f"{self.address}.residual")
        if residual is not None:
            residual = to_base(residual, "mg/L as CaCO3", "ccpp")
        return self.after(before, settle(before.stream, residual, self.solids), "settle")


@dataclass(frozen=True)
class ConcentrateOperation(_Operation):
    """Pure water leaves."""

    def run(self, before: Stage, run: Run) -> Stage:
        cycles = run.inputs[f"{self.address}.cycles"]
        return Stage(
            self.id, self.name, "concentrate", concentrate(before.stream, cycles), before.cost * cycles
        )


def added(*costs: np.ndarray) -> np.ndarray:
    """Sum of costs of which nan means "none entered"; nan only where none is."""
    total = sum(np.nan_to_num(cost, nan=0.0) for cost in costs)
    entered = np.any(np.broadcast_arrays(*(np.isfinite(cost) for cost in costs)), axis=0)
    return np.where(entered, total, np.nan)
