"""Batched Newton iteration for the equilibrium of many waters at once.

Unknowns are ln of the master activities and the ionic strength. With concentrations
``c = exp(ln k + counts·x − ln γ)`` the balance matrix ``countsᵀ diag(c) counts`` is symmetric and positive
definite, so it is factored without pivoting; the ionic strength is bordered onto it. The sparsity is worked
out once per set of components present, and each step of the elimination is one NumPy operation over the
whole batch.

What makes it quick and hard to break is the form of the residual. A balance says that what its species hold
with a positive count, ``held``, less what they hold with a negative count, ``lacking``, is the total. It is
used as the logarithm of ``(lacking + total) / held``, scaled so that its derivative at the solution is that
of the plain difference: exact in one step for a component on its own, and as tame for a proton balance,
whose total may have any sign, as for a metal.
"""

import threading
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from .activity import davies, neutral
from .constants import LN10
from .organics import END_POINT_FRACTION, dissociated

STEP_TOLERANCE = 2e-6
"""Largest change of any unknown in the last step; the error after it is of the order of its square."""
MAX_STEP = 2.0
"""Largest change of any ln activity in one step."""
NEAR = 0.3
"""Largest change of any ln activity for which the ionic strength is changed with Newton too."""
MAX_ITERATIONS = 100
CHUNK = 4096
"""Points worked on together, so that the arrays of one step stay in the processor's cache."""
ABSENT = -3000.0
"""ln activity given to a component whose total is zero: every species with it underflows to exactly 0."""
SMALLEST_TOTAL = 1e-200
"""mol/L; less than this is treated as nothing."""


@dataclass
class Problem:
    """One batch, flat: every array has N points on its last axis.

    ``log_k`` (S, N); ``totals`` (M, N) of the masters, the proton row holding minus the alkalinity; ``slope``
    (N,) Debye–Hückel A; ``inert`` (N,) ½Σz²c of ions that form no species; ``organic`` (N,) eq/L of organic
    acid groups; ``ph`` (N,) fixes the pH and drops the proton balance.
    """

    log_k: NDArray
    totals: NDArray
    slope: NDArray
    inert: NDArray
    organic: NDArray
    ph: NDArray | None = None

    def __len__(self) -> int:
        return self.totals.shape[1]

    def take(self, points: NDArray | slice) -> "Problem":
        """The same problem for some of its points."""
        arrays = (self.log_k, self.totals, self.slope, self.inert, self.organic, self.ph)
        return Problem(*(None if a is None else a[..., points] for a in arrays))


@dataclass
class State:
    """Unknowns of a batch: ``x`` (M, N) ln activities, ``strength`` (N,) mol/L."""

    x: NDArray
    strength: NDArray

    def take(self, points: NDArray | slice) -> "State":
        """The same state for some of its points, as a copy."""
        return State(self.x[:, points].copy(), self.strength[points].copy())

    def put(self, points: NDArray, other: "State") -> None:
        """Write the state of some points."""
        self.x[:, points] = other.x
        self.strength[points] = other.strength


@dataclass
class Linear:
    """First-order equations of a batch: ``matrix`` (pattern rows, N) and ``residual`` (M, N) of the balances,
    and the border that belongs to the ionic strength."""

    matrix: NDArray
    residual: NDArray
    strength_column: NDArray
    strength_row: NDArray
    strength_residual: NDArray
    strength_corner: NDArray


class _Scratch(threading.local):
    """Large arrays kept between steps, by name: allocating megabytes anew in each step takes longer than
    filling them. What is returned is overwritten by the next call with the same name in the same thread."""

    def __init__(self) -> None:
        self._kept: dict[str, NDArray] = {}

    def array(self, name: str, rows: int, columns: int) -> NDArray:
        """An uninitialised (rows, columns) array."""
        size = rows * columns
        if name not in self._kept or self._kept[name].size < size:
            self._kept[name] = np.empty(size)
        return self._kept[name][:size].reshape(rows, columns)


_scratch = _Scratch()


class Newton:
    """The iteration for one set of masters; H+ is master 0.

    ``counts`` (S, M) integers as floats, ``charges`` (S,). Instances hold no state of a problem.
    """

    def __init__(self, counts: NDArray, charges: NDArray) -> None:
        self.counts, self.charges = counts, charges
        self.masters = counts.shape[1]
        self.two_sided: NDArray = np.flatnonzero((counts < 0.0).any(axis=0))
        self.exponents = np.hstack([counts, (charges**2)[:, None], -(charges == 0.0).astype(float)[:, None]])
        self.order, self.pattern = _elimination(counts)
        self.position = {pair: row for row, pair in enumerate(self.pattern)}
        self.position |= {(j, i): row for (i, j), row in self.position.items()}
        z2 = charges**2
        uncharged = (charges == 0).astype(float)
        products = [counts[:, i] * counts[:, j] for i, j in self.pattern]
        rows = {
            "matrix": np.array(products),
            "held": np.maximum(counts, 0.0).T,
            "lacking": np.maximum(-counts, 0.0).T[self.two_sided],
            "charged": counts.T * z2,
            "uncharged": counts.T * uncharged,
            "strength": np.stack([0.5 * z2, 0.5 * z2**2]),
        }
        self.weights = np.vstack(list(rows.values()))
        ends = np.cumsum([len(r) for r in rows.values()])
        self.rows = {
            name: slice(end - len(r), end) for (name, r), end in zip(rows.items(), ends, strict=True)
        }
        self.own_weights = np.vstack([rows["held"], rows["lacking"], rows["strength"][:1]])
        steepest = rows["held"].max(axis=1)
        steepest[self.two_sided] += rows["lacking"].max(axis=1)
        self.own_power = 1.0 / steepest[:, None]
        self.own_power[0] = 0.0
        self.diagonal = np.array([self.position[i, i] for i in range(self.masters)])
        self.proton_pairs = np.array([row for row, (i, j) in enumerate(self.pattern) if 0 in (i, j)])

    def concentrations(self, problem: Problem, state: State) -> NDArray:
        """mol/L of every species; (S, N). Scratch: valid until the next call in the same thread."""
        factor, _ = davies(problem.slope, state.strength)
        uncharged, _ = neutral(state.strength)
        unknowns = np.vstack([state.x, factor, uncharged])
        log_c = np.matmul(
            self.exponents, unknowns, out=_scratch.array("species", len(self.charges), len(problem))
        )
        log_c += problem.log_k
        return np.exp(log_c, out=log_c)

    def run(self, problem: Problem, state: State, enough: float = 1.0) -> NDArray:
        """Iterate ``state`` in place until the share ``enough`` of the points has converged, dropping points
        as they do; returns which points converged, (N,)."""
        converged = np.zeros(len(problem), dtype=bool)
        points = np.arange(len(problem))
        part, at = problem, state.take(points)
        for _ in range(MAX_ITERATIONS):
            done = self._step(part, at) < STEP_TOLERANCE
            if done.any() and (done.all() or done.mean() > 0.25):
                converged[points[done]] = True
                state.put(points[done], at.take(done))
                points, part, at = points[~done], part.take(~done), at.take(~done)
            if len(points) <= (1.0 - enough) * len(problem):
                break
        state.put(points, at)
        return converged

    def _step(self, problem: Problem, state: State) -> NDArray:
        """Improve ``state`` in place; returns the largest relative change of any unknown, (N,)."""
        linear = self.linearise(problem, state)
        columns = np.stack([linear.residual, linear.strength_column], axis=1)
        self.eliminate(linear.matrix, columns)
        products = np.einsum("mn,mrn->rn", linear.strength_row, columns)
        corner = products[1] + linear.strength_corner
        strength_change = (linear.strength_residual - products[0]) / np.where(corner == 0.0, -1.0, corner)
        change = columns[:, 0] + columns[:, 1] * strength_change
        largest = np.abs(change).max(axis=0)
        largest = np.where(np.isfinite(largest), largest, np.inf)
        state.x += np.minimum(1.0, MAX_STEP / np.maximum(largest, SMALLEST_TOTAL)) * change
        # far from the solution the Newton change of the ionic strength means nothing: go half way (in ln) to
        # the ionic strength of the species at hand
        found = np.clip(state.strength - linear.strength_residual, 1e-9, 1.0)
        state.strength = np.where(
            largest < NEAR,
            np.clip(state.strength + strength_change, 0.2 * state.strength, 5.0 * state.strength),
            np.sqrt(state.strength * found),
        )
        return np.maximum(largest, np.abs(strength_change) / state.strength)

    def scale(self, problem: Problem, state: State) -> None:
        """Improve ``state`` in place as if every component but H+, which stays, were on its own: each is
        scaled to its total with the power that its highest counts allow without overshooting."""
        c = self.concentrations(problem, state)
        sums = np.matmul(self.own_weights, c, out=_scratch.array("sums", len(self.own_weights), len(problem)))
        held, lacking = sums[: self.masters], sums[self.masters : -1]
        state.x += self.own_power * np.log(self.ratios(problem.totals, held, lacking))
        state.strength = np.clip(sums[-1] + problem.inert, 1e-8, 1.0)

    def proton_response(self, problem: Problem, state: State) -> NDArray:
        """Change of ln activity of H+ per unit of proton total at a solution; (N,)."""
        linear = self.linearise(problem, state)
        columns = np.zeros((self.masters, 2, len(problem)))
        columns[0, 0], columns[:, 1] = 1.0, linear.strength_column
        self.eliminate(linear.matrix, columns)
        products = np.einsum("mn,mrn->rn", linear.strength_row, columns)
        return columns[0, 0] - columns[0, 1] * products[0] / (products[1] + linear.strength_corner)

    def linearise(self, problem: Problem, state: State) -> "Linear":
        """The equations at a state, to first order."""
        c = self.concentrations(problem, state)
        sums = np.matmul(self.weights, c, out=_scratch.array("sums", len(self.weights), len(problem)))
        matrix, held = sums[self.rows["matrix"]], sums[self.rows["held"]]
        lacking = sums[self.rows["lacking"]]
        charged, uncharged = sums[self.rows["charged"]], sums[self.rows["uncharged"]]
        half_z2, half_z4 = sums[self.rows["strength"]]
        _, factor_slope = davies(problem.slope, state.strength)
        _, uncharged_slope = neutral(state.strength)
        column = uncharged * uncharged_slope - charged * factor_slope
        row = 0.5 * charged
        strength_residual = state.strength - half_z2 - problem.inert
        corner = half_z4 * factor_slope - 1.0

        totals = problem.totals
        if problem.organic.any():
            fraction, slope = dissociated(-state.x[0] / LN10)
            ions, ion_slope = problem.organic * fraction, problem.organic * slope / LN10
            lacking[0] += ions
            matrix[self.diagonal[0]] += ion_slope
            row[0] -= 0.5 * ion_slope
            strength_residual -= 0.5 * ions
            totals = totals.copy()
            totals[0] -= problem.organic * END_POINT_FRACTION

        residual = np.log(self.ratios(totals, held, lacking))
        held[self.two_sided] = np.maximum(held[self.two_sided], lacking)
        residual *= held
        if problem.ph is not None:
            matrix[self.proton_pairs] = 0.0
            matrix[self.diagonal[0]] = 1.0
            residual[0] = -LN10 * problem.ph - state.x[0]
            column[0] = 0.0
        matrix[self.diagonal] += matrix[self.diagonal] == 0.0
        return Linear(matrix, residual, column, row, strength_residual, corner)

    def ratios(self, totals: NDArray, held: NDArray, lacking: NDArray) -> NDArray:
        """What each balance has over what it wants; (M, N). A component that is absent has 1.

        ``lacking`` has the rows ``two_sided`` only.
        """
        two = self.two_sided
        have, want = totals + SMALLEST_TOTAL, held + SMALLEST_TOTAL
        have[two] = lacking + np.maximum(totals[two], 0.0) + SMALLEST_TOTAL
        want[two] -= np.minimum(totals[two], 0.0)
        have /= want
        return np.clip(have, 1e-150, 1e150, out=have)

    def eliminate(self, matrix: NDArray, columns: NDArray) -> None:
        """Solve the symmetric system for every right-hand side in place; ``columns`` (M, R, N)."""
        position = self.position
        reciprocals = np.empty((self.masters, matrix.shape[1]))
        for k, later in self.order:
            reciprocal = np.divide(1.0, matrix[position[k, k]], out=reciprocals[k])
            for index, i in enumerate(later):
                multiplier = matrix[position[i, k]] * reciprocal
                for j in later[: index + 1]:
                    matrix[position[i, j]] -= multiplier * matrix[position[j, k]]
                columns[i] -= multiplier * columns[k]
        for k, later in reversed(self.order):
            for i in later:
                columns[k] -= matrix[position[i, k]] * columns[i]
            columns[k] *= reciprocals[k]


def _elimination(counts: NDArray) -> tuple[list[tuple[int, list[int]]], list[tuple[int, int]]]:
    """Order of elimination (fewest neighbours first) with the rows each step touches, and the filled lower
    pattern of the balance matrix."""
    present = counts != 0
    neighbours = {
        i: {j for j in range(counts.shape[1]) if j != i and (present[:, i] & present[:, j]).any()}
        for i in range(counts.shape[1])
    }
    pattern = {(max(i, j), min(i, j)) for i, near in neighbours.items() for j in near | {i}}
    order = []
    while neighbours:
        # the proton meets everything: leave it to the end so that it cannot fill the matrix
        k = min(neighbours, key=lambda i: (i == 0, len(neighbours[i]), i))
        near = sorted(neighbours.pop(k))
        order.append((k, near))
        for i in near:
            neighbours[i] = (neighbours[i] | set(near)) - {i, k}
            pattern |= {(max(i, j), min(i, j)) for j in near}
    return order, sorted(pattern)
