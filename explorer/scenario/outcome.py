"""The answer of an evaluation: every stage of the plant, at every point."""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from explorer.chemistry import Solution
from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.model import Target
from explorer.scenario.operations import Dose
from explorer.scenario.readouts import READOUTS
from explorer.scenario.stage import Stage
from explorer.treatment.chlorine import KINETICS_NOTE
from explorer.treatment.notes import Note

FINISHED, BLEND = "finished", "blend"


class Outcome:
    """Stages in flow order (each source and its train, the blend, the common train), all of one ``shape``.

    Nothing is solved before it is asked for. Results come in the units of their readouts, nan where there is
    no answer; :meth:`reasons` says why.
    """

    def __init__(
        self,
        shape: tuple[int, ...],
        season: str,
        stages: tuple[Stage, ...],
        doses: Mapping[str, Dose],
        targets: tuple[Target, ...],
        notes: list[Note],
    ) -> None:
        self.shape, self.season, self.stages = shape, season, stages
        self.dosing = doses
        self._targets, self._notes = targets, notes
        self._by_id = {stage.id: stage for stage in stages} | {FINISHED: stages[-1]}

    def stage(self, id: str = FINISHED) -> Stage:
        """A stage by the id of its water or step, or "blend" or "finished". Raises ScenarioError."""
        if id not in self._by_id:
            raise ScenarioError("", unknown(id, "a stage", self._by_id))
        return self._by_id[id]

    def solution(self, stage: str = FINISHED) -> Solution:
        """Equilibrium of a stage; its shape may be smaller than that of the outcome, and broadcasts to it."""
        return self.stage(stage).solution

    def readout(self, key: str, stage: str = FINISHED) -> np.ndarray:
        """A readout at a stage, in the readout's unit and the outcome's shape; nan where there is no answer.

        Raises ScenarioError for an unknown readout or stage.
        """
        if key not in READOUTS:
            raise ScenarioError("", unknown(key, "a readout", READOUTS))
        return np.broadcast_to(self.stage(stage).readout(key), self.shape)

    def reasons(self, stage: str = FINISHED, readout: str | None = None) -> np.ndarray:
        """Why a point has no equilibrium (or no such readout), "" where it has; in the outcome's shape."""
        return np.broadcast_to(self.stage(stage).reasons(readout), self.shape)

    @property
    def doses(self) -> dict[str, tuple[np.ndarray, str, bool]]:
        """By step: dose in its entered unit, the unit, and whether it is held."""
        return {
            step: (np.broadcast_to(dose.value, self.shape), dose.unit, dose.held)
            for step, dose in self.dosing.items()
        }

    def targets(self) -> list[tuple[Target, np.ndarray, np.ndarray, np.ndarray]]:
        """Every entered target with value, whether it is met, and the margin to the nearer limit (negative
        outside), all at the finished water."""
        found = []
        for target in self._targets:
            value = self.readout(target.readout)
            margins = [value - target.low] if target.low is not None else []
            margins += [target.high - value] if target.high is not None else []
            margin = np.min(margins, axis=0)
            found.append((target, value, margin >= -READOUTS[target.readout].slack, margin))
        return found

    @cached_property
    def notes(self) -> list[Note]:
        """What there is to say: of the analyses, the holds, points without answer, and limits of validity."""
        finished = self.stage()
        notes = list(self._notes)
        notes += _unanswered(self.reasons())
        if any(np.any(stage.total("monochloramine") > 0) for stage in self.stages):
            notes.append(Note("info", FINISHED, KINETICS_NOTE))
        for limit in LIMITS:
            value = finished.readout(limit.key)
            outside = (value < limit.low) | (value > limit.high)
            if outside.any():
                notes.append(Note("caution", FINISHED, limit.text))
        return notes


@dataclass(frozen=True)
class Limit:
    """Where a readout of the finished water calls for a caution."""

    key: str
    low: float
    high: float
    text: str


LIMITS = (
    Limit("ionic_strength", -np.inf, 0.1, "ionic strength above 0.1 mol/L: results are a guide only"),
    Limit("ph", 4.0, 11.5, "pH outside 4 to 11.5: beyond what the constants are meant for"),
    Limit("buffer_intensity", 0.2, np.inf, "buffer intensity below 0.2 mmol/L per pH: the pH is hard to hold;"
          " small dose errors and carbon dioxide from the air move it"),
)  # fmt: skip
"""Common practice; the Davies equation for ionic strength."""


def _unanswered(reasons: np.ndarray) -> list[Note]:
    """One note for each reason that keeps points of the finished water from an answer."""
    texts, counts = np.unique(reasons.astype(str), return_counts=True)
    return [
        Note("error", FINISHED, text + (f" ({count} of {reasons.size} points)" if reasons.size > 1 else ""))
        for text, count in zip(texts.tolist(), counts.tolist(), strict=True)
        if text
    ]
