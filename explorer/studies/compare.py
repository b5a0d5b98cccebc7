"""Compare: options, seasons and sources out of service side by side, only what differs."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from explorer.scenario.dials import Dial, dials, neat, step_name
from explorer.scenario.editing import switch_water
from explorer.scenario.entity import Child, Children
from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.evaluate import Outcome, evaluate
from explorer.scenario.fields import Flag, Number
from explorer.scenario.holding import holdings
from explorer.scenario.model import DoseStep, Scenario, Step
from explorer.scenario.quantity import Amount
from explorer.scenario.readouts import MINUS, NO_VALUE, READOUTS, Readout, format_value, in_words, status
from explorer.studies.plain import known
from explorer.studies.sweep import Sweep, sweep

CURRENT, OPTION, SEASON, SOURCE_OFF = "current", "option", "season", "source off"
"""Kinds of cases."""

INPUTS, HELD, READOUTS_SECTION = "Inputs", "Computed to hold", "Finished water"
"""Sections of a comparison."""

LETTERS = "ABCDEFGHIJKLMNOPQRSTUVWXYZ"

IN_SERVICE = ".on"

SAYS_BY_ABSENCE = (IN_SERVICE, ".holds")
"""Ends of the keys of settings that differ where one case does not have them."""

MINOR = ("strength", "price", "basicity", "ratio", "ceiling", "co2_ppm", "altitude")
"""Dials of a step that say nothing of interest where the step itself is missing from the other case."""

SAME = 1e-12
"""Relative difference of two inputs that counts as none."""


@dataclass(frozen=True)
class Case:
    """One column: a scenario in a season. ``letter``: of an option, "" for the others."""

    kind: str
    name: str
    scenario: Scenario
    season: str
    letter: str = ""
    note: str = ""

    @property
    def title(self) -> str:
        """Letter and name."""
        return f"{self.letter} {self.name}".strip()


@dataclass(frozen=True)
class Row:
    """One line: texts as shown, and numbers (None where there is none), by case. ``statuses``: against the
    targets of each case, "" where it has none for this readout."""

    section: str
    key: str
    label: str
    unit: str
    texts: tuple[str, ...]
    values: tuple[float | None, ...]
    statuses: tuple[str, ...] = ()


@dataclass(frozen=True)
class Comparison:
    """``rows``: only those that differ. ``problems``: by case, why there is no answer, "" where there is."""

    cases: tuple[Case, ...]
    rows: tuple[Row, ...]
    problems: tuple[str, ...]

    def section(self, name: str) -> tuple[Row, ...]:
        """The rows of one section."""
        return tuple(row for row in self.rows if row.section == name)

    def to_dict(self) -> dict[str, Any]:
        """Plain data."""
        return {
            "cases": [
                {"kind": c.kind, "letter": c.letter, "name": c.name, "season": c.season, "note": c.note}
                for c in self.cases
            ],
            "problems": list(self.problems),
            "rows": [
                {
                    "section": row.section,
                    "key": row.key,
                    "label": row.label,
                    "unit": row.unit,
                    "texts": list(row.texts),
                    "values": list(row.values),
                    "statuses": list(row.statuses),
                }
                for row in self.rows
            ],
        }

    def table(self) -> list[list[Any]]:
        """Rows for a spreadsheet, the heading first."""
        heading = ["Section", "What", "Unit", *(case.title for case in self.cases)]
        return [heading, *([row.section, row.label, row.unit, *row.texts] for row in self.rows)]


# ---- cases -------------------------------------------------------------------------------------------------


def current_case(scenario: Scenario, season: str | None = None) -> Case:
    """The scenario as it stands."""
    return Case(CURRENT, "As it stands", scenario, scenario.season if season is None else season)


def option_cases(scenario: Scenario, season: str | None = None) -> list[Case]:
    """Every kept option, in the season of the scenario where the option has it."""
    season = scenario.season if season is None else season
    return [
        Case(
            OPTION,
            option.name,
            option.scenario,
            season if season in option.scenario.seasons else option.scenario.season,
            letter,
            option.note,
        )
        for letter, option in zip(LETTERS, scenario.options, strict=False)
    ]


def season_cases(scenario: Scenario, season: str | None = None) -> list[Case]:
    """The other seasons."""
    season = scenario.season if season is None else season
    return [Case(SEASON, other, scenario, other) for other in scenario.seasons if other != season]


def source_off_cases(scenario: Scenario, season: str | None = None) -> list[Case]:
    """Each water that flows taken out of service in turn; none where only one does.

    With shares the others make up the flow, in proportion; with flows of their own the plant gives less.
    """
    running = [water for water in scenario.waters if scenario.fractions()[water.id] > 0]
    if len(running) < 2:
        return []
    by_flow = running[0].flow is not None
    note = "the others keep their flows" if by_flow else "the others make up the flow in proportion"
    found = []
    for water in running:
        without = scenario.copy()
        switch_water(without, water.id)
        found.append(Case(SOURCE_OFF, f"{water.title} off", without, season or scenario.season, note=note))
    return found


def all_cases(scenario: Scenario, season: str | None = None) -> list[Case]:
    """The scenario as it stands, its options, its other seasons, each source off."""
    makers = (option_cases, season_cases, source_off_cases)
    return [current_case(scenario, season), *(case for maker in makers for case in maker(scenario, season))]


# ---- comparison --------------------------------------------------------------------------------------------


def compare(cases: Sequence[Case], readouts: Sequence[str] | None = None) -> Comparison:
    """Cases side by side; ``readouts``: keys to look at, all of them where None.

    A case that cannot be evaluated keeps its inputs, and says why there are no results. Raises ScenarioError
    for an unknown readout.
    """
    for key in readouts or ():
        if key not in READOUTS:
            raise ScenarioError("readouts", unknown(key, "a readout", READOUTS))
    outcomes: list[Outcome | None] = []
    problems = []
    for case in cases:
        try:
            outcomes.append(evaluate(case.scenario, season=case.season))
            problems.append(str(outcomes[-1].reasons()))
        except ScenarioError as error:
            outcomes.append(None)
            problems.append(str(error))
    rows = [
        *_input_rows(cases),
        *_held_rows(cases, outcomes),
        *_readout_rows(cases, outcomes, READOUTS if readouts is None else readouts),
    ]
    return Comparison(tuple(cases), tuple(rows), tuple(problems))


def overlay(
    cases: Sequence[Case],
    dial: str | None = None,
    start: float | None = None,
    stop: float | None = None,
    points: int | None = None,
) -> list[tuple[Case, Sweep]]:
    """The sweep of each case along one dial, over the range of the first.

    Cases without the dial, or with one answer at most, are left out. Raises ScenarioError where the first
    case cannot be swept.
    """
    first = sweep(cases[0].scenario, dial, start, stop, points, cases[0].season)
    found = [(cases[0], first)]
    ends = float(first.x[0]), float(first.x[-1]), first.x.size
    for case in cases[1:]:
        try:
            swept = sweep(case.scenario, first.address, *ends, case.season)
        except ScenarioError:
            continue
        if np.count_nonzero(swept.outcome.reasons() == "") > 1:
            found.append((case, swept))
    return found


def _input_rows(cases: Sequence[Case]) -> Iterator[Row]:
    """What was decided or measured differently: season, settings that are words, dials."""
    seasons = tuple(case.season for case in cases)
    if len(set(seasons)) > 1:
        yield Row(INPUTS, "season", "Season", "", seasons, (None,) * len(cases))
    settings = [dict(_settings(case.scenario)) for case in cases]
    for key in _union(settings):
        texts = tuple(held[key][1] if key in held else NO_VALUE for held in settings)
        if len({*texts} - (set() if key.endswith(SAYS_BY_ABSENCE) else {NO_VALUE})) > 1:
            label = next(held[key][0] for held in settings if key in held)
            yield Row(INPUTS, key, label, "", texts, (None,) * len(cases))
    yield from _order_row(cases)
    every = [dials(case.scenario, case.season) for case in cases]
    held_dials = {address for case in cases for address in case.scenario.holds}
    for address in _union(every):
        if address in held_dials:
            continue
        found = [held.get(address) for held in every]
        minor = address.rpartition(".")[2] in MINOR
        if _differ([dial for dial in found if dial is not None] if minor else found):
            yield _dial_row(address, found)


def _order_row(cases: Sequence[Case]) -> Iterator[Row]:
    """The steps that all cases have, where they do not stand in one order."""
    names = [{step.id: step_name(case.scenario, step) for _, step in case.scenario.steps()} for case in cases]
    common = set.intersection(*(set(held) for held in names))
    orders = [[step for step in held if step in common] for held in names]
    if any(order != orders[0] for order in orders):
        texts = (", ".join(held[step] for step in order) for held, order in zip(names, orders, strict=True))
        yield Row(INPUTS, "order", "Order of steps", "", tuple(texts), (None,) * len(cases))


def _union(parts: Sequence[Mapping[str, Any]]) -> list[str]:
    """Keys of all mappings, those of the first one first, in their order."""
    return list(dict.fromkeys(key for part in parts for key in part))


def _differ(found: Sequence[Dial | None]) -> bool:
    if not found:
        return False
    first = found[0]
    return any(
        (dial is None) != (first is None)
        or (
            dial is not None
            and (dial.unit != first.unit or not np.isclose(dial.value, first.value, SAME, 0.0))
        )
        for dial in found[1:]
    )


def _dial_row(address: str, found: Sequence[Dial | None]) -> Row:
    there = [dial for dial in found if dial is not None]
    units = {dial.unit for dial in there}
    unit = units.pop() if len(units) == 1 else ""
    texts = tuple(
        NO_VALUE if dial is None else _number(dial.value) + ("" if unit or not dial.unit else f" {dial.unit}")
        for dial in found
    )
    values = tuple(None if dial is None else float(dial.value) for dial in found)
    return Row(INPUTS, address, there[0].label, unit, texts, values)


def _number(value: float) -> str:
    return f"{neat(float(f'{value:.6g}'))}".replace("-", MINUS)


def _settings(scenario: Scenario) -> Iterator[tuple[str, tuple[str, str]]]:
    """What is no dial: whether a water or step is in service, chemicals, solids; by key, label and words."""
    for water in scenario.waters:
        yield f"waters.{water.id}{IN_SERVICE}", (f"{water.title} in service", _yes(water.on))
    for _, step in scenario.steps():
        name = step_name(scenario, step)
        for key, part in step.fields().items():
            if key in ("id", "name", "note") or isinstance(part, Number | Amount | Child | Children):
                continue
            label = "in service" if isinstance(part, Flag) and key == "on" else part.label.lower()
            yield f"{step.id}.{key}", (f"{name}: {label}", _words(scenario, step, key))
        if isinstance(step, DoseStep):
            held = "fixed dose" if step.hold is None else READOUTS[step.hold.readout].label
            yield f"{step.id}.hold", (f"{name}: holds", held)
    for hold in holdings(scenario).values():
        if not hold.step:
            yield f"{hold.address}.holds", (f"{hold.label} holds", READOUTS[hold.readout].label)


def _words(scenario: Scenario, step: Step, key: str) -> str:
    value = getattr(step, key)
    if key == "chemical":
        return scenario.known_chemicals()[value].name
    if isinstance(value, bool):
        return _yes(value)
    return ", ".join(value) if isinstance(value, list) else str(value or NO_VALUE)


def _yes(flag: bool) -> str:
    return "yes" if flag else "no"


def _held_rows(cases: Sequence[Case], outcomes: Sequence[Outcome | None]) -> Iterator[Row]:
    """Doses and other dials that are computed, wherever at least one case holds them."""
    dosing = [{} if outcome is None else outcome.doses for outcome in outcomes]
    for step in _union(dosing):
        doses = [held.get(step) for held in dosing]
        if any(dose is not None and dose[2] for dose in doses):
            label = next(o.stage(step).name for o in outcomes if o is not None and step in o.dosing)
            found = [None if dose is None else (known(dose[0]), dose[1]) for dose in doses]
            yield from _held_row(step, f"Dose of {label}", found)
    every = [dials(case.scenario, case.season) for case in cases]
    for address in dict.fromkeys(address for case in cases for address in case.scenario.holds):
        if address.endswith(".dose"):
            continue
        found = [
            None if o is None or address not in held else (known(o.stands(address)), held[address].unit)
            for o, held in zip(outcomes, every, strict=True)
        ]
        label = next((held[address].label for held in every if address in held), address)
        yield from _held_row(address, label, found)


def _held_row(key: str, label: str, found: Sequence[tuple[float | None, str] | None]) -> Iterator[Row]:
    """Line of what is computed, where it differs; ``found``: value and unit, None where there is no such."""
    units = {part[1] for part in found if part is not None}
    unit = units.pop() if len(units) == 1 else ""
    values = tuple(None if part is None else part[0] for part in found)
    texts = tuple(
        NO_VALUE if part is None or part[0] is None else f"{part[0]:.4g}" + ("" if unit else f" {part[1]}")
        for part in found
    )
    if len(set(texts)) > 1:
        yield Row(HELD, key, label, unit, texts, values)


def _readout_rows(
    cases: Sequence[Case], outcomes: Sequence[Outcome | None], keys: Sequence[str]
) -> Iterator[Row]:
    """Results that differ as printed, those with a target first."""
    aimed = {target.readout for case in cases for target in case.scenario.targets}
    for key in sorted(keys, key=lambda key: key not in aimed):
        readout = READOUTS[key]
        values = tuple(None if o is None else known(o.readout(key)) for o in outcomes)
        texts = tuple(_text(value, readout) for value in values)
        if len(set(texts)) > 1:
            statuses = tuple(_status(case, readout, value) for case, value in zip(cases, values, strict=True))
            yield Row(READOUTS_SECTION, key, readout.label, readout.unit, texts, values, statuses)


def _text(value: float | None, readout: Readout) -> str:
    if value is None:
        return NO_VALUE
    if readout.sign_words:
        return in_words(value, readout).removesuffix(readout.unit_text)
    return format_value(value, readout)


def _status(case: Case, readout: Readout, value: float | None) -> str:
    """The worst of the case's targets for a readout."""
    found = [
        status(np.nan if value is None else value, target.low, target.high, readout.slack)
        for target in case.scenario.targets
        if target.readout == readout.key
    ]
    return next((one for one in found if one != "in range"), found[0] if found else "")
