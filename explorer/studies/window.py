"""Window: two dials over a map, and where on it every target is met."""

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from explorer.scenario.compile import Plan, compiled
from explorer.scenario.dials import Dial, dials, no_dial
from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.evaluate import Outcome, follow
from explorer.scenario.model import Scenario, Target
from explorer.scenario.outcome import FINISHED
from explorer.scenario.readouts import READOUTS
from explorer.studies.progress import UNWATCHED, Watch, batch
from explorer.studies.sweep import headed, listed, swept_range

COARSE_POINTS, USUAL_POINTS, MOST_POINTS = 33, 129, 401

HALVINGS = 7
"""Of the edge of a cell on which a border is looked for: to 1/128 of it."""

MET, NO_ANSWER = -1, -2
"""What :attr:`Window.missed` holds where no target is missed, and where there is no answer."""


@dataclass(frozen=True)
class Axis:
    """One side of the map: a dial and its values, in its unit."""

    dial: Dial
    values: np.ndarray


@dataclass(frozen=True)
class Window:
    """A map of the finished water. Arrays are (rows, columns): y first, both rising as the axes do.

    ``readouts``: by key. ``margins``: (targets, rows, columns), distance of each target's readout to the
    nearer limit, negative outside. ``missed``: the position of the first missed target in the order of the
    scenario (whoever cares most about a target lists it first), MET where all are met, NO_ANSWER where one of
    them cannot be told; ``reasons`` says why.

    ``borders``: by position of the target, the line that parts where it is met from where it is not;
    ``border``: the same for all targets together. A border is an array of straight pieces (N, 2, 2): two
    ends, x and y each; every end is found to 1/128 of a cell of the map.
    """

    x: Axis
    y: Axis
    targets: tuple[Target, ...]
    readouts: Mapping[str, np.ndarray]
    margins: np.ndarray
    missed: np.ndarray
    reasons: np.ndarray
    border: np.ndarray
    borders: tuple[np.ndarray, ...]
    plan: Plan
    overrides: Mapping[str, ArrayLike]
    final: bool

    @property
    def part_met(self) -> float:
        """Part of the map (0 to 1) on which all targets are met."""
        return float(np.mean(self.missed == MET))

    def parts_missed(self) -> list[float]:
        """Part of the map on which each target is the first that is missed."""
        return [float(np.mean(self.missed == position)) for position in range(len(self.targets))]

    def at(self, x: ArrayLike, y: ArrayLike) -> Outcome:
        """The plant at any place of the map."""
        return follow(self.plan, {**self.overrides, self.x.dial.address: x, self.y.dial.address: y})

    def to_dict(self) -> dict[str, Any]:
        """Plain lists by name, rows of y; ``missed`` is the position of a target, −1 where all are met and
        None where there is no answer."""
        return {
            "x": _axis_dict(self.x),
            "y": _axis_dict(self.y),
            "readouts": {key: [listed(row) for row in rows] for key, rows in self.readouts.items()},
            "targets": [{"readout": t.readout, "low": t.low, "high": t.high} for t in self.targets],
            "missed": [[None if m == NO_ANSWER else int(m) for m in row] for row in self.missed],
            "part_met": self.part_met,
            "border": self.border.tolist(),
        }

    def table(self) -> list[list[Any]]:
        """Rows for a spreadsheet, the heading first: both dials, readouts, first missed target, reason."""
        heading = [headed(axis.dial.label, axis.dial.unit) for axis in (self.x, self.y)]
        heading += [headed(READOUTS[key].label, READOUTS[key].unit) for key in self.readouts]
        y, x = np.meshgrid(self.y.values, self.x.values, indexing="ij")
        columns = [x.ravel().tolist(), y.ravel().tolist()]
        columns += [listed(values.ravel()) for values in self.readouts.values()]
        names = {position: READOUTS[target.readout].label for position, target in enumerate(self.targets)}
        columns.append([names.get(int(position), "") for position in self.missed.ravel()])
        columns.append(self.reasons.ravel().tolist())
        rows = [list(row) for row in zip(*columns, strict=True)]
        return [[*heading, "First target missed", "No answer because"], *rows]


def window(
    scenario: Scenario,
    x: str,
    y: str,
    x_range: tuple[float | None, float | None] = (None, None),
    y_range: tuple[float | None, float | None] = (None, None),
    readouts: Sequence[str] = (),
    points: int = USUAL_POINTS,
    season: str | None = None,
    overrides: Mapping[str, ArrayLike] = MappingProxyType({}),
    watch: Watch = UNWATCHED,
) -> Iterator[Window]:
    """The map over two dials, first coarse, then with ``points`` values on each axis (``final``).

    x, y: addresses of the dials; their ranges as for :func:`explorer.studies.sweep.sweep`. readouts: whose
    values are wanted beside those of the targets. overrides: other dials.

    Raises ScenarioError at once for what cannot be asked, and Stopped between two maps or while one is made.
    """
    axes = []
    every = dials(scenario, season)
    for name, address, ends in (("x", x, x_range), ("y", y, y_range)):
        if address not in every:
            raise ScenarioError(name, no_dial(address, every))
        axes.append((every[address], *swept_range(every[address], scenario.sweep, *ends, path=f"{name}.")))
    if x == y:
        raise ScenarioError("y", f"{y} is the dial of x as well; allowed another dial")
    for key in readouts:
        if key not in READOUTS:
            raise ScenarioError("readouts", unknown(key, "a readout", READOUTS))
    if not 2 <= points <= MOST_POINTS:
        raise ScenarioError("points", f"{points} is out of range; allowed 2 to {MOST_POINTS}")
    plan = compiled(scenario, season)
    others = {address: value for address, value in overrides.items() if address not in (x, y)}
    keys = tuple(dict.fromkeys([*(target.readout for target in plan.targets), *readouts]))

    def maps() -> Iterator[Window]:
        sizes = [COARSE_POINTS, points] if points > 2 * COARSE_POINTS else [points]
        done = 0.0
        for size in sizes:
            share = size**2 / sum(other**2 for other in sizes)
            sides = [Axis(dial, np.linspace(start, stop, size)) for dial, start, stop in axes]
            yield _mapped(plan, sides, keys, others, size == sizes[-1], watch.within(done, done + share))
            done += share

    return maps()


def _mapped(
    plan: Plan,
    axes: Sequence[Axis],
    keys: Sequence[str],
    overrides: Mapping[str, ArrayLike],
    final: bool,
    watch: Watch,
) -> Window:
    x, y = axes
    addresses = (x.dial.address, y.dial.address)

    def at(at_x: np.ndarray, at_y: np.ndarray) -> Outcome:
        return follow(plan, {**overrides, addresses[0]: at_x, addresses[1]: at_y})

    bands = []
    rows = max(1, batch(plan) // len(x.values))
    for first in range(0, len(y.values), rows):
        watch.done(0.9 * first / len(y.values))
        bands.append(_surveyed(at(x.values, y.values[first : first + rows, None]), plan.targets, keys))
    readouts = {key: np.concatenate([band.readouts[key] for band in bands]) for key in keys}
    margins = np.concatenate([band.margins for band in bands], axis=1)
    met = np.concatenate([band.met for band in bands], axis=1)
    reasons = np.concatenate([band.reasons for band in bands])

    def holds(at_x: np.ndarray, at_y: np.ndarray) -> np.ndarray:
        _, found, answered = judged(at(at_x, at_y))
        return np.vstack([found, (found.all(axis=0) & answered)[None]])

    masks = np.concatenate([met, (met.all(axis=0) & (reasons == ""))[None]])
    lines = _lines(masks, x.values, y.values, holds, watch.within(0.9, 1.0))
    watch.done(1.0)
    missed = np.where(met.all(axis=0), MET, np.argmin(met, axis=0) if len(met) else MET)
    missed = np.where(reasons == "", missed, NO_ANSWER).astype(int)
    return Window(
        x, y, plan.targets, readouts, margins, missed, reasons, lines[-1], lines[:-1], plan, overrides, final
    )


@dataclass(frozen=True)
class _Band:
    """What is kept of a part of the map; the outcome itself would fill the memory."""

    readouts: Mapping[str, np.ndarray]
    margins: np.ndarray
    met: np.ndarray
    reasons: np.ndarray


def _surveyed(outcome: Outcome, targets: Sequence[Target], keys: Sequence[str]) -> _Band:
    margins, met, _ = judged(outcome)
    reasons = outcome.reasons().astype(object)
    for target, missing in zip(targets, np.isnan(margins), strict=True):
        unknown_here = missing & (reasons == "")
        if unknown_here.any():
            reasons = np.where(unknown_here, outcome.reasons(FINISHED, target.readout), reasons)
    return _Band({key: outcome.readout(key) for key in keys}, margins, met, reasons)


def judged(outcome: Outcome) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Margins and whether they are met, (targets, *shape), and where every target can be told, (*shape)."""
    found = outcome.targets()
    margins = np.array([margin for *_, margin in found]).reshape(len(found), *outcome.shape)
    met = np.array([met for _, _, met, _ in found], bool).reshape(len(found), *outcome.shape)
    return margins, met, (outcome.reasons() == "") & np.isfinite(margins).all(axis=0)


# ---- borders -----------------------------------------------------------------------------------------------


def _lines(
    masks: np.ndarray,
    x: np.ndarray,
    y: np.ndarray,
    holds: Callable[[np.ndarray, np.ndarray], np.ndarray],
    watch: Watch,
) -> tuple[np.ndarray, ...]:
    """Border of every mask (M, rows, columns), each an array (N, 2, 2) of pieces.

    Where two neighbouring points differ, the border crosses the edge between them; the place is found by
    halving, for all edges of all masks together. ``holds(x, y)`` gives the masks (M, N) at any points.
    """
    across = np.argwhere(masks[:, :, :-1] != masks[:, :, 1:])
    along = np.argwhere(masks[:, :-1, :] != masks[:, 1:, :])
    mask = np.concatenate([across[:, 0], along[:, 0]])
    starts = np.concatenate([across[:, 1:], along[:, 1:]])
    steps = np.repeat([[0, 1], [1, 0]], [len(across), len(along)], axis=0)
    inside = masks[(mask, *starts.T)]
    low = np.stack([x[starts[:, 1]], y[starts[:, 0]]])
    ends = starts + steps
    high = np.stack([x[ends[:, 1]], y[ends[:, 0]]])
    for halving in range(HALVINGS if mask.size else 0):
        watch.done(halving / HALVINGS)
        middle = (low + high) / 2
        same = holds(*middle)[mask, np.arange(mask.size)] == inside
        low, high = np.where(same, middle, low), np.where(same, high, middle)
    places = (low + high) / 2
    crossed = np.zeros((2, *masks.shape), bool)
    crossings = np.zeros((2, *masks.shape, 2))
    direction = steps[:, 0]
    crossed[(direction, mask, *starts.T)] = True
    crossings[(direction, mask, *starts.T)] = places.T
    return tuple(_pieces(crossed[:, m], crossings[:, m]) for m in range(len(masks)))


def _pieces(crossed: np.ndarray, places: np.ndarray) -> np.ndarray:
    """Straight pieces through the cells of the map from where its border crosses their edges.

    ``crossed`` (2, rows, columns): whether it crosses the edge from a point along x (0) or along y (1), at
    ``places`` (…, 2).
    """

    def edges(part: np.ndarray) -> np.ndarray:
        return np.stack([part[0, :-1, :-1], part[1, :-1, :-1], part[0, 1:, :-1], part[1, :-1, 1:]], axis=2)

    there, where = edges(crossed), edges(places)
    count = there.sum(axis=2)
    single, double = np.nonzero(count == 2), np.nonzero(count == 4)
    order = np.argsort(~there[single], axis=1, kind="stable")[:, :2]
    pieces = np.take_along_axis(where[single], order[:, :, None], axis=1)
    # Where a border passes through a cell twice, it goes round two opposite corners of it.
    corners = where[double].reshape(-1, 2, 2)
    return np.concatenate([pieces, corners])


def _axis_dict(axis: Axis) -> dict[str, Any]:
    return {"dial": axis.dial.address, "unit": axis.dial.unit, "values": axis.values.tolist()}
