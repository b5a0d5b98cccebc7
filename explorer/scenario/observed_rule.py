"""Rule of the measured points: they are about dials, readouts, stages and chemicals that there are."""

from collections.abc import Mapping

from explorer.scenario.dials import Dial, dials, no_dial
from explorer.scenario.errors import shown, unknown
from explorer.scenario.fields import Faults
from explorer.scenario.model import Scenario
from explorer.scenario.observed import MeasuredPoints
from explorer.scenario.readouts import READOUTS
from explorer.scenario.stage import BLEND, FINISHED
from explorer.treatment.chemicals import titration_units


def measured_points(scenario: Scenario) -> Faults:
    """Parts of the measured points that do not fit the rest of the scenario."""
    names: set[str] = set()
    known = known_dials(scenario) if scenario.measured else {}
    for position, part in enumerate(scenario.measured):
        path = f"measured[{position}]"
        if part.name in names:
            yield f"{path}.name", f"{shown(part.name)} is there twice; allowed a name of its own"
        names.add(part.name)
        yield from ((f"{path}.{where}", fault) for where, fault in misfits(scenario, part, known))


def known_dials(scenario: Scenario) -> dict[str, Dial]:
    """The dials of all seasons by address."""
    return {key: dial for season in scenario.seasons for key, dial in dials(scenario, season).items()}


def misfits(scenario: Scenario, part: MeasuredPoints, known: Mapping[str, Dial]) -> Faults:
    """What of one set of points does not fit; ``known``: the dials there are."""
    yield from _axis(scenario, part, known)
    if part.readout not in READOUTS:
        yield "readout", unknown(part.readout, "a readout", READOUTS)
    ids = [water.id for water in scenario.waters] + [step.id for _, step in scenario.steps()]
    if part.stage not in (*ids, BLEND, FINISHED):
        yield "stage", unknown(part.stage, "a stage", (*ids, BLEND, FINISHED))


def _axis(scenario: Scenario, part: MeasuredPoints, known: Mapping[str, Dial]) -> Faults:
    if (part.dial is None) == (part.titration is None):
        wrong = "missing" if part.dial is None else "stands beside titration"
        yield "dial", f"{wrong}; allowed one of dial, titration"
    elif part.titration is not None:
        yield from _titrants(scenario, part)
    elif part.dial not in known and not _waiting(scenario, part.dial):
        yield "dial", no_dial(part.dial, dict(known))


def _titrants(scenario: Scenario, part: MeasuredPoints) -> Faults:
    chemicals, axis = scenario.known_chemicals(), part.titration
    for field in ("chemical", "opposite"):
        key = getattr(axis, field)
        if key is None:
            continue
        if key not in chemicals:
            yield f"titration.{field}", unknown(key, "a chemical", chemicals)
        elif axis.unit not in titration_units(chemicals[key]):
            what, units = f"a unit of {chemicals[key].name.lower()}", titration_units(chemicals[key])
            yield "titration.unit", unknown(axis.unit, what, units, similar=False)
    if axis.opposite is None and any(x < 0 for x, _ in part.points):
        yield "titration.opposite", "missing; allowed the chemical that negative doses stand for"


def _waiting(scenario: Scenario, address: str) -> bool:
    """The share of a water out of service cannot be turned, but its points wait for its return."""
    return address in {f"waters.{water.id}.share" for water in scenario.waters if water.share is not None}
