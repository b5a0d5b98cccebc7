"""The finding: the verdict on an outcome and its sweep, in the words of page and report."""

import numpy as np

from explorer.scenario.dials import Dial
from explorer.scenario.evaluate import Outcome
from explorer.scenario.readouts import READOUTS, format_value
from explorer.scenario.words import brief_label, in_sentence, number_text, plain, unit_text
from explorer.studies.pictures import rising
from explorer.studies.sweep import Sweep
from explorer.studies.verdict import TargetState, Verdict, verdict

CAUTION = (
    "For screening: confirm by bench tests; changes of treatment need the regulator's approval and licensed"
    " practice."
)


def finding(point: Outcome, swept: Sweep | None = None) -> Verdict:
    """The verdict on the finished water of a single point, and where along the sweep it would be another."""
    reason = str(np.asarray(point.reasons()).item() or "")
    states = target_states(point, swept)
    ccpp = float(point.readout("ccpp"))
    if swept is None:
        return verdict(states, ccpp, reason=reason)
    unit = unit_text(swept.dial.unit)
    return verdict(states, ccpp, rising(swept.x, swept.x), unit, swept_name(swept.dial), reason)


def target_states(point: Outcome, swept: Sweep | None = None) -> list[TargetState]:
    """Every target of an outcome at the operating point, with its readout along the sweep, rising."""
    states = []
    for target, value, _met, _margin in point.targets():
        readout = READOUTS[target.readout]
        states.append(
            TargetState(
                name=brief_label(readout),
                value=float(value),
                text=format_value(float(value), readout),
                unit=unit_text(readout.unit),
                low=target.low,
                high=target.high,
                along=None if swept is None else rising(swept.x, swept.outcome.readout(target.readout)),
                slack=readout.slack,
                said=readout.key == "ccpp",
            )
        )
    return states


def swept_name(dial: Dial) -> str:
    """What follows a value of the dial in a sentence: "52 % Granite Wellfield", "12 mg/L (dose of …)"."""
    if dial.address.endswith(".share"):
        return plain(dial.group, 60)
    return f"({in_sentence(plain(dial.label, 60))})"


def foot_line(point: Outcome | None) -> str:
    """Temperature and state of the finished water, and what the figures are good for."""
    if point is None:
        return CAUTION
    temperature = float(point.readout("temperature"))
    open_steps = [stage.name for stage in point.stages if stage.kind == "air"]
    state = "closed to air"
    if open_steps:
        state = f"closed to air except in {plain(' and '.join(open_steps), 80)}"
    return f"Equilibrium estimate at {number_text(temperature, 1)} °C, {state}. {CAUTION}"
