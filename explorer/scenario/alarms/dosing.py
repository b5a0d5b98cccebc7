"""Alarms about doses: coagulants, magnesium hydroxide, and what chlorine must not meet."""

from collections.abc import Callable, Iterator
from typing import TYPE_CHECKING

import numpy as np

from explorer.scenario.alarms.finding import JOINTS, Find, Finding, worst
from explorer.scenario.readouts import READOUTS, format_value
from explorer.scenario.stage import BLEND, FINISHED, Stage
from explorer.treatment.catalogue import ACID_AND_HYPOCHLORITE
from explorer.treatment.chemicals import Chemical
from explorer.treatment.chlorine import KINETICS_NOTE
from explorer.treatment.floc import HYDROXIDES
from explorer.treatment.stream import MENDABLE, Problem
from explorer.treatment.units import from_base

if TYPE_CHECKING:
    from explorer.scenario.outcome import Outcome

RESIDUAL_ALUMINIUM = 0.2
"""mg/L, a usual limit of drinking water."""

BRUCITE_PH = 10.6
"""Below it magnesium hydroxide is of no concern in treatment."""

SATURATED = 0.01
"""Saturation index up to which a water counts as saturated, not more."""

BRUCITE_NEEDS = 1.2
"""eq alkalinity per mol DIC; a carbonate water with less does not come near BRUCITE_PH."""

CHLORAMINE_RATIO, BREAKPOINT_RATIO = 5.0, 7.6
"""Cl2 to N by mass."""


def coagulant(outcome: "Outcome") -> Iterator[Finding]:
    """Where a floc first finds too little alkalinity or too low a pH; not again further down."""
    before = told = np.zeros(outcome.shape, bool)
    lost = np.isin(outcome.stage().problem, MENDABLE)
    for stage in outcome.stages:
        ailing = np.broadcast_to(np.isin(stage.problem, MENDABLE), outcome.shape)
        if stage.kind == "water":
            before = np.zeros(outcome.shape, bool)
        elif stage.kind in JOINTS:
            before = told
        for problem, words in (
            (Problem.ALKALINITY_EXHAUSTED, _exhausted),
            (Problem.OUTSIDE_WINDOW, _too_acid),
        ):
            points = ailing & ~before & (stage.problem == problem)
            if points.any():
                final = bool(np.any(points & lost))
                ending = "" if final else "; a later dose puts it right, but the floc forms badly until then"
                level = "error" if final else "caution"
                yield Finding(stage.id, words(stage, points) + ending, points, level)
        before, told = ailing, told | ailing


def _exhausted(stage: Stage, points: np.ndarray) -> str:
    metals = stage.total("aluminium") + stage.total("iron")
    lacking = from_base(3 * metals - stage.total("alkalinity"), "mg/L as CaCO3", "alkalinity")
    amount = np.max(np.broadcast_to(lacking, points.shape)[points])
    return f"alkalinity exhausted: {amount:.3g} mg/L as CaCO3 are missing; add alkali before the coagulant"


def _too_acid(stage: Stage, points: np.ndarray) -> str:
    ph = format_value(np.min(np.broadcast_to(stage.solution.ph, points.shape)[points]), READOUTS["ph"])
    lowest = max(HYDROXIDES[solid].lowest_ph for solid in stage.stream.floc)
    return f"pH {ph} is below the window of the coagulant (about {lowest:g}): add alkali before it"


def aluminium_left(outcome: "Outcome") -> Iterator[Finding]:
    finished = outcome.stage()
    if "aluminium_hydroxide" in finished.solids:
        points = outcome.readout("dissolved_aluminium") > RESIDUAL_ALUMINIUM
        if points.any():
            left = worst(finished, "dissolved_aluminium", points)
            text = (
                f"{left} of aluminium stay dissolved, above {RESIDUAL_ALUMINIUM:g}: coagulate and filter"
                " nearer pH 6 to 7, where the hydroxide is least soluble"
            )
            yield Finding(FINISHED, text, points)


def brucite(outcome: "Outcome") -> Iterator[Finding]:
    """Where magnesium hydroxide would form but no step lets it.

    Ahead of a clarifier the water behind it counts: calcium carbonate that forms there lowers the pH.
    """
    for position, stage in enumerate(outcome.stages):
        alkaline = stage.total("alkalinity") > BRUCITE_NEEDS * stage.total("dic")
        if not np.any(alkaline & (stage.total("magnesium") > 0)) or _settles_later(outcome, position):
            continue
        points = (stage.readout("ph") > BRUCITE_PH) & (stage.readout("si_brucite") > SATURATED)
        if points.any():
            text = (
                f"above pH {BRUCITE_PH:g} magnesium hydroxide forms (saturation index"
                f" {worst(stage, 'si_brucite', points)}), but no step lets it: add brucite to the solids of"
                " the clarifier, or keep the pH lower"
            )
            yield Finding(stage.id, text, np.broadcast_to(points, outcome.shape))


def _settles_later(outcome: "Outcome", position: int) -> bool:
    for stage in outcome.stages[position + 1 :]:
        if stage.kind in ("water", *JOINTS):
            return False
        if stage.kind == "settle":
            return True
    return False


# ---- chlorine ----------------------------------------------------------------------------------------------


def kinetics(outcome: "Outcome") -> Iterator[Finding]:
    if any(np.any(stage.total("monochloramine") > 0) for stage in outcome.stages):
        yield Finding(FINISHED, KINETICS_NOTE)


def is_hypochlorite(chemical: Chemical) -> bool:
    adds = chemical.totals
    return adds.get("free_chlorine", 0) > 0 and adds.get("alkalinity", 0) >= 0


def is_acid(chemical: Chemical) -> bool:
    return chemical.totals.get("alkalinity", 0) < 0 or ACID_AND_HYPOCHLORITE in chemical.hazards


def is_ammonia(chemical: Chemical) -> bool:
    return chemical.totals.get("ammonia", 0) > 0


def neighbours(other: Callable[[Chemical], bool], danger: str) -> Find:
    """Finds hypochlorite dosed right before or after something it must not meet."""

    def find(outcome: "Outcome") -> Iterator[Finding]:
        for first, second in zip(outcome.stages, outcome.stages[1:], strict=False):
            if first.id not in outcome.dosing or second.id not in outcome.dosing:
                continue
            pair = outcome.dosing[first.id], outcome.dosing[second.id]
            chemicals = [dose.chemical for dose in pair]
            if not all(np.any(dose.moles > 0) for dose in pair):
                continue
            if any(
                is_hypochlorite(one) and other(another) for one, another in (chemicals, reversed(chemicals))
            ):
                text = (
                    f"{first.name} and {second.name} are dosed one after the other: keep stores, lines and"
                    f" injection points well apart; {danger}"
                )
                yield Finding(second.id, text)

    return find


def beyond_chloramine(outcome: "Outcome") -> Iterator[Finding]:
    """Chlorine over nitrogen of what met, where chloramine is used up rather than formed."""
    for stage, chlorine, nitrogen in _met(outcome):
        by_mass = from_base(chlorine, "mg/L as Cl2", "free_chlorine") / np.where(
            nitrogen > 0, from_base(nitrogen, "mg/L as N", "ammonia"), np.inf
        )
        by_mass = np.broadcast_to(by_mass, outcome.shape)
        points = (by_mass > CHLORAMINE_RATIO) & (by_mass <= BREAKPOINT_RATIO)
        if points.any():
            text = (
                f"chlorine to nitrogen {np.max(by_mass[points]):.1f} by mass, beyond {CHLORAMINE_RATIO:g}:"
                f" chlorine destroys chloramine, down to no residual at {BREAKPOINT_RATIO:g}; add ammonia, or"
                " go well past the breakpoint"
            )
            yield Finding(stage.id, text, points)


def _met(outcome: "Outcome") -> Iterator[tuple[Stage, np.ndarray, np.ndarray]]:
    """Stages in which chlorine and ammonia may have met, with what of both came in [mol/L]."""
    for before, stage in zip((None, *outcome.stages), outcome.stages, strict=False):
        if stage.kind == BLEND:
            flows = [
                (part, _chlorine_and_nitrogen(outcome.ends[water])) for water, part in outcome.parts.items()
            ]
            # A water without share must not count, even where it has no answer (0 × nan).
            yield (
                stage,
                *(sum(np.where(part > 0, part * both[i], 0.0) for part, both in flows) for i in (0, 1)),
            )
        elif stage.id in outcome.dosing:
            dose = outcome.dosing[stage.id]
            added = [dose.moles * dose.chemical.totals.get(key, 0.0) for key in ("free_chlorine", "ammonia")]
            if any(np.any(amount > 0) for amount in added):
                yield (
                    stage,
                    *(old + new for old, new in zip(_chlorine_and_nitrogen(before), added, strict=True)),
                )


def _chlorine_and_nitrogen(stage: Stage) -> tuple[np.ndarray, np.ndarray]:
    bound = stage.total("monochloramine")
    return stage.total("free_chlorine") + bound, stage.total("ammonia") + bound


beside_acid = neighbours(is_acid, "chlorine gas forms where they meet")
beside_ammonia = neighbours(is_ammonia, "the products react violently where they meet")
