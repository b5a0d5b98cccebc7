"""Rule of the held dials: they are about dials, readouts and stages that there are, and have a range."""

from explorer.scenario.dials import Dial, no_dial
from explorer.scenario.errors import join, shown, unknown
from explorer.scenario.fields import Faults, outside, span
from explorer.scenario.held_dials import MOST_HOLDS
from explorer.scenario.model import DialHold, Scenario
from explorer.scenario.observed_rule import known_dials
from explorer.scenario.readouts import READOUTS
from explorer.scenario.stage import BLEND, FINISHED


def held_dials(scenario: Scenario) -> Faults:
    """Holds that do not fit the rest of the scenario."""
    if not scenario.holds:
        return
    if len(scenario.holds) > MOST_HOLDS:
        yield "holds", f"{len(scenario.holds)} dials are held; allowed at most {MOST_HOLDS}"
    held_values = {f"{address}.hold.value" for address in scenario.holds}
    known = {address: dial for address, dial in known_dials(scenario).items() if address not in held_values}
    waiting = waiting_shares(scenario)
    places = stages(scenario)
    for address, hold in scenario.holds.items():
        path = join("holds", address)
        if address not in known and address not in waiting:
            yield path, no_dial(address, known)
        if hold.readout not in READOUTS:
            yield f"{path}.readout", unknown(hold.readout, "a readout", READOUTS)
        if hold.stage not in places:
            yield f"{path}.stage", unknown(hold.stage, "a stage", places)
        if address in known:
            yield from ((f"{path}.{where}", fault) for where, fault in _range(hold, known[address]))


def stages(scenario: Scenario) -> tuple[str, ...]:
    """Ids of all places where a readout can be taken, in service or not."""
    steps = (step.id for _, step in scenario.steps())
    return (*(water.id for water in scenario.waters), *steps, BLEND, FINISHED)


def waiting_shares(scenario: Scenario) -> set[str]:
    """Addresses of all shares: that of a water out of service is no dial until its return."""
    return {f"waters.{water.id}.share" for water in scenario.waters if water.share is not None}


def _range(hold: DialHold, dial: Dial) -> Faults:
    bounds = (dial.low if dial.bounded else None, dial.high)
    for end in ("low", "high"):
        value = getattr(hold, end)
        if value is not None and outside(value, bounds):
            yield end, f"{shown(value)} is out of range; allowed {span(bounds, dial.unit)}"
    low = dial.low if hold.low is None else hold.low
    high = dial.high if hold.high is None else hold.high
    if high is None:
        yield "high", "missing; allowed a number, as the dial itself has no upper limit"
    elif low >= high:
        yield "high", f"{shown(high)} leaves no range; allowed above {shown(low)}"
