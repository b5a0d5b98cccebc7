"""From totals to equilibrium, flat batches: chunks, stragglers and the points that have no answer."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from .constants import LN10
from .newton import ABSENT, CHUNK, SMALLEST_TOTAL, Problem, State
from .start import first_state

if TYPE_CHECKING:
    from .system import System

SOLVED, NOT_FINITE, NEGATIVE, TEMPERATURE, NO_CONVERGENCE = range(5)

REASONS: tuple[str, ...] = (
    "",
    "a total or the temperature is not a finite number",
    "more of a substance is taken away than is there",
    "the temperature is outside 0 to 60 °C",
    "the equilibrium could not be found",
)
"""Reason text by code; code 0 is a solved point."""

LOW_TEMPERATURE, HIGH_TEMPERATURE = 0.0, 60.0
"""°C; validity of the constants."""


@dataclass
class Phases:
    """Phases held at saturation: ``counts`` (P, M) over all masters, ``saturation`` (P, N) ln of the ion
    activity product."""

    counts: NDArray
    saturation: NDArray


@dataclass
class Equilibrium:
    """Flat answer: ``x`` (M, N) ln activity of every master, ``strength`` (N,) mol/L, ``formed`` (P, N) mol/L of
    the phases, ``reason`` (N,) codes, with the ``totals`` (components, N) and ``temperature`` (N,) it is for."""

    x: NDArray
    strength: NDArray
    formed: NDArray
    reason: NDArray
    totals: NDArray
    temperature: NDArray
    fixed_ph: bool


def solve(
    system: "System",
    totals: NDArray,
    temperature: NDArray,
    ph: NDArray | None = None,
    phases: Phases | None = None,
) -> Equilibrium:
    """Equilibrium of N waters: ``totals`` (components, N), ``temperature`` (N,) °C, optional fixed ``ph`` (N,).

    With ``phases`` the totals are those of water and phases together; what forms is in ``formed``.
    """
    reason = _impossible(system, totals, temperature, ph)
    masters = system.masters_in(totals)
    present = (np.where(reason == SOLVED, masters, 0.0) >= SMALLEST_TOTAL).any(axis=1)
    present[0] = True
    if phases is not None:
        present |= (phases.counts != 0.0).any(axis=0)
    kernel = system.kernel(tuple(present.tolist()))
    number = totals.shape[1]
    answer = Equilibrium(
        x=np.full((len(masters), number), ABSENT),
        strength=np.full(number, np.nan),
        formed=np.full((0 if phases is None else len(phases.counts), number), np.nan),
        reason=reason,
        totals=totals,
        temperature=temperature,
        fixed_ph=ph is not None,
    )

    def problem_at(points: NDArray) -> Problem:
        part = system.problem(totals[:, points], temperature[points], None if ph is None else ph[points])
        part.log_k, part.totals = part.log_k[kernel.species], part.totals[kernel.masters]
        if phases is not None:
            part.phases = phases.counts[:, kernel.masters]
            part.saturation = phases.saturation[:, points]
        return part

    def iterate(points: NDArray, state: State | None, enough: float) -> tuple[NDArray, State]:
        """Run some points; returns those left over and their state."""
        part = problem_at(points)
        if state is None:
            start = kernel.ladder.ph(part) if ph is None else part.ph
            state = first_state(kernel.newton, part, start)
        converged = kernel.newton.run(part, state, enough)
        solved = points[converged]
        answer.x[np.ix_(kernel.masters, solved)] = state.x[:, converged]
        answer.strength[solved] = state.strength[converged]
        answer.formed[:, solved] = state.formed[:, converged]
        return points[~converged], state.take(~converged)

    waiting = np.flatnonzero(reason == SOLVED)
    chunks = [waiting[i : i + CHUNK] for i in range(0, len(waiting), CHUNK)]
    # the last few points of every chunk are finished together: a step costs much the same for 5 as for 500
    left = [iterate(chunk, None, 0.85) for chunk in chunks]
    if left:
        points = np.concatenate([p for p, _ in left])
        state = State(*(np.concatenate([getattr(s, n) for _, s in left], axis=-1) for n in ("x", "strength", "formed")))
        for first in range(0, len(points), CHUNK):
            some = slice(first, first + CHUNK)
            failed, _ = iterate(points[some], state.take(some), 1.0)
            reason[failed] = NO_CONVERGENCE
    answer.x[:, reason != SOLVED] = np.nan
    return answer


def buffer_intensity(system: "System", answer: Equilibrium) -> NDArray:
    """d(alkalinity)/d(pH) at constant totals and temperature, eq/L per pH; (N,)."""
    result = np.full(len(answer.strength), np.nan)
    solved = np.flatnonzero(answer.reason == SOLVED)
    present = (answer.x[:, solved] > ABSENT / 2).any(axis=1)
    kernel = system.kernel(tuple(present.tolist()))
    for first in range(0, len(solved), CHUNK):
        points = solved[first : first + CHUNK]
        problem = system.problem(answer.totals[:, points], answer.temperature[points])
        problem.log_k, problem.totals = problem.log_k[kernel.species], problem.totals[kernel.masters]
        state = State(answer.x[np.ix_(kernel.masters, points)], answer.strength[points], np.empty((0, len(points))))
        result[points] = LN10 / kernel.newton.proton_response(problem, state)
    return result


def _impossible(system: "System", totals: NDArray, temperature: NDArray, ph: NDArray | None) -> NDArray:
    """Reason codes of points that cannot be asked."""
    reason = np.zeros(totals.shape[1], dtype=np.int8)
    amounts = np.delete(totals, system.index["alkalinity"], axis=0)
    reason[(amounts < 0.0).any(axis=0)] = NEGATIVE
    reason[(temperature < LOW_TEMPERATURE) | (temperature > HIGH_TEMPERATURE)] = TEMPERATURE
    finite = np.isfinite(amounts).all(axis=0) & np.isfinite(temperature)
    finite &= np.isfinite(totals[system.index["alkalinity"]] if ph is None else ph)
    reason[~finite] = NOT_FINITE
    return reason
