"""From totals to equilibrium, flat batches: chunks, stragglers and the points that have no answer."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from .constants import LN10
from .newton import ABSENT, CHUNK, SMALLEST_TOTAL, Problem, State
from .phases import CARBON_DIOXIDE
from .start import first_state

if TYPE_CHECKING:
    from .system import Kernel, System

SOLVED, NOT_FINITE, NEGATIVE, TEMPERATURE, NO_CONVERGENCE, TOO_MUCH, NO_PH = range(7)

REASONS: tuple[str, ...] = (
    "",
    "a total or the temperature is not a finite number",
    "more of a substance is taken away than is there",
    "the temperature is outside 0 to 60 °C",
    "the equilibrium could not be found",
    "there is more of a substance than water can hold",
    "the pH is outside -2 to 16",
)
"""Reason text by code; code 0 is a solved point."""

HELD_START_PH = 8.5
RETRY_PH = (8.0, 6.0, 10.0, 4.0, 12.0, 2.0)
"""Starting pH, one after the other, for points that the first guess does not lead home."""

LOW_TEMPERATURE, HIGH_TEMPERATURE = 0.0, 60.0
"""°C; validity of the constants."""

LOWEST_PH, HIGHEST_PH = -2.0, 16.0
"""Of a pH that may be asked for; no water has one beyond."""

LARGEST_TOTAL = 100.0
"""mol/L; a litre of water is 55 mol. Beyond, nothing is dissolved in water, and exponentials overflow."""


@dataclass
class Equilibrium:
    """Flat answer: ``x`` (M, N) ln activity of every master, ``strength`` (N,) mol/L, ``formed`` (N,) mol/L
    by phase, ``reason`` (N,) codes, with the dissolved ``totals`` (components, N) and the ``temperature``
    (N,)."""

    x: NDArray
    strength: NDArray
    formed: dict[str, NDArray]
    reason: NDArray
    totals: NDArray
    temperature: NDArray
    fixed_ph: bool


def solve(
    system: "System",
    totals: NDArray,
    temperature: NDArray,
    ph: NDArray | None = None,
    held: tuple[str, ...] = (),
    carbon_dioxide: NDArray | None = None,
) -> Equilibrium:
    """Equilibrium of N waters: ``totals`` (components, N), ``temperature`` (N,) °C, optional fixed ``ph``
    (N,).

    With phases ``held`` the totals are those of water and phases together; ``carbon_dioxide`` (N,) is the
    activity of CO2(aq) where the gas is held.
    """
    reason = _impossible(system, totals, temperature, ph)
    masters = system.masters_in(totals)
    present = (np.where(reason == SOLVED, masters, 0.0) >= SMALLEST_TOTAL).any(axis=1)
    present[0] = True
    kernel = system.kernel(tuple(present.tolist()), held)
    number = totals.shape[1]
    saturation = _saturation(system, kernel.phases.names, temperature, carbon_dioxide)
    unreduced = masters
    if held:
        masters = kernel.phases.reduced_totals(unreduced)
    answer = Equilibrium(
        x=np.full((len(masters), number), ABSENT),
        strength=np.full(number, np.nan),
        formed={name: np.full(number, np.nan) for name in held},
        reason=reason,
        totals=totals,
        temperature=temperature,
        fixed_ph=ph is not None,
    )

    def problem_at(points: NDArray) -> Problem:
        fixed = None if ph is None else ph[points]
        part = system.problem(kernel, totals[:, points], temperature[points], fixed)
        if held:
            part.log_k = part.log_k + kernel.carried @ saturation[:, points]
            part.totals = masters[np.ix_(kernel.masters, points)]
        return part

    def guessed(part: Problem, points: NDArray) -> State:
        if ph is not None:
            return first_state(kernel.newton, part, part.ph)
        whole = unreduced[np.ix_(kernel.whole, points)]
        start = kernel.guess.ph(whole, part.organic, temperature[points])
        if held:
            # acid water must first dissolve the solid; started acid, it would hold absurd amounts of metal
            start = np.maximum(start, HELD_START_PH)
        return first_state(kernel.newton, part, start)

    def iterate(points: NDArray, state: State | float | None, enough: float) -> tuple[NDArray, State]:
        """Run some points from a state, a pH or the best guess; returns those left over and their state."""
        part = problem_at(points)
        if state is None:
            state = guessed(part, points)
        elif not isinstance(state, State):
            state = first_state(kernel.newton, part, np.full(len(points), state) if ph is None else part.ph)
        converged = kernel.newton.run(part, state, enough)
        solved = points[converged]
        answer.x[np.ix_(kernel.masters, solved)] = state.x[:, converged]
        answer.strength[solved] = state.strength[converged]
        if held:
            c = kernel.newton.concentrations(part.take(converged), state.take(converged))
            _account(system, kernel, answer, solved, c, saturation[:, solved])
        return points[~converged], state.take(~converged)

    waiting = np.flatnonzero(reason == SOLVED)
    # the last few points of every chunk are finished together: a step costs much the same for 5 as for 500
    left = [iterate(points, None, 0.85) for points in _chunks(waiting)]
    if left:
        points = np.concatenate([p for p, _ in left])
        x = np.concatenate([state.x for _, state in left], axis=1)
        strength = np.concatenate([state.strength for _, state in left])
        order = _chunks(np.arange(len(points)))
        failed = [iterate(points[some], State(x[:, some], strength[some]), 1.0)[0] for some in order]
        for start in RETRY_PH:
            failed = [iterate(points, start, 1.0)[0] for points in failed if points.size]
        for points in failed:
            reason[points] = NO_CONVERGENCE
    unsolved = reason != SOLVED
    if unsolved.any():
        answer.x[:, unsolved] = np.nan
    return answer


def _chunks(points: NDArray) -> list[NDArray]:
    return [points[first : first + CHUNK] for first in range(0, len(points), CHUNK)]


def _saturation(
    system: "System", names: tuple[str, ...], temperature: NDArray, carbon_dioxide: NDArray | None
) -> NDArray:
    """ln of the activity product each phase holds; (P, N)."""
    rows = [
        np.log(np.maximum(carbon_dioxide, SMALLEST_TOTAL))
        if name == CARBON_DIOXIDE
        else system.network.solids[name].saturation(temperature)
        for name in names
    ]
    return np.array(rows).reshape(len(names), len(temperature))


def _account(
    system: "System", kernel: "Kernel", answer: Equilibrium, points: NDArray, c: NDArray, saturation: NDArray
) -> None:
    """Write the pivots' activities, the amounts of the phases and the dissolved totals of some points, from
    the concentrations ``c`` of the kernel's species."""
    phases = kernel.phases
    x = answer.x[:, points]
    phases.expand(x, saturation)
    answer.x[:, points] = x
    together = answer.totals[:, points]
    dissolved = system.network.counts[np.ix_(kernel.species, phases.pivots)].T @ c
    amounts = phases.amounts(system.masters_in(together)[phases.pivots] - dissolved)
    for name, counts, amount in zip(phases.names, phases.counts, amounts, strict=True):
        answer.formed[name][points] = amount
        together = system.removed(together, counts, amount)
    answer.totals[:, points] = together


def buffer_intensity(system: "System", answer: Equilibrium) -> NDArray:
    """d(alkalinity)/d(pH) at constant totals and temperature, eq/L per pH; (N,)."""
    result = np.full(len(answer.strength), np.nan)
    solved = np.flatnonzero(answer.reason == SOLVED)
    if not solved.size:
        return result
    present = (answer.x[:, solved] > ABSENT / 2).any(axis=1)
    kernel = system.kernel(tuple(present.tolist()), ())
    for points in _chunks(solved):
        problem = system.problem(kernel, answer.totals[:, points], answer.temperature[points])
        state = State(answer.x[np.ix_(kernel.masters, points)], answer.strength[points])
        result[points] = LN10 / kernel.newton.proton_response(problem, state)
    return result


def _impossible(system: "System", totals: NDArray, temperature: NDArray, ph: NDArray | None) -> NDArray:
    """Reason codes of points that cannot be asked."""
    reason = np.zeros(totals.shape[1], dtype=np.int8)
    alkalinity = totals[system.index["alkalinity"]]
    amounts = np.delete(totals, system.index["alkalinity"], axis=0)
    much = (amounts > LARGEST_TOTAL).any(axis=0)
    reason[much if ph is not None else much | (np.abs(alkalinity) > LARGEST_TOTAL)] = TOO_MUCH
    if ph is not None:
        reason[(ph < LOWEST_PH) | (ph > HIGHEST_PH)] = NO_PH
    reason[(amounts < 0.0).any(axis=0)] = NEGATIVE
    reason[(temperature < LOW_TEMPERATURE) | (temperature > HIGH_TEMPERATURE)] = TEMPERATURE
    finite = np.isfinite(amounts).all(axis=0) & np.isfinite(temperature)
    finite &= np.isfinite(alkalinity if ph is None else ph)
    reason[~finite] = NOT_FINITE
    return reason
