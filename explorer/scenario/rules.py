"""Rules that need more than one field: what makes the parts of a scenario fit together.

Each rule is a generator of (path, message) pairs, in the order a reader meets the fields; :func:`check`
raises the first. Rules about one field stand with the field.
"""

from collections.abc import Callable, Iterable
from typing import Any

from explorer.chemistry import COMPONENTS
from explorer.chemistry.components import FAMILIES
from explorer.scenario.dials import Dial, dials, no_dial
from explorer.scenario.errors import ScenarioError, join, listed, shown, unknown
from explorer.scenario.fields import Faults, object_fault, outside, span
from explorer.scenario.hold_rule import held_dials
from explorer.scenario.measured import entry_faults
from explorer.scenario.model import FORMAT, VERSION, Scenario, SweepSetting
from explorer.scenario.observed_rule import measured_points
from explorer.scenario.quantity import Quantity
from explorer.scenario.readouts import READOUTS
from explorer.scenario.shares import TOLERANCE, WHOLE
from explorer.scenario.steps import DoseStep, SettleStep, SideStreamStep, Step
from explorer.scenario.water import Analysis, Water
from explorer.treatment.analysis import ANALYSIS_KEYS, CARBONATE_KEYS
from explorer.treatment.catalogue import SETTINGS
from explorer.treatment.chemicals import CATALOGUE, Chemical, ChemicalError
from explorer.treatment.units import substance_units

RESERVED_IDS = ("blend", "finished")
"""Places in the train that have these names already."""

SIDE_STREAM_DEPTH = 4

MOST_STEPS = 200
"""Steps of all trains together; no plant has a tenth of them, and each takes its time."""


def check_format(raw: Any, path: str = "") -> None:
    """Raise ScenarioError unless ``raw`` says that it is a scenario of a version that can be read."""
    if fault := object_fault(raw):
        raise ScenarioError(
            path, fault if path else f"the file holds {shown(raw)}; allowed a scenario object"
        )
    kind, version = raw.get("format"), raw.get("version")
    if kind != FORMAT:
        wrong = "missing" if kind is None else f"{shown(kind)} is not a format this program reads"
        raise ScenarioError(join(path, "format"), f'{wrong}; allowed "{FORMAT}"')
    if type(version) is not int or version != VERSION:
        wrong = "missing" if version is None else f"{shown(version)} is not a version this program reads"
        raise ScenarioError(join(path, "version"), f"{wrong}; allowed {VERSION}")


def check(scenario: Scenario, path: str = "") -> None:
    """Raise ScenarioError for the first rule that the scenario breaks; ``path`` is where it stands."""
    for rule in RULES:
        for where, message in rule(scenario):
            raise ScenarioError(f"{path}.{where}" if path else where, message)


def _repeated(ids: Iterable[tuple[str, str]], what: str, taken: Iterable[str] = ()) -> Faults:
    """Ids, given with their paths, that were there before or belong to something else."""
    seen = dict.fromkeys(taken, "the program itself")
    for path, name in ids:
        if name in seen:
            yield f"{path}.id", f"{shown(name)} is taken by {seen[name]}; allowed {what} of its own"
        seen[name] = path


def _ids(scenario: Scenario) -> Faults:
    # Waters and steps share one set of ids: both are places in the train.
    waters = ((f"waters[{position}]", water.id) for position, water in enumerate(scenario.waters))
    steps = ((path, step.id) for path, step in scenario.steps())
    yield from _repeated([*waters, *steps], "an id", RESERVED_IDS)
    acids = ((f"acids[{position}]", acid.id) for position, acid in enumerate(scenario.acids))
    yield from _repeated(acids, "an id", (*ANALYSIS_KEYS, *COMPONENTS, "close_with", "provenance"))
    chemicals = ((f"chemicals[{position}]", own.id) for position, own in enumerate(scenario.chemicals))
    yield from _repeated(chemicals, "an id", CATALOGUE)


def _acids(scenario: Scenario) -> Faults:
    for position, acid in enumerate(scenario.acids):
        path = f"acids[{position}]"
        if list(acid.pka) != sorted(acid.pka):
            yield f"{path}.pka", "the values fall; allowed in rising order, the strongest acid first"
        if acid.enthalpy_kj is not None and len(acid.enthalpy_kj) != len(acid.pka):
            yield (
                f"{path}.enthalpy_kj",
                f"{len(acid.enthalpy_kj)} for {len(acid.pka)} pKa values; allowed one for each",
            )


def _chemicals(scenario: Scenario) -> Faults:
    for position, own in enumerate(scenario.chemicals):
        if own.like is not None and own.like not in CATALOGUE:
            yield f"chemicals[{position}].like", unknown(own.like, "a chemical of the catalogue", CATALOGUE)
        try:
            own.chemical(scenario.acids)
        except ChemicalError as error:
            yield f"chemicals[{position}].{error.field}", error.message


def _seasons(scenario: Scenario) -> Faults:
    seasons = scenario.seasons
    if scenario.season not in seasons:
        yield "season", unknown(scenario.season, "one of the seasons", seasons)
    for position, water in enumerate(scenario.waters):
        path = f"waters[{position}].analyses"
        for season in seasons:
            if season not in water.analyses:
                yield join(path, season), "missing; allowed an analysis for every season"
        for season in water.analyses:
            if season not in seasons:
                yield join(path, season), unknown(season, "one of the seasons", seasons)


def _shares(scenario: Scenario) -> Faults:
    waters = list(enumerate(scenario.waters))
    by_flow = all(water.share is None for _, water in waters) and waters[0][1].flow is not None
    given, other = ("flow", "share") if by_flow else ("share", "flow")
    for position, water in waters:
        path = f"waters[{position}]"
        if getattr(water, other) is not None:
            yield f"{path}.{other}", f"a {other} stands among {given}s; allowed {given}s for all waters"
        if getattr(water, given) is None:
            yield f"{path}.{given}", f"missing; allowed {Water.fields()[given].allowed}"
    if by_flow and scenario.flow is not None:
        yield "flow", "the waters have flows of their own; allowed a total only beside shares"
    total = sum(water.share or 0 for _, water in waters)
    if not by_flow and abs(total - WHOLE) > TOLERANCE:
        yield "waters", f"the shares add to {total:.10g} %; allowed {WHOLE:g} %"
    if not any(water.on for _, water in waters):
        yield "waters", "no water is in service; allowed one or more"
    ids = [water.id for _, water in waters]
    if scenario.balance_water is not None and scenario.balance_water not in ids:
        yield "balance_water", unknown(scenario.balance_water, "a water", ids)


def _analyses(scenario: Scenario) -> Faults:
    acid_units = {acid.id: tuple(substance_units(acid.molar_mass)) for acid in scenario.acids}
    for position, water in enumerate(scenario.waters):
        for season, analysis in water.analyses.items():
            path = join(f"waters[{position}].analyses", season)
            for where, message in _analysis(analysis, acid_units):
                yield f"{path}.{where}" if where else path, message


def _analysis(analysis: Analysis, acid_units: dict[str, tuple[str, ...]]) -> Faults:
    entries = analysis.entries
    for key, measured in entries.items():
        if key not in ANALYSIS_KEYS and key not in acid_units:
            yield join("", key), unknown(key, "an analysis key", (*ANALYSIS_KEYS, *acid_units))
        for part, message in entry_faults(key, measured, acid_units.get(key)):
            yield f"{key}.{part}", message
    if "temperature" not in entries:
        yield "temperature", "missing; allowed the temperature of the water"
    given = [key for key in CARBONATE_KEYS if key in entries]
    if len(given) < 2:
        have = f"only {given[0]} is given" if given else "none of them is given"
        yield "", f"{have}; allowed two or more of {listed(CARBONATE_KEYS)}, which fix the carbonate system"
    if "total_hardness" in entries and not {"calcium", "magnesium"} & entries.keys():
        yield "total_hardness", "calcium and magnesium are missing; allowed with one of them beside it"


def _steps(scenario: Scenario) -> Faults:
    chemicals, steps = scenario.known_chemicals(), list(scenario.steps())
    if len(steps) > MOST_STEPS:
        yield "train", f"there are {len(steps)} steps in all trains together; allowed {MOST_STEPS}"
    for path, step in steps:
        # The train of a water is a level of the path, but not of side streams.
        depth = path.count(".train") + isinstance(step, SideStreamStep) - path.startswith("waters")
        if depth > SIDE_STREAM_DEPTH:
            yield path, f"side streams stand too deep in each other; allowed {SIDE_STREAM_DEPTH} levels"
        if step.after_joining and "." in path:
            yield f"{path}.step", f"{step.kind} stands before waters join; allowed in the common train only"
        rules = (rule for kind, rule in _STEP_RULES.items() if isinstance(step, kind))
        for where, message in (fault for rule in rules for fault in rule(step, chemicals)):
            yield f"{path}.{where}", message


def _either(step: Step, _: dict[str, Chemical]) -> Faults:
    given = [key for key in step.either if getattr(step, key) is not None]
    if step.either and len(given) != 1:
        wrong = "missing" if not given else f"stands beside {given[0]}"
        yield (step.either[0] if not given else given[1]), f"{wrong}; allowed one of {listed(step.either)}"


def _settle(step: SettleStep, _: dict[str, Chemical]) -> Faults:
    if step.full and step.residual is not None:
        yield "full", "stands beside a residual; allowed a residual or to saturation, not both"


def _dose(step: DoseStep, chemicals: dict[str, Chemical]) -> Faults:
    chemical = chemicals.get(step.chemical)
    if chemical is None:
        yield "chemical", unknown(step.chemical, "a chemical", chemicals)
        return
    doses: dict[str, Quantity | None] = {"dose": step.dose}
    if step.hold is not None:
        doses["hold.ceiling"] = step.hold.ceiling
        if step.hold.readout not in READOUTS:
            yield "hold.readout", unknown(step.hold.readout, "a readout", READOUTS)
    for path, dose in doses.items():
        if dose is not None and dose.unit not in chemical.units:
            yield (
                f"{path}.unit",
                unknown(dose.unit, f"a unit of {chemical.name.lower()}", chemical.units, False),
            )
    setting = SETTINGS.get(step.chemical)
    for name in ("basicity", "ratio"):
        value = getattr(step, name)
        if value is None:
            continue
        if setting is None or setting.name != name:
            owners = [key for key, owner in SETTINGS.items() if owner.name == name]
            yield name, f"{chemical.name.lower()} has none; allowed for {listed(owners)}"
        elif not setting.low <= value <= setting.high:
            yield name, f"{shown(value)} is out of range; allowed {setting.low:g} to {setting.high:g}"


_STEP_RULES: dict[type[Step], Callable[[Any, dict[str, Chemical]], Faults]] = {
    Step: _either,
    SettleStep: _settle,
    DoseStep: _dose,
}


def _targets(scenario: Scenario) -> Faults:
    for position, target in enumerate(scenario.targets):
        path = f"targets[{position}]"
        if target.readout not in READOUTS:
            yield f"{path}.readout", unknown(target.readout, "a readout", READOUTS)
        if target.low is None and target.high is None:
            yield path, "neither low nor high is given; allowed one or both"
        elif None not in (target.low, target.high) and target.low > target.high:
            yield f"{path}.low", f"{target.low:g} is above high; allowed up to {target.high:g}"


def _dials(scenario: Scenario) -> Faults:
    if not scenario.tolerances and scenario.sweep is None:
        return
    known = {
        address: dial for season in scenario.seasons for address, dial in dials(scenario, season).items()
    }
    # The share of a water out of service cannot be turned, but its tolerance waits for its return.
    waiting = {f"waters.{water.id}.share" for water in scenario.waters if water.share is not None}
    for address, tolerance in scenario.tolerances.items():
        path = join("tolerances", address)
        if address not in known and address not in waiting:
            yield path, no_dial(address, known)
        sides = tolerance.minus is not None or tolerance.plus is not None
        if sides == (tolerance.plus_minus is not None):
            wrong = "stands beside minus or plus" if sides else "missing"
            yield f"{path}.plus_minus", f"{wrong}; allowed plus_minus, or minus and plus"
        unit = known[address].unit if address in known else "%"
        if tolerance.unit not in ("", "%", unit):
            allowed = filter(None, dict.fromkeys((unit, "%")))
            yield f"{path}.unit", unknown(tolerance.unit, "a unit here", allowed, similar=False)
    if scenario.sweep is not None:
        yield from _sweep(scenario.sweep, known)
        yield from _shown(scenario, scenario.sweep)


def _shown(scenario: Scenario, sweep: SweepSetting) -> Faults:
    """What the plots show of a sweep."""
    if sweep.readout is not None and sweep.readout not in READOUTS:
        yield "sweep.readout", unknown(sweep.readout, "a readout", READOUTS)
    families = [*FAMILIES, *(acid.id for acid in scenario.acids)]
    if sweep.family is not None and sweep.family not in families:
        yield "sweep.family", unknown(sweep.family, "a family of species", families)


def _sweep(sweep: SweepSetting, known: dict[str, Dial]) -> Faults:
    dial = known.get(sweep.dial)
    if dial is None:
        yield "sweep.dial", no_dial(sweep.dial, known)
        return
    if sweep.start == sweep.stop:
        yield "sweep.stop", f"{shown(sweep.stop)} is the start as well; allowed another value"
    for end in ("start", "stop"):
        value, bounds = getattr(sweep, end), (dial.low, dial.high)
        if outside(value, bounds):
            yield f"sweep.{end}", f"{shown(value)} is out of range; allowed {span(bounds, dial.unit)}"


def _options(scenario: Scenario) -> Faults:
    names: set[str] = set()
    for position, option in enumerate(scenario.options):
        path = f"options[{position}]"
        if option.name in names:
            yield f"{path}.name", f"{shown(option.name)} is there twice; allowed a name of its own"
        names.add(option.name)
        if option.scenario.options:
            yield f"{path}.scenario.options", "an option holds no options; allowed none"


RULES: tuple[Callable[[Scenario], Faults], ...] = (
    _ids,
    _seasons,
    _shares,
    _acids,
    _chemicals,
    _analyses,
    _steps,
    _targets,
    held_dials,
    _dials,
    measured_points,
    _options,
)
