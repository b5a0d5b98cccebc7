"""What may be off, and where the dials stand when it is.

An *input* is one independent cause of error with one random number: a dial with a tolerance, or several dials
that are off together. What one error does follows from what it is:

* A tolerance of a **dose** is that of its pump. A dose or another dial that is held has none: its controller
  makes up for it, as far as its meter is right (the tolerance of the held value).
* A tolerance of a product **strength** is one error for the tank: the pumps run as set, so every fixed dose
  of that product, wherever it is added, is off in proportion. Steps with the same chemical and strength draw
  from one tank, unless they have tolerances with different words under ``shared``.
* A tolerance of a **flow** is that of its meter. The true flow moves the blend, and every fixed dose that is
  paced on that flow is off in the opposite direction: a dose into a source water on the flow of that water,
  one after blending, or any where only the total is measured, on the total.
* A tolerance of a **share** or a **fraction** is a split that is off while the pacing follows it: the blend
  moves, the doses per litre do not.
* Tolerances with the same word under ``shared`` are off together and in the same direction, each by its own
  width.

Values that a dial cannot take stay at its limit.
"""

from collections import Counter
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import ndtri

from explorer.scenario import shares
from explorer.scenario.compile import Plan, Source, compiled
from explorer.scenario.model import Scenario, Tolerance
from explorer.scenario.operations import DoseOperation, Operation, SideStreamOperation
from explorer.treatment.chemicals import PRODUCT, Chemical
from explorer.treatment.units import to_base

Dials = Mapping[str, np.ndarray]

DEVIATIONS = 2.0
"""Standard deviations that the stated width of a normal error stands for: the coverage factor of an expanded
uncertainty (JCGM 100:2008, 6.2 and 6.3)."""

NOTHING_OFF = "nothing may be off; allowed a tolerance for one dial or more"
"""Message where a study of tolerances finds none."""

_OPEN = 1e-9
"""Random numbers are kept this far from 0 and 1, where a normal error would be infinite."""


@dataclass(frozen=True)
class Move:
    """How far one dial may be off, ``minus`` downwards and ``plus`` upwards: in its unit, or with
    ``relative`` as parts of its value."""

    address: str
    minus: float
    plus: float
    relative: bool = False
    normal: bool = False

    def value(self, nominal: ArrayLike, place: np.ndarray) -> np.ndarray:
        """Value of the dial when it is off by ``place`` widths: −1 and 1 are the stated ends."""
        width = np.where(place < 0, self.minus, self.plus)
        return nominal + place * width * (np.abs(nominal) if self.relative else 1.0)

    def place(self, part: np.ndarray) -> np.ndarray:
        """Place of the quantile ``part`` (0 to 1) of the error.

        Both sides have the density of their common peak, so their chances are as their widths.
        """
        both = self.minus + self.plus
        below = self.minus / both if both else 0.5
        part = np.clip(part, _OPEN, 1 - _OPEN)
        down = part < below
        # How far out on its side, 0 at the nominal value and 1 at the end.
        out = np.where(down, 1 - part / (below or 1.0), (part - below) / ((1 - below) or 1.0))
        out = ndtri(0.5 + 0.5 * out) / DEVIATIONS if self.normal else out
        return np.where(down, -out, out)


@dataclass(frozen=True)
class Input:
    """One independent cause of error: ``moves`` says which dials it moves. Names and labels are each its
    own: the name is an address or the word of a shared error."""

    name: str
    label: str
    moves: tuple[Move, ...]


@dataclass(frozen=True)
class Pump:
    """A fixed dose: its step's address, what it doses at which usual strength (nan: not known), and the
    source water on whose flow it is paced ("" for the blend). ``by_product``: the dose is given as product,
    so that what it adds follows the strength by itself."""

    address: str
    chemical: Chemical
    usual: float
    source: str
    by_product: bool

    def shares_tank(self, other: "Pump") -> bool:
        """Whether both draw the same product."""
        return (self.chemical.key, self.usual) == (other.chemical.key, other.usual)

    @property
    def dose(self) -> str:
        """Address of the dose."""
        return f"{self.address}.dose"

    @property
    def strength(self) -> str:
        """Address of the strength; a product of unknown strength has no such dial."""
        return f"{self.address}.strength"


class Spread:
    """A compiled scenario and what may be off in it. ``len()`` is the number of inputs."""

    def __init__(self, plan: Plan, inputs: Sequence[Input], pumps: Sequence[Pump] = ()) -> None:
        self.plan, self.inputs, self.pumps = plan, tuple(inputs), tuple(pumps)
        self.moved = {move.address for input in self.inputs for move in input.moves}

    def __len__(self) -> int:
        return len(self.inputs)

    def sampled(self, parts: np.ndarray, around: Dials, scale: np.ndarray | None = None) -> Dials:
        """Dials at quantiles ``parts`` (inputs, *S) of the errors. ``around``: dials that are swept or set,
        which broadcast with S. ``scale``: factors on the errors (inputs, *S) where these are not whole."""
        factors = np.ones(len(self)) if scale is None else scale
        return self._turned(lambda row, move: factors[row] * move.place(parts[row]), around)

    def placed(self, places: np.ndarray, around: Dials) -> Dials:
        """Dials with every input off by its place (inputs, *S), −1 and 1 being the ends; 0 is not off."""
        return self._turned(lambda row, move: places[row], around)

    def follows(self, address: str) -> list[str]:
        """Labels of the other dials that are off when that at an address is: dials that share its error, and
        the fixed doses that follow a strength or a flow."""
        moved = next(
            (input.moves for input in self.inputs if address in (m.address for m in input.moves)), ()
        )
        addresses = {move.address for move in moved}
        every = self.plan.dials
        labels = [every[other].label for other in every if other in addresses and other != address]
        for pump in self.pumps:
            by_strength = pump.strength in addresses and not pump.by_product
            own = f"waters.{pump.source}.flow" if pump.source else ""
            by_flow = "flow" in addresses or any(
                is_flow(moved) and (not own or moved == own) for moved in addresses
            )
            if by_strength or by_flow:
                labels.append(every[pump.dose].label)
        return list(dict.fromkeys(labels))

    def _turned(self, place: Callable[[int, Move], np.ndarray], around: Dials) -> Dials:
        turned = dict(around)
        split, possible = self._split(around)
        for row, input in enumerate(self.inputs):
            for move in input.moves:
                dial = self.plan.dials[move.address]
                nominal = split.get(move.address, around.get(move.address, dial.value))
                value = move.value(nominal, place(row, move))
                low = np.minimum(dial.low if dial.bounded else -np.inf, nominal)
                high = np.maximum(np.inf if dial.high is None else dial.high, nominal)
                turned[move.address] = np.clip(value, low, high)
        self._mend_shares(turned, split, possible)
        self._move_doses(turned, around)
        return turned

    def _split(self, around: Dials) -> tuple[Dials, np.ndarray]:
        """Shares of the blend before anything is off, by address, and where they are possible."""
        usual = {
            f"{source.address}.share": self.plan.dials[f"{source.address}.share"].value
            for source in self.plan.sources
            if f"{source.address}.share" in self.plan.dials
        }
        if not usual:
            return {}, np.array(True)
        balance = None if self.plan.balance is None else f"waters.{self.plan.balance}.share"
        given = {address: around[address] for address in usual if address in around}
        return shares.settle(usual, given, balance)

    def _mend_shares(self, turned: dict[str, np.ndarray], split: Dials, possible: np.ndarray) -> None:
        """Bring shares that were turned to a whole where nothing is left to take up their change."""
        if not self.moved & split.keys():
            return
        given = [address for address in split if address in turned]
        total = sum(turned[address] for address in given)
        mended = possible & ((total > shares.WHOLE) | ((len(given) == len(split)) & (total > 0)))
        factor = np.where(mended, shares.WHOLE / np.where(mended, total, 1.0), 1.0)
        for address in given:
            turned[address] = turned[address] * factor

    def _move_doses(self, turned: dict[str, np.ndarray], around: Dials) -> None:
        """Let the fixed doses follow the strengths and flows that are off."""
        paced = self._pacing(turned, around) if any(map(is_flow, self.moved)) else {}
        for pump in self.pumps:
            factors = [paced[pump.source]] if pump.source in paced else []
            if pump.strength in self.moved and not pump.by_product:
                factors.append(turned[pump.strength] / self._nominal(pump.strength, around))
            for factor in factors:
                turned[pump.dose] = turned.get(pump.dose, self._nominal(pump.dose, around)) * factor

    def _pacing(self, turned: Dials, around: Dials) -> dict[str, ArrayLike]:
        """Measured over true flow, by source water and "" for the blend."""
        running = [source for source in self.plan.sources if source.on]
        if not running[0].flow_unit:
            factor = _ratio(self._nominal("flow", around), turned["flow"])
            return {"": factor} | {source.id: factor for source in running}
        measured, true = (
            {
                source.id: to_base(
                    values.get(address, self._nominal(address, around)), source.flow_unit, "flow"
                )
                for source in running
                for address in [f"{source.address}.flow"]
            }
            for values in (around, turned)
        )
        return {"": _ratio(sum(measured.values()), sum(true.values()))} | {
            source: _ratio(measured[source], true[source]) for source in measured
        }

    def _nominal(self, address: str, around: Dials) -> ArrayLike:
        return around.get(address, self.plan.dials[address].value)


def _ratio(measured: ArrayLike, true: ArrayLike) -> np.ndarray:
    """Measured over true flow; 1 where nothing flows."""
    flowing = np.asarray(true, float) > 0
    return np.where(flowing, measured / np.where(flowing, true, 1.0), 1.0)


def is_flow(address: str) -> bool:
    """Whether a dial is a flow."""
    return address == "flow" or address.endswith(".flow")


# ---- from the scenario -------------------------------------------------------------------------------------


def spread_of(scenario: Scenario, season: str | None = None) -> Spread:
    """What may be off in a scenario: its tolerances, and the ± beside values of analyses that have no
    tolerance of their own. Waters and steps out of service count for nothing.

    Raises ScenarioError for an unknown season.
    """
    plan = compiled(scenario, season)
    pumps, live = _in_service(plan)
    entered = _beside_values(plan) | scenario.tolerances
    widths = {
        address: tolerance
        for address, tolerance in entered.items()
        if address in plan.dials and address.startswith(live) and any(tolerance.sides)
    }
    for goal in plan.holds:
        widths.pop(goal.address, None)
    return Spread(plan, _inputs(plan, widths, pumps), pumps)


def _inputs(plan: Plan, widths: Mapping[str, Tolerance], pumps: Sequence[Pump]) -> list[Input]:
    tanks = {pump.strength: pump for pump in pumps if pump.strength in plan.dials}
    moves: dict[str, list[Move]] = {}
    labels: dict[str, str] = {}
    waiting = tanks.keys() - widths.keys()
    for address, tolerance in widths.items():
        name, label = address, plan.dials[address].label
        together = [address]
        if address in tanks:
            product = [other for other in tanks if tanks[other].shares_tank(tanks[address])]
            if len(product) > 1:
                name, label = f"tank of {product[0]}", f"Strength of {tanks[address].chemical.name}, one tank"
            together += [other for other in product if other in waiting]
            waiting -= set(together)
        if tolerance.shared:
            name = label = tolerance.shared
        moves.setdefault(name, []).extend(_move(moved, tolerance) for moved in together)
        labels.setdefault(name, label)
    counts = Counter(labels.values())
    return [
        Input(name, label if counts[label] == 1 else f"{label} ({name})", tuple(moves[name]))
        for name, label in labels.items()
    ]


def _move(address: str, tolerance: Tolerance) -> Move:
    relative = tolerance.unit == "%"
    minus, plus = (side * (0.01 if relative else 1.0) for side in tolerance.sides)
    return Move(address, minus, plus, relative, tolerance.distribution == "normal")


def _beside_values(plan: Plan) -> dict[str, Tolerance]:
    """Tolerances of analysis values that carry a ± themselves."""
    return {
        f"{source.address}.analysis.{key}": Tolerance(plus_minus=entry.plus_minus)
        for source in plan.sources
        for key, entry in source.entries
        if entry.plus_minus
    }


def _in_service(plan: Plan) -> tuple[list[Pump], tuple[str, ...]]:
    """Fixed doses, and the starts of the addresses of everything that is in service."""
    pumps: list[Pump] = []
    live = ["flow"]
    held = {goal.address for goal in plan.holds}

    def follow(train: Sequence[Operation], source: str) -> None:
        for operation in train:
            live.append(f"{operation.address}.")
            if isinstance(operation, SideStreamOperation):
                follow(operation.train, source)
            fixed = isinstance(operation, DoseOperation) and operation.held is None
            if fixed and f"{operation.address}.dose" not in held:
                strength = plan.dials.get(f"{operation.address}.strength")
                usual = np.nan if strength is None else strength.value
                by_product = operation.unit == PRODUCT
                pumps.append(Pump(operation.address, operation.chemical, usual, source, by_product))

    def enter(source: Source) -> None:
        live.extend(f"{source.address}.{part}" for part in ("share", "flow", "analysis."))
        follow(source.train, source.id)

    for source in plan.sources:
        if source.on:
            enter(source)
    follow(plan.train, "")
    return pumps, tuple(live)
