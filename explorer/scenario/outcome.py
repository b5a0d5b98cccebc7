"""The answer of an evaluation: every stage of the plant, at every point."""

from collections.abc import Mapping
from functools import cached_property
from types import MappingProxyType

import numpy as np

from explorer.chemistry import Solution
from explorer.scenario.alarms import alarms_of
from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.held_dials import DialGoal, HeldDial
from explorer.scenario.holds import told
from explorer.scenario.model import Target
from explorer.scenario.operations import Dose
from explorer.scenario.readouts import READOUTS
from explorer.scenario.stage import BLEND, FINISHED, Stage
from explorer.treatment.notes import Note

__all__ = ["BLEND", "FINISHED", "Outcome"]

HELD_SLACK = 10
"""Slacks of the readout within which a held dial meets its goal."""

WHERE = {FINISHED: "in the finished water", BLEND: "in the blend"}
NEAREST = "the dial stands where it comes nearest"


class Outcome:
    """Stages in flow order (each source and its train, the blend, the common train), all of one ``shape``.

    Nothing is solved before it is asked for. Results come in the units of their readouts, nan where there is
    no answer; :meth:`reasons` says why.

    ``dosing``: what each dose step adds, by id. ``parts``: of each water in service in the blend (0 to 1), by
    id. ``ends``: the stage in which each water reaches the blend. ``inputs``: every dial value by address.
    """

    def __init__(
        self,
        shape: tuple[int, ...],
        season: str,
        stages: tuple[Stage, ...],
        doses: Mapping[str, Dose],
        targets: tuple[Target, ...],
        notes: list[Note],
        parts: Mapping[str, np.ndarray],
        ends: Mapping[str, Stage],
        inputs: Mapping[str, np.ndarray],
        goals: Mapping[str, tuple[DialGoal, str]] = MappingProxyType({}),
    ) -> None:
        self.shape, self.season, self.stages = shape, season, stages
        self.dosing, self.parts, self.ends, self.inputs = doses, parts, ends, inputs
        self._targets, self._notes, self._goals = targets, notes, goals
        self._by_id = {stage.id: stage for stage in stages} | {FINISHED: stages[-1]}

    def __contains__(self, id: str) -> bool:
        """Whether there is a stage with this id."""
        return id in self._by_id

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

    def stands(self, address: str) -> np.ndarray:
        """Where a dial stands [its entered unit], in the outcome's shape: as entered or turned, as computed
        where it is held, or as the other shares leave it. Raises KeyError for an unknown address."""
        parts = address.split(".")
        if parts[-1] == "share" and parts[1] in self.parts:
            value = 100 * self.parts[parts[1]]
        elif address not in self.inputs and parts[-1] == "dose":
            value = self.dosing[parts[-2]].value
        else:
            value = self.inputs[address]
        return np.broadcast_to(value, self.shape)

    @property
    def doses(self) -> dict[str, tuple[np.ndarray, str, bool]]:
        """By step: dose in its entered unit, the unit, and whether it is held."""
        held = {address.split(".")[-2] for address in self._goals if address.endswith(".dose")}
        return {
            step: (np.broadcast_to(dose.value, self.shape), dose.unit, dose.held or step in held)
            for step, dose in self.dosing.items()
        }

    @cached_property
    def held(self) -> dict[str, HeldDial]:
        """Dials that were computed so that readouts meet their held values, by address."""
        found = {}
        for address, (goal, unit) in self._goals.items():
            wanted = np.broadcast_to(self.inputs[goal.goal], self.shape)
            off = np.abs(self.readout(goal.readout.key, goal.stage) - wanted)
            met = off <= HELD_SLACK * goal.readout.slack
            sentence = f"cannot be brought to {{goal}} {WHERE.get(goal.stage, 'there')}: {NEAREST}"
            words = tuple(told(~met, wanted, goal.readout, sentence))
            found[address] = HeldDial(np.broadcast_to(self.inputs[address], self.shape), unit, met, words)
        return found

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
        """What there is to say: of the analyses and the holds, and every alarm."""
        holds = [Note("caution", address, text) for address, held in self.held.items() for text in held.words]
        return [*self._notes, *holds, *alarms_of(self)]
