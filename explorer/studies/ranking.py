"""Which tolerance matters, which measurement pays, and how wide a tolerance may be."""

from collections.abc import Mapping, Sequence
from dataclasses import asdict, dataclass
from itertools import product
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from explorer.scenario.compile import Plan, compiled
from explorer.scenario.dials import Dial, no_dial
from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.evaluate import follow
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import READOUTS
from explorer.studies.progress import UNWATCHED, Watch
from explorer.studies.spread import NOTHING_OFF, Input, spread_of
from explorer.studies.sweep import headed
from explorer.studies.tolerance import USUAL_SEED, chances

SAMPLES, ALONE = 4096, 129
"""Samples of all inputs together, and values of one input alone."""

WIDTH = (2.5, 97.5)
"""Percentiles between which the width of a spread is taken."""

MOST_DIALS = 6
"""Dials whose common tolerance can be looked for: all their corners are calculated."""

SCAN, PASSES = 65, 4
"""Tolerances tried in one pass, and passes, each between the two neighbours that the one before left."""


@dataclass(frozen=True)
class Rank:
    """What one input does to the spread of a readout, in its unit: ``alone``, the width of the spread when
    nothing else is off; ``removed``, by how much the whole spread narrows when this tolerance is halved."""

    input: Input
    alone: float
    removed: float


@dataclass(frozen=True)
class Ranking:
    """``width``: from the 2.5 to the 97.5 percentile of the readout with everything off; ``ranks``: the input
    whose better knowledge pays most comes first."""

    readout: str
    width: float
    ranks: tuple[Rank, ...]

    def to_dict(self) -> dict[str, Any]:
        """Plain numbers by name, in the order of the ranks."""
        inputs = [
            {"name": r.input.name, "label": r.input.label, "alone": r.alone, "removed": r.removed}
            for r in self.ranks
        ]
        return {"readout": self.readout, "width": self.width, "inputs": inputs}

    def table(self) -> list[list[Any]]:
        """Rows for a spreadsheet, the heading first, in the order of the ranks."""
        unit = READOUTS[self.readout].unit
        heading = ["What may be off", headed("Width it adds alone", unit), headed("Removed by halving", unit)]
        return [heading, *([rank.input.label, rank.alone, rank.removed] for rank in self.ranks)]


def ranking(
    scenario: Scenario,
    readout: str,
    season: str | None = None,
    overrides: Mapping[str, ArrayLike] = MappingProxyType({}),
    seed: int = USUAL_SEED,
    watch: Watch = UNWATCHED,
) -> Ranking:
    """Inputs at the operating point by what their tolerances do to a readout of the finished water.

    With and without the halving the same random numbers are used, so that differences far smaller than the
    noise of either can be told. Raises ScenarioError for what cannot be asked, Stopped when asked to.
    """
    if readout not in READOUTS:
        raise ScenarioError("readout", unknown(readout, "a readout", READOUTS))
    spread = spread_of(scenario, season)
    if not len(spread):
        raise ScenarioError("tolerances", NOTHING_OFF)
    around = {address: np.asarray(value, float) for address, value in overrides.items()}
    inputs = len(spread)

    def widths(parts: np.ndarray, scale: np.ndarray) -> np.ndarray:
        outcome = follow(spread.plan, spread.sampled(parts, around, scale))
        values = np.broadcast_to(outcome.readout(readout), np.broadcast_shapes(parts.shape, scale.shape)[1:])
        if np.isnan(values).all(axis=-1).any():
            raise ScenarioError("", "there is no answer at this operating point; allowed where there is one")
        low, high = np.nanpercentile(values, WIDTH, axis=-1, method="hazen")
        return high - low

    watch.done(0.0)
    evenly = np.broadcast_to((np.arange(ALONE) + 0.5) / ALONE, (inputs, 1, ALONE))
    alone = widths(evenly, np.eye(inputs)[:, :, None])
    parts = chances(inputs, SAMPLES, seed)[:, None, :]
    whole = widths(parts, np.ones((inputs, 1, 1)))[0]
    halved = np.empty(inputs)
    for row in range(inputs):
        watch.done((row + 1) / (inputs + 1))
        scale = np.ones((inputs, 1, 1))
        scale[row] = 0.5
        halved[row] = widths(parts, scale)[0]
    ranks = [
        Rank(part, float(width), float(whole - half))
        for part, width, half in zip(spread.inputs, alone, halved, strict=True)
    ]
    ranks.sort(key=lambda rank: (rank.removed, rank.alone), reverse=True)
    watch.done(1.0)
    return Ranking(readout, float(whole), tuple(ranks))


# ---- how wide a tolerance may be ---------------------------------------------------------------------------


@dataclass(frozen=True)
class Allowed:
    """Largest tolerance, the same up and down, that keeps a readout near enough.

    ``half_width``: in ``unit`` ("%" of the value, or the unit of the dial). ``nominal``: the readout with
    nothing off. ``at``: the dials at the first place where it would go beyond. ``limited``: False where no
    tolerance that was tried goes beyond; ``half_width`` is then the largest one tried.
    """

    half_width: float
    unit: str
    nominal: float
    at: Mapping[str, float]
    limited: bool

    def to_dict(self) -> dict[str, Any]:
        """Plain values by name."""
        return asdict(self)


def allowed_tolerance(
    scenario: Scenario,
    addresses: Sequence[str],
    readout: str,
    within: float,
    season: str | None = None,
    overrides: Mapping[str, ArrayLike] = MappingProxyType({}),
    most: float = 100.0,
) -> Allowed:
    """Largest tolerance of one dial, or of several in all combinations, that keeps a readout within ±
    ``within`` of its nominal value, nothing else being off.

    A single dial at zero, a temperature and a pH have their tolerance in the unit of the dial, everything
    else in percent; ``most`` is the largest tolerance tried, in the same unit. A place without an answer is
    beyond.

    Raises ScenarioError for what cannot be asked.
    """
    if readout not in READOUTS:
        raise ScenarioError("readout", unknown(readout, "a readout", READOUTS))
    if not within > 0:
        raise ScenarioError("within", f"{within:g} is no distance; allowed above 0")
    if not 1 <= len(addresses) <= MOST_DIALS:
        raise ScenarioError("dials", f"{len(addresses)} dials cannot be asked for; allowed 1 to {MOST_DIALS}")
    plan = compiled(scenario, season)
    for address in addresses:
        if address not in plan.dials:
            raise ScenarioError("dials", no_dial(address, plan.dials))
        if any(goal.address == address for goal in plan.holds):
            raise ScenarioError(
                "dials", f"{address} is held: its controller makes up for errors; allowed dials that are not"
            )
    turned = [plan.dials[address] for address in addresses]
    around = {address: np.asarray(value, float) for address, value in overrides.items()}
    nominal = float(follow(plan, around).readout(readout))
    if not np.isfinite(nominal):
        raise ScenarioError("", "there is no answer at this operating point; allowed where there is one")
    absolute = len(turned) == 1 and _is_absolute(turned[0], around)
    low, high = 0.0, most
    place: dict[str, float] = {}
    for _ in range(PASSES):
        tried = np.linspace(low, high, SCAN)
        beyond, dials = _beyond(plan, turned, around, tried, absolute, readout, nominal, within)
        first = int(np.argmax(beyond.any(axis=0)))
        if not beyond.any():
            return Allowed(high, turned[0].unit if absolute else "%", nominal, {}, False)
        corner = int(np.argmax(beyond[:, first]))
        place = {address: float(values[corner, first]) for address, values in dials.items()}
        low, high = tried[max(first - 1, 0)], tried[first]
    return Allowed(float(low), turned[0].unit if absolute else "%", nominal, place, True)


def _is_absolute(dial: Dial, around: Mapping[str, np.ndarray]) -> bool:
    kind = dial.address.rsplit(".", 1)[-1]
    return kind in ("ph", "temperature") or float(around.get(dial.address, dial.value)) == 0


def _beyond(
    plan: Plan,
    turned: Sequence[Dial],
    around: Mapping[str, np.ndarray],
    tried: np.ndarray,
    absolute: bool,
    readout: str,
    nominal: float,
    within: float,
) -> tuple[np.ndarray, dict[str, np.ndarray]]:
    """Whether the readout is too far off at every corner and tolerance, (corners, tried), and the dials."""
    corners = np.array(list(product((-1.0, 1.0), repeat=len(turned))))
    dials = {}
    for dial, ends in zip(turned, corners.T, strict=True):
        value = around.get(dial.address, dial.value)
        off = ends[:, None] * tried * (1.0 if absolute else abs(value) / 100)
        low = -np.inf if not dial.bounded else min(dial.low, value)
        dials[dial.address] = np.clip(
            value + off, low, np.inf if dial.high is None else max(dial.high, value)
        )
    values = follow(plan, {**around, **dials}).readout(readout)
    return ~(np.abs(values - nominal) <= within), dials
