"""A flowing water: conserved totals, temperature, flow, and the solids formed in it so far."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from enum import IntEnum

import numpy as np
from numpy.typing import ArrayLike

from explorer.chemistry import System
from explorer.treatment.chlorine import completed_chlorine


class Problem(IntEnum):
    """Why a point has no answer, as kept in ``Stream.problem``."""

    NONE = 0
    NOT_SOLVED = 1
    IMPOSSIBLE_ANALYSIS = 2
    ALKALINITY_EXHAUSTED = 3
    OUTSIDE_WINDOW = 4
    NEGATIVE = 5
    UNREACHABLE = 6


PROBLEMS: dict[int, str] = {
    Problem.NONE: "",
    Problem.NOT_SOLVED: "no equilibrium was found",
    Problem.IMPOSSIBLE_ANALYSIS: "no water has the entered analysis",
    Problem.ALKALINITY_EXHAUSTED: "alkalinity exhausted: add alkali first",
    Problem.OUTSIDE_WINDOW: "the pH is outside the window in which the hydroxide forms",
    Problem.NEGATIVE: "more is taken out than the water holds",
    Problem.UNREACHABLE: "the stated end point cannot be reached",
}
"""The same in words."""


@dataclass(frozen=True)
class Stream:
    """One water at one place of the plant, for any number of points at once.

    totals: (n, *shape) mol/L, in suspended solids not included. temperature: °C, flow: m³/h, both broadcast
    against ``shape``. solids: mg/L dry by name of the solid, formed so far and carried along. problem:
    number from :data:`PROBLEMS`, 0 where all is well; the first problem met stays.
    """

    system: System
    totals: np.ndarray
    temperature: ArrayLike
    flow: ArrayLike = np.nan
    solids: Mapping[str, ArrayLike] = field(default_factory=dict)
    problem: ArrayLike = Problem.NONE

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the points."""
        parts = (self.temperature, self.flow, self.problem, *self.solids.values())
        return np.broadcast_shapes(self.totals.shape[1:], *(np.shape(part) for part in parts))

    def total(self, key: str) -> np.ndarray:
        """One row of the totals."""
        return self.totals[self.system.index[key]]

    def flagged(self, where: ArrayLike, problem: Problem) -> "Stream":
        """The stream with a problem noted at the points ``where`` that had none."""
        return replace(self, problem=np.where((np.asarray(self.problem) == 0) & where, problem, self.problem))


def blend(streams: Sequence[Stream], fractions: Sequence[ArrayLike] | None = None) -> Stream:
    """Streams mixed: totals, heat and solids in proportion; then chlorine and ammonia react where they meet.

    fractions: of one, each of any shape, adding to one; left out, they follow from the flows. The heat
    capacities of all waters are taken as equal. A problem in any stream that takes part is a problem of
    the blend. The flow is the sum of the flows.
    """
    system = streams[0].system
    if fractions is None:
        whole = sum(np.asarray(stream.flow, float) for stream in streams)
        fractions = [stream.flow / whole for stream in streams]
    fractions = [np.asarray(fraction, float) for fraction in fractions]
    # A stream without share must not count, even where it could not be solved (0 × nan).
    parts = [_scaled(stream, fraction) for stream, fraction in zip(streams, fractions, strict=True)]
    names = dict.fromkeys(name for part in parts for name in part.solids)
    problem = parts[0].problem
    for part in parts[1:]:
        problem = np.where(problem == 0, part.problem, problem)
    return Stream(
        system,
        completed_chlorine(sum(part.totals for part in parts), system),
        sum(part.temperature for part in parts),
        sum(np.asarray(stream.flow, float) for stream in streams),
        {name: sum(part.solids.get(name, 0.0) for part in parts) for name in names},
        problem,
    )


def _scaled(stream: Stream, fraction: np.ndarray) -> Stream:
    """What a stream brings into a blend of which it makes up ``fraction``."""
    used = fraction != 0

    def scale(values: ArrayLike) -> np.ndarray:
        return np.where(used, fraction * np.asarray(values, float), 0.0)

    return Stream(
        stream.system,
        scale(_spread(stream.totals, fraction)),
        scale(stream.temperature),
        stream.flow,
        {name: scale(values) for name, values in stream.solids.items()},
        np.where(used, stream.problem, Problem.NONE),
    )


def _spread(totals: np.ndarray, against: np.ndarray) -> np.ndarray:
    """Totals with axes added behind the rows so that the points broadcast with ``against``."""
    missing = against.ndim - (totals.ndim - 1)
    return totals.reshape(totals.shape[:1] + (1,) * max(missing, 0) + totals.shape[1:])


def dose(stream: Stream, vector: np.ndarray, moles: ArrayLike) -> Stream:
    """A chemical added: ``moles`` [mol/L, any shape] times its totals ``vector`` (n,).

    Chlorine, ammonia and dechlorinating agents react at once. The volume of the chemical is neglected.
    Points where a total would fall below zero (a negative dose) are flagged.
    """
    moles = np.asarray(moles, float)
    totals = _spread(stream.totals, moles)
    added = vector.reshape((-1,) + (1,) * (totals.ndim - 1)) * moles
    totals = totals + added
    amounts = np.arange(len(vector)) != stream.system.index["alkalinity"]
    negative = (totals[amounts] < 0).any(axis=0)
    return replace(stream, totals=completed_chlorine(totals, stream.system)).flagged(
        negative, Problem.NEGATIVE
    )


def set_temperature(stream: Stream, temperature: ArrayLike) -> Stream:
    """The stream warmed or cooled to a temperature [°C]; nothing is gained or lost."""
    return replace(stream, temperature=np.asarray(temperature, float))


def split(stream: Stream, fraction: ArrayLike) -> tuple[Stream, Stream]:
    """A side stream taking ``fraction`` (of one) of the flow, and the rest."""
    fraction = np.asarray(fraction, float)
    flow = np.asarray(stream.flow, float)
    return replace(stream, flow=flow * fraction), replace(stream, flow=flow * (1 - fraction))
