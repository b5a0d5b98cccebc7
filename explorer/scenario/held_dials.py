"""Held dials: dials computed so that readouts anywhere in the plant meet values, several of them together.

A dose that holds a readout right behind its own step is solved there (:mod:`explorer.scenario.holds`). Here
any dial may be held to a readout at any stage: the whole plant is calculated for every try, all points at
once.

One held dial is looked for between the first two of some values across its range between which the readout
passes its goal. Several depend on each other: from the best of a grid on, damped least-squares steps
(Levenberg-Marquardt, with the dials kept within their ranges) lead to where all are met, or as near as can
be.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import product

import numpy as np

from explorer.scenario.holds import SEARCHABLE, excess
from explorer.scenario.readouts import Readout
from explorer.scenario.roots import find_roots
from explorer.scenario.stage import Stage

TRIES, ZOOMS = 9, 3
"""Values across a range, and how often the look is repeated between the neighbours of the best one."""

GRID = {2: 5, 3: 3, 4: 3}
"""Values of each of several dials that are combined for a start."""

MOST_HOLDS = max(GRID)

RELATIVE = 1e-12
"""To what part of its range a single dial is found."""

ALKALINITY_UNIT = 2e-6
"""eq/L that count as one unit of the distance from a held pH: 0.1 mg/L as CaCO3."""

ENOUGH = 1e-12
"""Sum of the squared distances from the goals, in units of the last digit shown, that counts as none."""

SLOPE_STEP = 1e-5
"""Part of a range over which the slopes for several dials are taken."""

FIRST_DAMPING, LEAST_DAMPING, MOST_DAMPING = 1e-3, 1e-12, 1e8
LESS_DAMPING, MORE_DAMPING = 0.5, 4.0
"""Factors after a step that gains and one that does not."""

MOST_STEPS = 100

STILL = 1e-10
"""Part of a range; a smaller step leads nowhere."""

Distance = Callable[[np.ndarray, np.ndarray], np.ndarray]
"""How far above their goals the readouts are, in units of about their last digit, (holds, N): for dials
(holds, N) at the points (N,) of the flat evaluation. nan where there is no answer."""


@dataclass(frozen=True)
class DialGoal:
    """What holds a dial: ``readout`` at ``stage`` is to have the value of the dial ``goal``; the held dial
    ``address`` may stand from ``low`` to ``high``, and stands at ``usual`` where nothing can be told."""

    address: str
    readout: Readout
    stage: str
    low: float
    high: float
    usual: float

    @property
    def goal(self) -> str:
        """Address of the held value."""
        return f"{self.address}.hold.value"


@dataclass(frozen=True)
class HeldDial:
    """A dial that was computed: its ``value`` (*shape) in its ``unit``, where the hold is ``met``, and in
    ``words`` where it is not."""

    value: np.ndarray
    unit: str
    met: np.ndarray
    words: tuple[str, ...]


def distance(stage: Stage, readout: Readout, goal: np.ndarray) -> np.ndarray:
    """How far above its goal a readout is, in units of about its last digit."""
    if readout.key == "ph":
        # Nearly linear in every dose, as for a held dose.
        beyond = excess(stage.stream, readout, goal) / ALKALINITY_UNIT
        return np.where(np.isin(stage.problem, SEARCHABLE), beyond, np.nan)
    return (stage.readout(readout.key) - goal) * 10.0**readout.digits


def find_dials(goals: Sequence[DialGoal], measure: Distance, count: int) -> np.ndarray:
    """Dials (holds, count) that meet the goals together, or come nearest, at each of ``count`` points."""
    if len(goals) == 1:
        return _alone(goals[0], measure, count)
    low = np.array([[goal.low] for goal in goals])
    span = np.array([[goal.high] for goal in goals]) - low
    found = _together(lambda part, point: measure(low + part * span, point), len(goals), count)
    usual = np.array([[goal.usual] for goal in goals])
    return np.where(np.isnan(found), usual, low + found * span)


# ---- one dial ----------------------------------------------------------------------------------------------


def _alone(goal: DialGoal, measure: Distance, count: int) -> np.ndarray:
    value, left, right = (np.full(count, float(end)) for end in (goal.usual, goal.low, goal.high))
    passed = np.zeros(count, bool)
    for _ in range(ZOOMS):
        points = np.flatnonzero(~passed & (right > left))
        if not points.size:
            break
        tried = np.linspace(left[points], right[points], TRIES)
        far = measure(tried.reshape(1, -1), np.tile(points, TRIES))[0].reshape(tried.shape)
        each = np.arange(points.size)
        passes = far[:-1] * far[1:] <= 0
        first = np.argmax(passes, axis=0)
        best = np.argmin(np.where(np.isnan(far), np.inf, np.abs(far)), axis=0)
        through = passes.any(axis=0)
        told_here = np.isfinite(far).any(axis=0)
        passed[points] = through
        value[points[told_here]] = tried[best, each][told_here]
        before = np.where(through, first, np.maximum(best - 1, 0))
        behind = np.where(through, first + 1, np.minimum(best + 1, TRIES - 1))
        left[points], right[points] = tried[before, each], tried[behind, each]
    points = np.flatnonzero(passed)
    if not points.size:
        return value[None]
    roots = find_roots(
        lambda x, point: measure(x[None], points[point])[0],
        left[points],
        right[points],
        relative=RELATIVE,
        enough=np.sqrt(ENOUGH),
    )
    value[points] = np.where(roots.found, roots.x, value[points])
    return value[None]


# ---- several dials -----------------------------------------------------------------------------------------


def _together(measure: Distance, holds: int, count: int) -> np.ndarray:
    """Dials (holds, count) as parts of their ranges; nan where nothing can be told."""
    grid = np.array(list(product(np.linspace(0, 1, GRID[holds]), repeat=holds))).T
    tries, each = grid.shape[1], np.arange(count)
    far = measure(np.repeat(grid, count, axis=1), np.tile(each, tries)).reshape(holds, tries, count)
    sizes = _size(far)
    x, size = np.full((holds, count), np.nan), np.full(count, np.inf)
    # From the best point of the grid; where that does not lead home, from the best of each of its corners.
    corners = (grid <= 0.5)[None] == np.array(list(product((True, False), repeat=holds)))[:, :, None]
    for part in (np.ones(tries, bool), *corners.all(axis=1)):
        points = np.flatnonzero(size > ENOUGH)
        if not points.size:
            break
        best = np.argmin(np.where(part[:, None], sizes[:, points], np.inf), axis=0)
        found, at = _descended(measure, grid[:, best], far[:, best, points], points)
        better = at < size[points]
        x[:, points[better]], size[points[better]] = found[:, better], at[better]
    return x


def _descended(
    measure: Distance, x: np.ndarray, far: np.ndarray, points: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """Dials (holds, N) of ``points`` after the steps from ``x`` with distances ``far``, and the sum of the
    squares of the distances that are left."""
    size = _size(far)
    damping = np.full(points.size, FIRST_DAMPING)
    active = np.flatnonzero(np.isfinite(size))
    for _ in range(MOST_STEPS):
        active = active[size[active] > ENOUGH]
        if not active.size:
            break
        step = _step(measure, x[:, active], far[:, active], damping[active], points[active])
        tried = np.clip(x[:, active] + step, 0.0, 1.0)
        moved = np.abs(tried - x[:, active]).max(axis=0) > STILL
        found = measure(tried, points[active])
        better = _size(found) < size[active]
        won = active[better]
        x[:, won], far[:, won], size[won] = tried[:, better], found[:, better], _size(found)[better]
        damping[won] = np.maximum(damping[won] * LESS_DAMPING, LEAST_DAMPING)
        damping[active[~better]] *= MORE_DAMPING
        active = active[moved & (damping[active] < MOST_DAMPING)]
    return x, size


def _size(far: np.ndarray) -> np.ndarray:
    """Sum of squares of distances (holds, …), infinite where one of them cannot be told."""
    size = np.sum(far**2, axis=0)
    return np.where(np.isnan(size), np.inf, size)


def _step(
    measure: Distance, x: np.ndarray, far: np.ndarray, damping: np.ndarray, points: np.ndarray
) -> np.ndarray:
    """Damped least-squares step (holds, N) from dials ``x`` with distances ``far``."""
    holds = len(x)
    aside = np.where(x < 0.5, SLOPE_STEP, -SLOPE_STEP)
    moved = x[:, None] + np.eye(holds)[:, :, None] * aside[:, None]
    behind = measure(moved.reshape(holds, -1), np.tile(points, holds)).reshape(holds, holds, -1)
    # slopes[hold, dial]
    slopes = np.nan_to_num((behind - far[:, None]) / aside)
    uphill = np.einsum("hdn,hn->dn", slopes, far)
    # A dial at the end of its range stays there rather than bend the way of the others.
    stuck = ((x <= 0) & (uphill > 0)) | ((x >= 1) & (uphill < 0))
    slopes = np.where(stuck, 0.0, slopes)
    normal = np.einsum("hdn,hen->nde", slopes, slopes)
    diagonal = np.einsum("ndd->nd", normal)
    flat = diagonal == 0
    normal[:, np.arange(holds), np.arange(holds)] += damping[:, None] * diagonal + flat
    return np.linalg.solve(normal, -np.where(stuck, 0.0, uphill).T[:, :, None])[:, :, 0].T
