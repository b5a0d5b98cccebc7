"""Batched Newton iteration for the equilibrium of many waters at once.

Unknowns are ln of the master activities, the ionic strength and, where phases are held at saturation, the
amount of each that has formed. With concentrations ``c = exp(ln k + counts·x − ln γ)`` the balance matrix
``countsᵀ diag(c) counts`` is symmetric and positive definite, so it is factored without pivoting; the
ionic strength and the phases are bordered onto it. The sparsity is worked out once per set of components
present, and each step of the elimination is one NumPy operation over the whole batch.

Two details make it quick and hard to break. The balance residual ``T − S`` is used in the form
``S ln(T/S)``, which has the same derivative at the solution and is exact in one step for a component on its
own. The proton balance has terms of both signs; there the two sides are compared the same way.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from .activity import davies, neutral
from .constants import LN10
from .organics import END_POINT_FRACTION, dissociated

STEP_TOLERANCE = 2e-7
"""Largest change of any ln activity in the last step; the error after it is of the order of its square."""
MAX_STEP = 2.0
"""Largest change of any ln activity in one step."""
NEAR = 0.3
"""Largest change of any ln activity for which the ionic strength is changed with Newton too."""
MAX_ITERATIONS = 60
CHUNK = 1024
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
    acid groups; ``ph`` (N,) fixes the pH and drops the proton balance; ``phases`` (P, M) counts and
    ``saturation`` (P, N) ln activity products of phases held at equilibrium.
    """

    log_k: NDArray
    totals: NDArray
    slope: NDArray
    inert: NDArray
    organic: NDArray
    ph: NDArray | None = None
    phases: NDArray | None = None
    saturation: NDArray | None = None

    def __len__(self) -> int:
        return self.totals.shape[1]

    def take(self, points: NDArray | slice) -> "Problem":
        """The same problem for some of its points."""
        return Problem(
            *(None if a is None else a[..., points] for a in
              (self.log_k, self.totals, self.slope, self.inert, self.organic, self.ph)),
            self.phases,
            None if self.saturation is None else self.saturation[:, points],
        )  # fmt: skip


@dataclass
class State:
    """Unknowns of a batch: ``x`` (M, N) ln activities, ``strength`` (N,), ``formed`` (P, N) mol/L of phases."""

    x: NDArray
    strength: NDArray
    formed: NDArray

    def take(self, points: NDArray) -> "State":
        return State(self.x[:, points], self.strength[points], self.formed[:, points])

    def put(self, points: NDArray, other: "State") -> None:
        self.x[:, points] = other.x
        self.strength[points] = other.strength
        self.formed[:, points] = other.formed


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


class Newton:
    """The iteration for one set of masters; H+ is master 0.

    ``counts`` (S, M) integers as floats, ``charges`` (S,). Instances hold no state of a problem.
    """

    def __init__(self, counts: NDArray, charges: NDArray) -> None:
        self.counts, self.charges = counts, charges
        self.masters = counts.shape[1]
        self.exponents = np.hstack([counts, (charges**2)[:, None], -(charges == 0.0).astype(float)[:, None]])
        self.order, self.pattern = _elimination(counts)
        self.position = {pair: row for row, pair in enumerate(self.pattern)}
        self.position |= {(j, i): row for (i, j), row in self.position.items()}
        z2 = charges**2
        uncharged = (charges == 0).astype(float)
        products = [counts[:, i] * counts[:, j] for i, j in self.pattern]
        rows = {
            "matrix": np.array(products),
            "sums": counts.T,
            "proton": np.stack([np.maximum(counts[:, 0], 0), np.maximum(-counts[:, 0], 0)]),
            "charged": counts.T * z2,
            "uncharged": counts.T * uncharged,
            "strength": np.stack([0.5 * z2, 0.5 * z2**2]),
        }
        self.weights = np.vstack(list(rows.values()))
        ends = np.cumsum([len(r) for r in rows.values()])
        self.rows = {
            name: slice(end - len(r), end) for (name, r), end in zip(rows.items(), ends, strict=True)
        }
        self.diagonal = np.array([self.position[i, i] for i in range(self.masters)])
        self.proton_pairs = np.array([row for row, (i, j) in enumerate(self.pattern) if 0 in (i, j)])

    def concentrations(self, problem: Problem, state: State) -> NDArray:
        """mol/L of every species; (S, N)."""
        factor, _ = davies(problem.slope, state.strength)
        uncharged, _ = neutral(state.strength)
        log_c = self.exponents @ np.vstack([state.x, factor, uncharged])
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
        """Improve ``state`` in place; returns the largest change of any ln activity, (N,)."""
        linear = self.linearise(problem, state)
        phases = problem.phases if problem.phases is not None else np.empty((0, self.masters))
        columns = np.empty((self.masters, 2 + len(phases), len(problem)))
        columns[:, 0], columns[:, 1] = linear.residual, linear.strength_column
        columns[:, 2:] = -phases.T[:, :, None]
        if problem.ph is not None:
            columns[0, 2:] = 0.0
        self.eliminate(linear.matrix, columns)

        # the border: one row for the ionic strength, one for each phase; unknowns dI and the dξ
        products = np.concatenate(
            [
                np.einsum("mn,mrn->rn", linear.strength_row, columns)[None],
                np.tensordot(phases, columns, axes=1),
            ]
        )
        products[0, 1] += linear.strength_corner
        target = -products[:, 0]
        target[0] += linear.strength_residual
        if len(phases):
            target[1:] += problem.saturation - phases @ state.x
            extra = np.linalg.solve(np.moveaxis(products[:, 1:], -1, 0), target.T[..., None])[..., 0].T
        else:
            extra = target / np.where(products[:, 1] == 0.0, 1e-300, products[:, 1])
        change = columns[:, 0] + np.einsum("mrn,rn->mn", columns[:, 1:], extra)
        largest = np.abs(change).max(axis=0)
        largest = np.where(np.isfinite(largest), largest, np.inf)
        state.x += np.minimum(1.0, MAX_STEP / np.maximum(largest, 1e-300)) * change
        near = largest < NEAR
        # far from the solution the Newton change of the ionic strength means nothing: go half way (in ln) to
        # the ionic strength of the species at hand
        found = np.clip(state.strength - linear.strength_residual, 1e-9, 1.0)
        state.strength = np.where(
            near,
            np.clip(state.strength + extra[0], 0.2 * state.strength, 5.0 * state.strength),
            np.sqrt(state.strength * found),
        )
        state.formed += extra[1:]
        return np.maximum(largest, np.abs(extra[0]) / state.strength)

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
        sums = self.weights @ c
        matrix = sums[self.rows["matrix"]]
        balance = sums[self.rows["sums"]]
        _, factor_slope = davies(problem.slope, state.strength)
        _, uncharged_slope = neutral(state.strength)
        charged = sums[self.rows["charged"]]
        column = sums[self.rows["uncharged"]] * uncharged_slope - charged * factor_slope
        half_z2, half_z4 = sums[self.rows["strength"]]
        row = 0.5 * charged
        strength_residual = state.strength - half_z2 - problem.inert
        corner = half_z4 * factor_slope - 1.0

        totals = problem.totals
        if problem.phases is not None:
            totals = totals - problem.phases.T @ state.formed
        residual = totals - balance
        logarithmic = (totals[1:] > 0.0) & (balance[1:] > 0.0)
        ratio = np.where(logarithmic, totals[1:], 1.0) / np.where(logarithmic, balance[1:], 1.0)
        residual[1:] = np.where(logarithmic, balance[1:] * np.log(ratio), residual[1:])

        gaining, losing = sums[self.rows["proton"]]
        ph = -state.x[0] / LN10
        if problem.organic.any():
            fraction, slope = dissociated(ph)
            ions = problem.organic * fraction
            ion_slope = problem.organic * slope / LN10
            losing = losing + ions
            offset = problem.organic * END_POINT_FRACTION
            matrix[self.diagonal[0]] += ion_slope
            row[0] -= 0.5 * ion_slope
            strength_residual -= 0.5 * ions
        else:
            offset = 0.0
        alkalinity = offset - totals[0]
        have = losing + np.maximum(-alkalinity, 0.0)
        want = gaining + np.maximum(alkalinity, 0.0)
        with np.errstate(divide="ignore", invalid="ignore"):
            residual[0] = np.maximum(have, want) * np.log(have / want)

        if problem.ph is not None:
            matrix[self.proton_pairs] = 0.0
            matrix[self.diagonal[0]] = 1.0
            residual[0] = -LN10 * problem.ph - state.x[0]
            column[0] = 0.0
        matrix[self.diagonal] += balance == 0.0
        return Linear(matrix, residual, column, row, strength_residual, corner)

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
