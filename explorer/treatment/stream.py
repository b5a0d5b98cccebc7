"""A flowing water, and what can be done with it without a solid or gas leaving: mix, split, dose, warm.

What reacts at once does so wherever waters or chemicals meet: chlorine with ammonia and with what removes it
(:mod:`explorer.treatment.chlorine`), coagulant metal to floc (:mod:`explorer.treatment.floc`).
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from enum import IntEnum

import numpy as np
from numpy.typing import ArrayLike

from explorer.chemistry import System
from explorer.chemistry.elements import molar_mass
from explorer.treatment.chlorine import completed_chlorine
from explorer.treatment.floc import HYDROXIDES, flocculate


class Problem(IntEnum):
    """Why a point has no answer, as kept in ``Stream.problem``."""

    NONE = 0
    NOT_SOLVED = 1
    IMPOSSIBLE_ANALYSIS = 2
    ALKALINITY_EXHAUSTED = 3
    OUTSIDE_WINDOW = 4
    NEGATIVE = 5


PROBLEMS: dict[int, str] = {
    Problem.NONE: "",
    Problem.NOT_SOLVED: "no equilibrium was found",
    Problem.IMPOSSIBLE_ANALYSIS: "no water has the entered analysis",
    Problem.ALKALINITY_EXHAUSTED: "alkalinity exhausted: add alkali first",
    Problem.OUTSIDE_WINDOW: "the pH is below the window in which the hydroxide forms",
    Problem.NEGATIVE: "more is taken out than the water holds",
}
"""The same in words."""

MENDABLE = (Problem.ALKALINITY_EXHAUSTED, Problem.OUTSIDE_WINDOW)
"""Problems of a floc that a later dose of alkali puts right as long as the floc is suspended."""


@dataclass(frozen=True, eq=False)
class Stream:
    """One water at one place of the plant, for any number of points at once.

    totals: (n, *shape) mol/L, dissolved. temperature: °C, flow: m³/h, both broadcast against ``shape``.
    solids: mg/L dry by name of the solid, formed on the way here, whether they have left since or not.
    floc: the part of the hydroxides still suspended, mol/L. problem: a :class:`Problem`, 0 where all is
    well; the first problem met stays.
    """

    system: System
    totals: np.ndarray
    temperature: ArrayLike
    flow: ArrayLike = np.nan
    solids: Mapping[str, ArrayLike] = field(default_factory=dict)
    floc: Mapping[str, ArrayLike] = field(default_factory=dict)
    problem: ArrayLike = Problem.NONE

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the points."""
        return np.broadcast_shapes(self.totals.shape[1:], *(np.shape(part) for part in self._parts()))

    def _parts(self) -> tuple[ArrayLike, ...]:
        return (self.temperature, self.flow, self.problem, *self.solids.values(), *self.floc.values())

    def total(self, key: str) -> np.ndarray:
        """One row of the totals."""
        return self.totals[self.system.index[key]]

    def flagged(self, where: ArrayLike, problem: Problem) -> "Stream":
        """The stream with a problem noted at the points ``where`` that had none."""
        return replace(self, problem=np.where((np.asarray(self.problem) == 0) & where, problem, self.problem))

    def with_solid(self, name: str, formed: ArrayLike, formula: str) -> "Stream":
        """The stream with ``formed`` [mol/L] of a solid added to those formed so far."""
        dry = 1000 * molar_mass(formula) * np.asarray(formed, float)
        return replace(self, solids={**self.solids, name: self.solids.get(name, 0.0) + dry})

    def at(self, shape: tuple[int, ...], points: ArrayLike = slice(None)) -> "Stream":
        """Some points of the stream, spread to ``shape`` and numbered through it, as a flat stream."""

        def pick(part: ArrayLike) -> np.ndarray:
            return np.broadcast_to(part, shape).ravel()[points]

        rows = len(self.totals)
        totals = np.broadcast_to(lifted(self.totals, len(shape)), (rows, *shape)).reshape(rows, -1)
        return Stream(
            self.system,
            totals[:, points],
            pick(self.temperature),
            pick(self.flow),
            {name: pick(part) for name, part in self.solids.items()},
            {name: pick(part) for name, part in self.floc.items()},
            pick(self.problem),
        )


def lifted(totals: np.ndarray, dimensions: int) -> np.ndarray:
    """Totals with axes added behind the rows, so that their points broadcast with ``dimensions`` axes."""
    missing = max(dimensions - (totals.ndim - 1), 0)
    return totals.reshape(totals.shape[:1] + (1,) * missing + totals.shape[1:])


def blend(streams: Sequence[Stream], fractions: Sequence[ArrayLike] | None = None) -> Stream:
    """Streams mixed: totals, heat and solids in proportion; then what meets reacts.

    fractions: of one, each of any shape, adding to one; left out, they follow from the flows. The heat
    capacities of all waters are taken as equal. A problem in any stream that takes part is a problem of
    the blend. The flow is the sum of the flows.
    """
    if fractions is None:
        whole = sum(np.asarray(stream.flow, float) for stream in streams)
        fractions = [stream.flow / whole for stream in streams]
    parts = [
        _scaled(stream, np.asarray(fraction, float))
        for stream, fraction in zip(streams, fractions, strict=True)
    ]
    problem = parts[0].problem
    for part in parts[1:]:
        problem = np.where(problem == 0, part.problem, problem)
    dimensions = max(part.totals.ndim - 1 for part in parts)
    mixed = Stream(
        streams[0].system,
        sum(lifted(part.totals, dimensions) for part in parts),
        sum(part.temperature for part in parts),
        sum(np.asarray(stream.flow, float) for stream in streams),
        _summed([part.solids for part in parts]),
        _summed([part.floc for part in parts]),
        problem,
    )
    return _reacted(mixed)


def _scaled(stream: Stream, fraction: np.ndarray) -> Stream:
    """What a stream brings into a blend of which it makes up ``fraction``."""
    used = fraction != 0

    def scale(values: ArrayLike) -> np.ndarray:
        # A stream without share must not count, even where it could not be solved (0 × nan).
        return np.where(used, fraction * np.asarray(values, float), 0.0)

    return Stream(
        stream.system,
        scale(lifted(stream.totals, fraction.ndim)),
        scale(stream.temperature),
        stream.flow,
        {name: scale(values) for name, values in stream.solids.items()},
        {name: scale(values) for name, values in stream.floc.items()},
        np.where(used, stream.problem, Problem.NONE),
    )


def _summed(parts: Sequence[Mapping[str, np.ndarray]]) -> dict[str, np.ndarray]:
    names = dict.fromkeys(name for part in parts for name in part)
    return {name: sum(part.get(name, 0.0) for part in parts) for name in names}


def split(stream: Stream, fraction: ArrayLike) -> tuple[Stream, Stream]:
    """A side stream taking ``fraction`` (of one) of the flow, and the rest."""
    fraction = np.asarray(fraction, float)
    flow = np.asarray(stream.flow, float)
    return replace(stream, flow=flow * fraction), replace(stream, flow=flow * (1 - fraction))


def dose(stream: Stream, vector: np.ndarray, moles: ArrayLike) -> Stream:
    """A chemical added: ``moles`` [mol/L, any shape] times its totals ``vector`` (n,); what meets reacts.

    The volume of the chemical is neglected. Points where a total would fall below zero (a negative dose) are
    flagged.
    """
    moles = np.asarray(moles, float)
    totals = lifted(stream.totals, moles.ndim)
    totals = totals + vector.reshape((-1,) + (1,) * (totals.ndim - 1)) * moles
    amounts = np.arange(len(vector)) != stream.system.index["alkalinity"]
    negative = (totals[amounts] < 0).any(axis=0)
    coagulant = {
        solid: stream.floc.get(solid, 0.0)
        for solid, hydroxide in HYDROXIDES.items()
        if vector[stream.system.index[hydroxide.metal]]
    }
    dosed = replace(stream, totals=totals, floc={**stream.floc, **coagulant})
    return _reacted(dosed.flagged(negative, Problem.NEGATIVE))


def set_temperature(stream: Stream, temperature: ArrayLike) -> Stream:
    """The stream warmed or cooled to a temperature [°C]; only floc answers to it."""
    return _flocculated(replace(stream, temperature=np.asarray(temperature, float)))


def _reacted(stream: Stream) -> Stream:
    return _flocculated(replace(stream, totals=completed_chlorine(stream.totals, stream.system)))


def _flocculated(stream: Stream) -> Stream:
    """The stream with its floc brought to equilibrium, and its problems with the floc as they are now."""
    if not stream.floc:
        return stream
    after = flocculate(stream.system, stream.totals, stream.temperature, stream.floc)
    problem = np.where(np.isin(stream.problem, MENDABLE), Problem.NONE, stream.problem)
    result = replace(stream, totals=after.totals, floc=after.floc, problem=problem)
    for solid, amount in after.floc.items():
        result = result.with_solid(solid, amount - stream.floc[solid], HYDROXIDES[solid].formula)
    return (
        result.flagged(~after.solved, Problem.NOT_SOLVED)
        .flagged(after.exhausted, Problem.ALKALINITY_EXHAUSTED)
        .flagged(after.too_low, Problem.OUTSIDE_WINDOW)
    )
