"""Extremes: the lowest and highest values within all tolerances together, and the worst place anywhere.

All combinations of the ends of the inputs are calculated, so that an input whose slope is zero where nothing
is off cannot hide. From the best corners, and from the best of some points inside, a search along the inputs
goes on: it finds extremes that lie inside, where a readout has a minimum of its own.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.evaluate import follow
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import READOUTS
from explorer.studies.progress import UNWATCHED, Watch, batch
from explorer.studies.spread import NOTHING_OFF, Dials, Spread, spread_of
from explorer.studies.sweep import swept_dial
from explorer.studies.tolerance import USUAL_SEED, chances

MOST_INPUTS = 12
"""Inputs of which all combinations of ends are calculated; others start at the end that helps on average."""

LITTLE = 0.03
"""Where there are more inputs: those that move a readout less than this part of the one that moves it most
are not combined."""

PROBES = 8
"""Random corners at which every input is moved to the other end to see what it does."""

INSIDE = 128
"""Points inside the tolerances that are tried beside the corners."""

FIRST_STEP, STEP_FACTOR, COARSE_STEP, FINE_STEP = 0.5, 0.25, 1 / 8, 1 / 128
"""Steps of the search along the inputs, in widths: the first, what reduces it, and the last, for many columns
at once and for a single place."""

NOWHERE = "there is no answer anywhere within the tolerances; allowed where there is one"

GAIN = 1e-9
"""Relative gain below which a step counts as none."""

WORST_POINTS, ZOOM = 41, 21
"""Points of a sweep on which the worst place is looked for, and between its neighbours afterwards."""


@dataclass(frozen=True)
class Envelope:
    """Lowest and highest values (columns,) and how far each input is off there, (inputs, columns), in widths:
    −1 and 1 are the ends. ``inputs``: positions of those of which every combination was calculated."""

    low: np.ndarray
    high: np.ndarray
    low_places: np.ndarray
    high_places: np.ndarray
    inputs: tuple[int, ...]


@dataclass(frozen=True)
class Extreme:
    """One extreme: its value, where on the sweep and in which season, how far each input is off (by name, in
    widths), the dials there, and whether every input that matters stands at one of its ends."""

    value: float
    x: float | None
    season: str
    places: Mapping[str, float]
    dials: Mapping[str, float]
    corner: bool

    def to_dict(self) -> dict[str, Any]:
        """Plain numbers by name."""
        return {
            "value": self.value,
            "x": self.x,
            "season": self.season,
            "places": dict(self.places),
            "dials": dict(self.dials),
            "corner": self.corner,
        }


def extremes(
    scenario: Scenario,
    readout: str,
    season: str | None = None,
    overrides: Mapping[str, ArrayLike] = MappingProxyType({}),
    watch: Watch = UNWATCHED,
) -> tuple[Extreme, Extreme]:
    """The lowest and the highest value of a readout of the finished water at the operating point.

    Raises ScenarioError for what cannot be asked and where nothing has an answer, Stopped when asked to.
    """
    spread = _asked(scenario, readout, season)
    around = {address: np.atleast_1d(np.asarray(value, float)) for address, value in overrides.items()}
    found = envelope(spread, readout, around, watch)
    if np.isnan(found.low).all():
        raise ScenarioError("", NOWHERE)
    return (
        _extreme(spread, around, found.low, found.low_places, found.inputs, 0),
        _extreme(spread, around, found.high, found.high_places, found.inputs, 0),
    )


def worst(
    scenario: Scenario,
    readout: str,
    dial: str | None = None,
    start: float | None = None,
    stop: float | None = None,
    points: int = WORST_POINTS,
    seasons: Sequence[str] | None = None,
    overrides: Mapping[str, ArrayLike] = MappingProxyType({}),
    watch: Watch = UNWATCHED,
) -> tuple[Extreme, Extreme]:
    """The lowest and the highest value of a readout anywhere: along a dial, in any season, within all
    tolerances.

    The dial is chosen as for :func:`explorer.studies.sweep.sweep`; its place is narrowed down between the
    points. ``seasons``: all where None. Raises as :func:`extremes`.
    """
    seasons = list(scenario.seasons if seasons is None else seasons)
    found: list[tuple[Extreme, Extreme]] = []
    for position, season in enumerate(seasons):
        spread = _asked(scenario, readout, season)
        swept, x = swept_dial(scenario, dial, start, stop, points, season)
        part = watch.within(position / len(seasons), (position + 1) / len(seasons))
        found += _worst(spread, readout, swept.address, x, overrides, part)
    if not found:
        raise ScenarioError("", NOWHERE)
    lows, highs = zip(*found, strict=True)
    return min(lows, key=lambda extreme: extreme.value), max(highs, key=lambda extreme: extreme.value)


def _worst(
    spread: Spread, readout: str, dial: str, x: np.ndarray, overrides: Mapping[str, ArrayLike], watch: Watch
) -> list[tuple[Extreme, Extreme]]:
    """Both extremes in one season; none where nothing has an answer."""
    others = {address: np.asarray(value, float) for address, value in overrides.items()}
    coarse = envelope(spread, readout, others | {dial: x}, watch.within(0.0, 0.9))
    if np.isnan(coarse.low).all():
        return []
    ends = []
    for sign, values, places in (
        (1.0, coarse.low, coarse.low_places),
        (-1.0, coarse.high, coarse.high_places),
    ):
        best = int(np.nanargmin(sign * values))
        near = np.linspace(x[max(best - 1, 0)], x[min(best + 1, len(x) - 1)], ZOOM)
        around = others | {dial: near}
        starts = np.repeat(places[:, best : best + 1], ZOOM, axis=1)
        question = Question(spread, readout, around)
        values, places = _searched(question, starts, sign, coarse.inputs, FINE_STEP, watch.silent)
        best = int(np.nanargmin(sign * values))
        ends.append(_extreme(spread, around, values, places, coarse.inputs, best, near[best]))
    watch.done(1.0)
    return [(ends[0], ends[1])]


def _asked(scenario: Scenario, readout: str, season: str | None) -> Spread:
    if readout not in READOUTS:
        raise ScenarioError("readout", unknown(readout, "a readout", READOUTS))
    spread = spread_of(scenario, season)
    if not len(spread):
        raise ScenarioError("tolerances", NOTHING_OFF)
    return spread


def _extreme(
    spread: Spread,
    around: Dials,
    values: np.ndarray,
    places: np.ndarray,
    inputs: Sequence[int],
    column: int,
    x: float | None = None,
) -> Extreme:
    here = places[:, column]
    one = {address: value[column] if np.size(value) > 1 else value for address, value in around.items()}
    turned = spread.placed(here, one)
    return Extreme(
        float(values[column]),
        None if x is None else float(x),
        spread.plan.season,
        {part.name: float(place) for part, place in zip(spread.inputs, here, strict=True)},
        {address: float(np.squeeze(value)) for address, value in turned.items()},
        bool((np.abs(here[list(inputs)]) == 1).all()),
    )


# ---- the search --------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Question:
    """A readout asked at places of the inputs; ``around``: dials, scalars or (columns,), that stand there."""

    spread: Spread
    readout: str
    around: Dials

    @property
    def columns(self) -> int:
        """Number of columns."""
        return np.broadcast_shapes((1,), *(np.shape(value) for value in self.around.values()))[0]

    def everywhere(self, places: np.ndarray, watch: Watch) -> np.ndarray:
        """Values (places, columns) for places (inputs, places): each at every column."""
        rows = max(1, batch(self.spread.plan) // self.columns)
        found = np.empty((places.shape[1], self.columns))
        for first in range(0, len(found), rows):
            watch.done(first / len(found))
            some = places[:, first : first + rows, None]
            found[first : first + rows] = self._values(some, self.around)
        return found

    def at(self, places: np.ndarray, column: np.ndarray, watch: Watch) -> np.ndarray:
        """Values (N,) for places (inputs, N), each at its own column."""
        found, most = np.empty(column.size), batch(self.spread.plan)
        for first in range(0, column.size, most):
            watch.done(first / column.size)
            some = slice(first, first + most)
            here = {
                address: value[column[some]] if np.size(value) > 1 else value
                for address, value in self.around.items()
            }
            found[some] = self._values(places[:, some], here)
        return found

    def _values(self, places: np.ndarray, around: Dials) -> np.ndarray:
        return follow(self.spread.plan, self.spread.placed(places, around)).readout(self.readout)


def envelope(spread: Spread, readout: str, around: Dials, watch: Watch = UNWATCHED) -> Envelope:
    """Extremes of a readout at every column: ``around`` are dials, scalars or (columns,), that stand there.

    With at most MOST_INPUTS inputs every corner is calculated; with more, those of the inputs that move the
    readout most. nan where no point has an answer.
    """
    question = Question(spread, readout, around)
    effects = _effects(question, watch.within(0.0, 0.1))
    size = np.abs(effects).mean(axis=1).max(axis=1)
    combined = np.arange(len(spread))
    if len(spread) > MOST_INPUTS:
        largest = np.argsort(-size, kind="stable")[:MOST_INPUTS]
        combined = np.sort(largest[size[largest] > LITTLE * size.max()])
    corners = _corners(len(spread), combined)
    inside = 2 * chances(len(spread), INSIDE, USUAL_SEED) - 1
    tried = np.concatenate([corners, inside], axis=1)
    values = question.everywhere(tried, watch.within(0.1, 0.8))
    rest = np.setdiff1d(np.arange(len(spread)), combined)
    ends = []
    for sign, part in ((1.0, watch.within(0.8, 0.9)), (-1.0, watch.within(0.9, 1.0))):
        start = tried[:, np.argmin(np.where(np.isnan(values), np.inf, sign * values), axis=0)]
        # What was not combined starts at the end that helps on average.
        start[rest] = -sign * np.sign(effects[rest].mean(axis=1))
        moving, last_step = (
            (combined, COARSE_STEP) if question.columns > 1 else (range(len(spread)), FINE_STEP)
        )
        ends.append(_searched(question, start, sign, moving, last_step, part.silent))
        part.done(1.0)
    (low, low_places), (high, high_places) = ends
    return Envelope(low, high, low_places, high_places, tuple(combined.tolist()))


def _corners(inputs: int, combined: np.ndarray) -> np.ndarray:
    """All combinations of the ends of the ``combined`` inputs, the others not off: (inputs, corners)."""
    corners = np.zeros((inputs, 2**combined.size))
    for bit, row in enumerate(combined):
        corners[row] = 1.0 - 2.0 * (np.arange(corners.shape[1]) >> bit & 1)
    return corners


def _effects(question: Question, watch: Watch) -> np.ndarray:
    """Change of the readout when an input goes from its lower to its upper end, at some random corners:
    (inputs, PROBES, columns); 0 where that cannot be told."""
    inputs = len(question.spread)
    corners = np.where(np.random.default_rng(USUAL_SEED).random((inputs, PROBES)) < 0.5, -1.0, 1.0)
    flipped = np.repeat(corners[:, None, :], inputs + 1, axis=1)
    flipped[np.arange(inputs), np.arange(inputs)] *= -1
    values = question.everywhere(flipped.reshape(inputs, -1), watch)
    values = values.reshape(inputs + 1, PROBES, -1)
    return np.nan_to_num((values[-1] - values[:-1]) * corners[:, :, None], nan=0.0)


def _searched(
    question: Question,
    starts: np.ndarray,
    sign: float,
    moving: Sequence[int] | np.ndarray,
    last_step: float,
    watch: Watch,
) -> tuple[np.ndarray, np.ndarray]:
    """Values (columns,) of the readout where ``sign`` times it is lowest near ``starts`` (inputs, columns),
    and their places.

    In every pass each column moves the one of the inputs ``moving`` that gains most, by a step or to one of
    its ends; where none gains, the step is reduced.
    """
    inputs, columns = starts.shape
    places, steps = starts.copy(), np.full(columns, FIRST_STEP)
    values = question.at(places, np.arange(columns), watch)
    active = np.flatnonzero(np.isfinite(values))
    while active.size:
        tried = _neighbours(places[:, active], steps[active], np.asarray(moving))
        asked = question.at(tried.reshape(inputs, -1), np.tile(active, tried.shape[1]), watch)
        asked = asked.reshape(tried.shape[1:])
        best = np.argmin(np.where(np.isnan(asked), np.inf, sign * asked), axis=0)
        each = np.arange(active.size)
        lowered = sign * (values[active] - asked[best, each])
        gained = lowered > GAIN * np.abs(values[active])
        won = active[gained]
        places[:, won] = tried[:, best, each][:, gained]
        values[won] = asked[best, each][gained]
        steps[active[~gained]] *= STEP_FACTOR
        active = active[steps[active] >= last_step]
    return values, places


def _neighbours(places: np.ndarray, steps: np.ndarray, moving: np.ndarray) -> np.ndarray:
    """Places (inputs, 4 × moving, columns) of which each has one input moved: to an end, or by a step."""
    here = places[moving]
    moved = [np.full_like(here, -1.0), np.ones_like(here), here - steps, here + steps]
    tried = np.tile(places[:, None, None, :], (1, 4, len(moving), 1))
    tried[moving, :, np.arange(len(moving))] = np.clip(moved, -1.0, 1.0).transpose(1, 0, 2)
    return tried.reshape(len(places), 4 * len(moving), -1)
