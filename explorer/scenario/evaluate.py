"""One function at the centre: a scenario, any dials as arrays, and what comes out all over the plant."""

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace
from functools import lru_cache
from types import MappingProxyType

import numpy as np
from numpy.typing import ArrayLike

from explorer.chemistry import System
from explorer.scenario import shares
from explorer.scenario.compile import Plan, Source, compiled
from explorer.scenario.dials import is_share, no_dial
from explorer.scenario.errors import ScenarioError
from explorer.scenario.held_dials import DialGoal, distance, find_dials
from explorer.scenario.model import Scenario
from explorer.scenario.operations import Run, added
from explorer.scenario.outcome import BLEND, Outcome
from explorer.scenario.stage import PlantProblem, Stage, Worked
from explorer.treatment.analysis import AnalysisError, Intake, Measured, analysis_totals
from explorer.treatment.stream import Problem, Stream, blend
from explorer.treatment.units import to_base

__all__ = ["Outcome", "Stage", "evaluate"]


def evaluate(
    scenario: Scenario,
    dials: Mapping[str, ArrayLike] = MappingProxyType({}),
    season: str | None = None,
) -> Outcome:
    """The plant at every combination of dial values.

    dials: values in the entered units by address; arrays of any shapes that broadcast together, whose common
    shape is that of the outcome. A dial that is not given stands where the scenario has it, or where its hold
    puts it; shares that are not given follow by the share rule. season: whose analyses count, the scenario's
    own where None.

    Raises ScenarioError for an unknown address or season, shapes that do not broadcast, and analyses that say
    too little or contradict themselves. What is impossible at single points is flagged there instead.
    """
    return follow(compiled(scenario, season), dials)


def follow(plan: Plan, dials: Mapping[str, ArrayLike] = MappingProxyType({})) -> Outcome:
    """:func:`evaluate` for a scenario that is compiled already; the plan does not change with it."""
    turned = _turned(plan, dials)
    goals = _in_force(plan, turned)
    return _followed(plan, turned | _held(plan, goals, turned) if goals else turned, goals)


def _in_force(plan: Plan, turned: Mapping[str, np.ndarray]) -> tuple[DialGoal, ...]:
    """Holds that count: a dial that is turned by hand is not held, nor the shares that a turned share leaves
    nothing to choose."""
    goals = tuple(goal for goal in plan.holds if goal.address not in turned)
    given = {*filter(is_share, turned), *(goal.address for goal in goals)}
    if any(map(is_share, turned)) and not {*filter(is_share, plan.dials)} - given:
        goals = tuple(goal for goal in goals if not is_share(goal.address))
    return goals


def _held(plan: Plan, goals: Sequence[DialGoal], turned: Mapping[str, np.ndarray]) -> dict[str, np.ndarray]:
    """The held dials where they meet their goals, each of the common shape of what is turned."""
    shape = np.broadcast_shapes(*(values.shape for values in turned.values()))
    count = math.prod(shape)
    wanted = {goal.goal: np.asarray(plan.dials[goal.goal].value, float) for goal in goals}
    flat = {
        address: np.broadcast_to(values, shape).ravel() if values.size > 1 else values.reshape(())
        for address, values in (wanted | dict(turned)).items()
    }

    def measure(held: np.ndarray, points: np.ndarray) -> np.ndarray:
        here = {address: values[points] if values.ndim else values for address, values in flat.items()}
        outcome = _followed(plan, here | {goal.address: held[row] for row, goal in enumerate(goals)})
        far = [distance(outcome.stage(goal.stage), goal.readout, here[goal.goal]) for goal in goals]
        return np.array([np.broadcast_to(part, points.shape) for part in far])

    found = find_dials(goals, measure, count)
    return {goal.address: found[row].reshape(shape) for row, goal in enumerate(goals)}


def _followed(plan: Plan, turned: Mapping[str, np.ndarray], goals: tuple[DialGoal, ...] = ()) -> Outcome:
    shape = np.broadcast_shapes(*(values.shape for values in turned.values()))
    inputs = {address: np.asarray(dial.value, float) for address, dial in plan.dials.items()} | dict(turned)
    run = Run(inputs, notes=list(plan.notes))
    parts, flow, problem = _parts(plan, turned, run.inputs)
    for address, values in turned.items():
        problem = np.where(plan.dials[address].allows(values), problem, PlantProblem.OUT_OF_RANGE)
    ends = {
        source.id: _source(plan, source, flow * parts.get(source.id, 0.0), turned, run)
        for source in plan.sources
    }
    blended = _blend(ends, parts, problem)
    run.stages.append(blended)
    run.follow(plan.train, blended)
    return Outcome(
        shape, plan.season, tuple(run.stages), run.doses, plan.targets, run.notes, parts, ends, inputs,
        {goal.address: (goal, plan.dials[goal.address].unit) for goal in goals},
    )  # fmt: skip


def _turned(plan: Plan, dials: Mapping[str, ArrayLike]) -> dict[str, np.ndarray]:
    for address in dials:
        if address not in plan.dials:
            raise ScenarioError("", no_dial(address, plan.dials))
    turned = {address: np.asarray(values, float) for address, values in dials.items()}
    try:
        np.broadcast_shapes(*(values.shape for values in turned.values()))
    except ValueError:
        shapes = ", ".join(f"{address} {values.shape}" for address, values in turned.items())
        raise ScenarioError("", f"the dials have shapes that do not fit together: {shapes}") from None
    return turned


def _parts(
    plan: Plan, turned: Mapping[str, np.ndarray], inputs: Mapping[str, np.ndarray]
) -> tuple[dict[str, np.ndarray], np.ndarray, np.ndarray]:
    """Part (0 to 1) of each water in service, flow of the blend [m³/h, nan if not given], problem codes."""
    running = [source for source in plan.sources if source.on]
    if running[0].flow_unit:
        flows = {
            source.id: to_base(inputs[f"{source.address}.flow"], source.flow_unit, "flow")
            for source in running
        }
        flow = sum(flows.values())
        still = flow <= 0
        parts = {
            source: np.where(still, 0.0, part / np.where(still, 1.0, flow)) for source, part in flows.items()
        }
        return parts, flow, np.where(still, PlantProblem.NO_FLOW, Problem.NONE)
    given = {source.id: turned[key] for source in running if (key := f"{source.address}.share") in turned}
    shared = {source.id: plan.dials[f"{source.address}.share"].value for source in running}
    settled, possible = shares.settle(shared, given, plan.balance)
    flow = to_base(inputs["flow"], plan.flow_unit, "flow") if plan.flow_unit else np.array(np.nan)
    parts = {source: share / shares.WHOLE for source, share in settled.items()}
    return parts, flow, np.where(possible, Problem.NONE, PlantProblem.SHARES)


def _source(
    plan: Plan, source: Source, flow: np.ndarray, turned: Mapping[str, np.ndarray], run: Run
) -> Stage:
    """The water of a source after its own train."""
    prefix = f"{source.address}.analysis."
    overrides = {key: turned[prefix + key] for key, _ in source.entries if prefix + key in turned}
    try:
        if overrides:
            worked = None
            intake = analysis_totals(
                dict(source.entries), plan.system, close_with=source.close_with, overrides=overrides
            )
        else:
            worked, intake = _intake(plan.system, source.entries, source.close_with)
    except AnalysisError as error:
        raise ScenarioError(f"{source.path}.{error.key}", error.message) from None
    if source.on:
        if not intake.possible.shape and not intake.possible:
            fault = next(note for note in intake.notes if note.level == "error")
            raise ScenarioError(f"{source.path}.{fault.where}", fault.text)
        run.notes += [replace(note, where=prefix + note.where) for note in intake.notes]
    stream = Stream(plan.system, intake.totals, intake.temperature, flow)
    stream = stream.flagged(~intake.possible, Problem.IMPOSSIBLE_ANALYSIS)
    stage = Stage(source.id, source.name, "water", stream, worked=worked)
    run.stages.append(stage)
    return run.follow(source.train, stage)


@lru_cache(maxsize=128)
def _intake(
    system: System, entries: tuple[tuple[str, Measured], ...], close_with: str
) -> tuple[Worked, Intake]:
    """Totals of an analysis as entered, and what is known of the water: kept, as most turns of a dial leave
    most analyses alone."""
    return Worked(), analysis_totals(dict(entries), system, close_with=close_with)


def _blend(ends: Mapping[str, Stage], parts: Mapping[str, np.ndarray], problem: np.ndarray) -> Stage:
    """The blend of the waters in service."""
    streams = [ends[source].stream for source in parts]
    blended = blend(streams, list(parts.values()))
    cost = added(*(ends[source].cost * part for source, part in parts.items()))
    problem = np.where(problem, problem, blended.problem)
    return Stage(BLEND, "Blend", BLEND, replace(blended, problem=problem), cost)
