"""One place of the plant: the water there, and its readouts."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import IntEnum

import numpy as np
from numpy.typing import ArrayLike

from explorer.chemistry import Solution, System
from explorer.chemistry.equilibrium import REASONS
from explorer.scenario.readouts import READOUTS
from explorer.treatment.stream import PROBLEMS, Stream

BLEND, FINISHED = "blend", "finished"
"""Ids of the stage in which the waters meet, and of the last one."""


class PlantProblem(IntEnum):
    """Problems of the plant as a whole, beside those of a single water in ``Problem``."""

    SHARES = 100
    NO_FLOW = 101
    OUT_OF_RANGE = 102


PROBLEM_WORDS: Mapping[int, str] = PROBLEMS | {
    PlantProblem.SHARES: "the shares do not add to 100 %",
    PlantProblem.NO_FLOW: "no water flows",
    PlantProblem.OUT_OF_RANGE: "a dial is turned beyond what is allowed for it",
}
"""Why a point has no answer, by the codes of ``Stage.problem``."""


@dataclass
class Worked:
    """What has been worked out about a water so far: its equilibrium, and readouts by key."""

    solution: Solution | None = None
    values: dict[str, np.ndarray] = field(default_factory=dict)


class Stage:
    """A water at one place, for any number of points. Everything is worked out when asked for, and kept.

    ``stream``: what flows there. ``cost``: price of the chemicals so far per ML of this water, nan where no
    price is entered. ``worked``: shared by stages that differ in nothing but their flow. Arrays broadcast
    against the shape of the outcome they belong to.
    """

    def __init__(
        self,
        id: str,
        name: str,
        kind: str,
        stream: Stream,
        cost: ArrayLike = np.nan,
        worked: Worked | None = None,
    ) -> None:
        self.id, self.name, self.kind = id, name, kind
        self.stream = stream
        self.cost = np.asarray(cost, float)
        self._worked = Worked() if worked is None else worked

    @property
    def system(self) -> System:
        """The chemical system."""
        return self.stream.system

    @property
    def totals(self) -> np.ndarray:
        """Conserved totals (n, *shape), mol/L, alkalinity eq/L."""
        return self.stream.totals

    @property
    def temperature(self) -> np.ndarray:
        """°C."""
        return np.asarray(self.stream.temperature, float)

    @property
    def flow(self) -> np.ndarray:
        """m³/h, nan where no flow is given."""
        return np.asarray(self.stream.flow, float)

    @property
    def solids(self) -> Mapping[str, np.ndarray]:
        """Solids formed so far and carried along, mg/L dry, by name."""
        return {name: np.asarray(amount, float) for name, amount in self.stream.solids.items()}

    @property
    def problem(self) -> np.ndarray:
        """Codes into :data:`PROBLEM_WORDS`."""
        return np.asarray(self.stream.problem)

    @property
    def solution(self) -> Solution:
        """The equilibrium of the water."""
        if self._worked.solution is None:
            self._worked.solution = self.system.solve(self.totals, self.temperature)
        return self._worked.solution

    def total(self, key: str) -> np.ndarray:
        """One row of the totals."""
        return self.stream.total(key)

    def readout(self, key: str) -> np.ndarray:
        """A readout in its unit; nan where there is no answer. Raises KeyError for an unknown key."""
        values = self._worked.values
        if key not in values:
            with np.errstate(invalid="ignore", divide="ignore", over="ignore"):
                value = np.asarray(READOUTS[key].compute(self), float)
            values[key] = np.where((self.problem == 0) & np.isfinite(value), value, np.nan)
        return values[key]

    def reasons(self, key: str | None = None) -> np.ndarray:
        """Why a point has no equilibrium, or with a readout's ``key`` no such value; "" where it has."""
        problem = self.problem
        words = _worded(problem, PROBLEM_WORDS)
        if key is None or READOUTS[key].equilibrium:
            unsolved = _worded(self.solution.reason, REASONS)
            words = np.where(problem == 0, unsolved, words)
        if key is not None:
            missing = np.isnan(self.readout(key)) & (words == "")
            words = np.where(missing, READOUTS[key].undefined or "there is no such value here", words)
        return words


def _worded(codes: np.ndarray, words: Mapping[int, str]) -> np.ndarray:
    """The words for an array of codes."""
    known, position = np.unique(codes, return_inverse=True)
    return np.asarray([words[int(code)] for code in known], dtype=object)[position.reshape(np.shape(codes))]
