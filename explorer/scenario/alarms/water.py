"""Alarms about a water: whether it has an answer, its analysis, the limits of the model, saturation."""

from collections.abc import Iterator
from typing import TYPE_CHECKING

import numpy as np

from explorer.chemistry.calcium_carbonate import precipitation_potential
from explorer.scenario.alarms.finding import Finding, blended, worst
from explorer.scenario.readouts import MINUS, READOUTS, in_words
from explorer.scenario.stage import BLEND, FINISHED
from explorer.treatment.analysis import Balance, charge_sums
from explorer.treatment.stream import MENDABLE, PROBLEMS
from explorer.treatment.units import from_base

if TYPE_CHECKING:
    from explorer.scenario.outcome import Outcome

WEAK_BUFFER = 0.2
"""mmol/L per pH."""

USABLE_PH = (4.0, 11.5)
STRONG, TOO_STRONG = 0.05, 0.1
"""mol/L of ionic strength: where the activity model becomes coarse, and where it is a guide only."""

SALINE = 15_000.0
"""µS/cm; brackish water ends about here."""

INHIBITING = 0.3
"""mg/L of orthophosphate as P."""

WARM, HEATER = 25.0, 60.0
"""°C."""

ALWAYS_BALANCED = 2.0
"""Percent of charge balance that is acceptable in every water."""

NOT_CARBONATE = 0.15
"""Part of the alkalinity."""

NEAR_SATURATION = 1.0
"""mg/L as CaCO3 of precipitation potential that counts as neither dissolving nor precipitating."""


def no_answer(outcome: "Outcome") -> Iterator[Finding]:
    """One finding for each reason; what ails a coagulant is said where it happens."""
    reasons = outcome.reasons().astype(str)
    for reason in np.unique(reasons).tolist():
        if reason and reason not in {PROBLEMS[problem] for problem in MENDABLE}:
            yield Finding(FINISHED, reason, reasons == reason)


# ---- analyses ----------------------------------------------------------------------------------------------


def charge_balance(outcome: "Outcome") -> Iterator[Finding]:
    for stage in blended(outcome):
        off = np.ravel(np.abs(stage.readout("charge_balance")))
        if not (off > ALWAYS_BALANCED).any():
            continue
        worst = int(np.nanargmax(off))
        balance = Balance(*(1000 * float(np.ravel(part)[worst]) for part in charge_sums(stage.solution)))
        if not balance.acceptable:
            percent = f"{balance.percent:+.1f}".replace("-", MINUS)
            text = (
                f"charge balance {percent} %, allowed {balance.limit}: check the units and look for a"
                " missing ion before relying on this water"
            )
            yield Finding(stage.id, text)


def not_carbonate(outcome: "Outcome") -> Iterator[Finding]:
    for stage in blended(outcome):
        alkalinity = stage.readout("alkalinity")
        other = 1 - stage.readout("carbonate_alkalinity") / np.where(alkalinity > 0, alkalinity, np.nan)
        points = other > NOT_CARBONATE
        if points.any():
            text = (
                f"{100 * np.max(other[points]):.0f} % of the alkalinity is not carbonate (silicate, borate,"
                " phosphate, hypochlorite, organic matter, hydroxide): do not read all of it as bicarbonate"
            )
            yield Finding(stage.id, text)


def saline(outcome: "Outcome") -> Iterator[Finding]:
    for stage in blended(outcome):
        points = stage.readout("conductivity") > SALINE
        if points.any():
            text = (
                f"{worst(stage, 'conductivity', points)} is near sea water: the activity model does not reach"
                " that far, use a method for brines"
            )
            yield Finding(stage.id, text)


# ---- limits of the calculation -----------------------------------------------------------------------------


def ionic_strength(outcome: "Outcome") -> Iterator[Finding]:
    strength = outcome.readout("ionic_strength")
    points = strength > STRONG
    if points.any():
        too_strong = bool(np.any(strength > TOO_STRONG))
        meaning = "results are a guide only" if too_strong else "the activity model becomes coarse"
        limit = TOO_STRONG if too_strong else STRONG
        text = f"ionic strength above {limit:g} mol/L: {meaning}; check the deciding figures by measurement"
        yield Finding(FINISHED, text, strength > limit, "caution" if too_strong else "info")


def ph_range(outcome: "Outcome") -> Iterator[Finding]:
    ph = outcome.readout("ph")
    points = (ph < USABLE_PH[0]) | (ph > USABLE_PH[1])
    if points.any():
        text = "pH outside {:g} to {:g}: beyond what the constants are meant for; look at the doses"
        yield Finding(FINISHED, text.format(*USABLE_PH), points)


def weak_buffer(outcome: "Outcome") -> Iterator[Finding]:
    points = outcome.readout("buffer_intensity") < WEAK_BUFFER
    if points.any():
        text = (
            f"buffer intensity {worst(outcome.stage(), 'buffer_intensity', points, lowest=True)}, below"
            f" {WEAK_BUFFER:g}: small dose errors and carbon dioxide from the air move the pH;"
            " raise the alkalinity, or allow for it"
        )
        yield Finding(FINISHED, text, points)


# ---- saturation --------------------------------------------------------------------------------------------


def blend_turns(outcome: "Outcome") -> Iterator[Finding]:
    """A blend on the other side of saturation than every water in it."""
    ends = [outcome.ends[water] for water, part in outcome.parts.items() if np.any(part > 0)]
    blend = outcome.readout("ccpp", BLEND)
    if len(ends) < 2:
        return
    parts = [np.broadcast_to(stage.readout("ccpp"), outcome.shape) for stage in ends]
    for sign, words in ((1.0, "none of the waters dissolves"), (-1.0, "none of the waters precipitates")):
        points = (sign * blend < -NEAR_SATURATION) & (np.min(sign * np.array(parts), 0) > -NEAR_SATURATION)
        if points.any():
            text = (
                f"{words} calcium carbonate, yet their blend"
                f" {worst(outcome.stage(BLEND), 'ccpp', points, lowest=sign > 0)}:"
                " look at every share, not at the ends alone"
            )
            yield Finding(BLEND, text, points)


def inhibitor(outcome: "Outcome") -> Iterator[Finding]:
    points = outcome.readout("phosphate") > INHIBITING
    if points.any():
        text = (
            f"orthophosphate {worst(outcome.stage(), 'phosphate', points)} slows precipitation: CCPP and"
            " saturation indices are no measure of scale here, nor of lead or copper; test with pipe loops"
        )
        yield Finding(FINISHED, text, points)


def warm(outcome: "Outcome") -> Iterator[Finding]:
    finished, temperature = outcome.stage(), outcome.readout("temperature")
    points = temperature > WARM
    if not points.any():
        return
    hot = finished.system.solve(finished.totals, np.full(np.shape(finished.temperature), HEATER))
    potential = from_base(precipitation_potential(hot), "mg/L as CaCO3", "ccpp")
    # What is no water at all has no potential, here or there, and nothing is to be said of it.
    points = points & np.isfinite(potential) & np.isfinite(outcome.readout("ccpp"))
    if points.any():
        then = in_words(np.max(np.broadcast_to(potential, points.shape)[points]), READOUTS["ccpp"])
        text = (
            f"{worst(finished, 'temperature', points)}: calcium carbonate is less soluble in warm water; the"
            f" water {worst(finished, 'ccpp', points)} here, {then} at {HEATER:g} °C: judge heaters and"
            " exchangers at their own temperature"
        )
        yield Finding(FINISHED, text, points)
