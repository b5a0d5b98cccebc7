"""Alarms: what should make a reader stop before believing, dosing or deciding.

Each alarm is one rule with a key, its source, and a function that finds it in an outcome. A finding says
where and what, and what to do about it; every word about a result that is not a number comes from here.
"""

from typing import TYPE_CHECKING

import numpy as np

from explorer.scenario.alarms import dosing, water
from explorer.scenario.alarms.finding import COMMON_PRACTICE, Alarm, Finding, Rule
from explorer.treatment.notes import Note

if TYPE_CHECKING:
    from explorer.scenario.outcome import Outcome

__all__ = ["ALARMS", "BLEND_TURNS", "NOT_LINEAR", "Alarm", "Finding", "Rule", "alarms_of", "noted"]

BLEND_TURNS = "blend_turns"
"""Key of the alarm for a blend on the other side of saturation than its waters."""

NOT_LINEAR = "the equilibrium of calcium carbonate is not linear in the share"


ALARMS: tuple[Alarm, ...] = (
    Alarm("no_answer", "error", "", water.no_answer),
    Alarm("coagulant_window", "error", COMMON_PRACTICE, dosing.coagulant),
    Alarm("aluminium_left", "caution", "98/83/EC, Annex I", dosing.aluminium_left),
    Alarm("charge_balance", "caution", "Standard Methods 1030E (from memory)", water.charge_balance),
    Alarm("salinity", "caution", COMMON_PRACTICE, water.saline),
    Alarm("ionic_strength", "caution", "limit of the Davies equation, common practice", water.ionic_strength),
    Alarm("ph_range", "caution", COMMON_PRACTICE, water.ph_range),
    Alarm("weak_buffer", "caution", COMMON_PRACTICE, water.weak_buffer),
    Alarm(BLEND_TURNS, "caution", NOT_LINEAR, water.blend_turns),
    Alarm("brucite", "caution", COMMON_PRACTICE, dosing.brucite),
    Alarm("chlorine_gas", "caution", COMMON_PRACTICE, dosing.beside_acid),
    Alarm("chlorine_ammonia", "caution", COMMON_PRACTICE,
          dosing.beside_ammonia),
    Alarm("chloramine_ratio", "caution", COMMON_PRACTICE, dosing.beyond_chloramine),
    Alarm("inhibitor", "info", "Standard Methods 2330 (from memory)", water.inhibitor),
    Alarm("warm", "info", "solubility of calcite by temperature", water.warm),
    Alarm("not_carbonate", "info", COMMON_PRACTICE, water.not_carbonate),
    Alarm("chlorine_kinetics", "info", "", dosing.kinetics),
)  # fmt: skip
"""Every alarm that an outcome shows by itself; those that need a sweep are in the studies."""


def alarms_of(outcome: "Outcome") -> list[Note]:
    """Every alarm that an outcome raises by itself, in the order of :data:`ALARMS`."""
    return [noted(alarm, found) for alarm in ALARMS for found in alarm.find(outcome)]


def noted(rule: Rule, found: Finding) -> Note:
    """A finding as a note; it says how many points it is about where it is not about all."""
    text = found.text + _part(found.points)
    return Note(found.level or rule.level, found.where, text, rule.key, rule.source)


def _part(points: np.ndarray | None) -> str:
    if points is None or points.size <= 1 or points.all():
        return ""
    return f" ({np.count_nonzero(points)} of {points.size} points)"
