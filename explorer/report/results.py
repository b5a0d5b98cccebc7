"""What comes out: targets, the sweep in figures and numbers, options side by side, every result."""

from collections.abc import Iterator, Sequence
from dataclasses import replace

import numpy as np

from explorer.report.case import Case, value_text
from explorer.report.markup import Markup, Part, element
from explorer.report.spread import Tolerances
from explorer.report.svg import plot
from explorer.report.tables import Group, Row, table, unit_cell
from explorer.scenario.evaluate import Outcome
from explorer.scenario.model import Target
from explorer.scenario.outcome import FINISHED
from explorer.scenario.readouts import NO_VALUE, READOUTS, Readout, format_value, in_words, status
from explorer.scenario.words import in_sentence, range_text, unit_text
from explorer.studies.compare import Comparison, current_case, option_cases, overlay
from explorer.studies.hand_checks import figure
from explorer.studies.pictures import Dots, Line, Picture
from explorer.studies.sweep import Sweep
from explorer.studies.sweep_pictures import picture_of, picture_of_species, with_options

MOST_CURVES = 4
"""Options drawn beside the scenario as it stands."""

ABREAST, RESULTS = 5, 10
"""Places along the sweep that the table shows, and results at each."""

STATUS = {
    "in range": "● meets the entered target",
    "below": "▼ below the entered target",
    "above": "▲ above the entered target",
    "no value": "no value",
}
MAY_BE_ABSENT = ("Ions", "Chlorine and ammonia", "Solids and cost")
OUTSIDE = {"below": " ▼", "above": " ▲"}


def targets(case: Case) -> Markup | None:
    """Every entered target with value, margin and state."""
    rows: list[Row] = []
    for target, value, _, margin in case.outcome.targets():
        readout = READOUTS[target.readout]
        state = status(float(value), target.low, target.high, readout.slack)
        aim: Part = [range_text(target.low, target.high), _small(target.basis)]
        rows.append(
            [
                [readout.label, _small(readout.meaning)],
                element("strong", value_text(float(value), readout)),
                unit_cell(readout.unit),
                aim,
                format_value(float(margin), readout),
                element("span", STATUS[state], class_="met" if state == "in range" else "missed"),
            ]
        )
    heading = ["Result", "Value", "Unit", "Entered target and its basis", "Margin", "State"]
    return table("targets", heading, rows, left=(0, 2, 3, 5))


def _small(text: str) -> Markup | None:
    return element("small", text, class_="under") if text else None


# ---- the sweep ---------------------------------------------------------------------------------------------


def figures(case: Case, keys: Sequence[str], family: str, spread: Tolerances) -> Iterator[Markup]:
    """One figure a readout, and that of the species after the first."""
    here = float(case.outcome.stands(case.swept.address))
    options = _options(case)
    for number, key in enumerate(keys):
        picture = picture_of(case.swept, key, case.scenario.targets)
        picture = with_options(picture, key, options, None) if options else picture
        picture = replace(picture, fan=spread.fan(key, picture.x), dots=_dots(case, key))
        now = f"now {value_text(case.value(key), READOUTS[key])}"
        yield _figure(case, picture, plot(picture, case.along, here, f"plot-{key}"), now)
        if number == 0:
            picture = picture_of_species(case.swept, family, case.family_name(family))
            yield _figure(case, picture, plot(picture, case.along, here, "plot-species"))


def _options(case: Case) -> list[tuple[Line, Sweep]]:
    """The sweeps of the first kept options along the same dial, with the look of their curves."""
    cases = [current_case(case.scenario), *option_cases(case.scenario)[:MOST_CURVES]]
    return [
        (Line(option.letter, np.array([]), place, place), swept)
        for place, (option, swept) in enumerate(overlay(cases))
        if option.letter
    ]


def _dots(case: Case, key: str) -> tuple[Dots, ...]:
    """Measured points of a readout of the finished water along the dial of the sweep."""
    found = []
    for made in case.scenario.measured:
        if (made.titration, made.dial, made.stage) == (None, case.swept.address, FINISHED):
            x, y = np.array(made.points, float).T
            found += [Dots(made.name, x, y)] if made.readout == key else []
    return tuple(found)


def _figure(case: Case, picture: Picture, drawn: Markup, now: str = "") -> Markup:
    note = " · ".join(filter(None, [picture.note, now]))
    missing = [
        element("small", f"No result from {case.along.at(start)} to {case.along.at(stop)}: {reason}.")
        for start, stop, reason in picture.gaps
    ]
    caption = element("figcaption", element("strong", picture.title), element("span", note))
    return element("figure", caption, drawn, missing)


def along_table(case: Case) -> Markup | None:
    """Five places along the sweep, and the operating point, with the results of most interest."""
    swept = case.swept
    x = np.linspace(swept.x[0], swept.x[-1], ABREAST)
    columns = [case.outcome, swept.at(x)]
    now = float(case.outcome.stands(swept.address))
    heading = ["", f"now, {case.along.at(now)}", *(case.along.at(value) for value in x)]
    rows: list[Row | Group] = []
    for key in case.results(RESULTS):
        readout = READOUTS[key]
        aims = [target for target in case.scenario.targets if target.readout == key]
        values = np.concatenate([np.ravel(column.readout(key)) for column in columns])
        label = f"{readout.label}, {unit_text(readout.unit)}" if readout.unit else readout.label
        rows.append([label, *(_marked(value, readout, aims) for value in values)])
    rows += _held_rows(columns)
    return table("along-the-sweep", heading, rows, full=swept.table(case.results(RESULTS)))


def _marked(value: float, readout: Readout, aims: Sequence[Target]) -> str:
    """A value with the mark of the first target that it misses."""
    states = [status(float(value), aim.low, aim.high, readout.slack) for aim in aims]
    return value_text(value, readout) + next((OUTSIDE[state] for state in states if state in OUTSIDE), "")


def _held_rows(columns: Sequence[Outcome]) -> Iterator[Row]:
    """Doses that are computed, at the same places."""
    for step, (_, unit, held) in columns[0].doses.items():
        if held:
            values = np.concatenate([np.ravel(column.doses[step][0]) for column in columns])
            label = f"Dose of {columns[0].stage(step).name}, {unit_text(unit)}"
            yield [label, *(figure(value) if np.isfinite(value) else NO_VALUE for value in values)]


# ---- side by side ------------------------------------------------------------------------------------------


def comparison(name: str, made: Comparison, whole: Comparison) -> Markup | None:
    """Cases side by side, only what differs; ``whole``: the same with every result, for the CSV."""
    rows: list[Row | Group] = []
    for section in dict.fromkeys(row.section for row in made.rows):
        rows.append(Group(section))
        for row in made.section(section):
            label = f"{row.label}, {unit_text(row.unit)}" if row.unit else row.label
            marks = [OUTSIDE.get(state, "") for state in row.statuses] or [""] * len(row.texts)
            rows.append([label, *(text + mark for text, mark in zip(row.texts, marks, strict=True))])
    problems = [f"no answer: {problem}" if problem else "" for problem in made.problems]
    if any(problems):
        rows.append(["Answer", *problems])
    heading = ["", *([case.title, _small(case.note)] for case in made.cases)]
    return table(name, heading, rows, look="named", full=whole.table())


def everything(case: Case) -> Iterator[Part]:
    """Every result of the finished water, in the groups of the registry; what is not there in one line."""
    rows: list[Row | Group] = []
    absent = []
    for key in case.readouts():
        readout, value = READOUTS[key], case.value(key)
        if not value and readout.group in MAY_BE_ABSENT:
            absent.append(in_sentence(readout.label))
            continue
        if Group(readout.group) not in rows:
            rows.append(Group(readout.group))
        words = f"{case.scenario.currency} {readout.unit}".strip() if key == "cost" else readout.unit
        rows.append([readout.label, value_text(value, readout), unit_cell(words), _small(readout.source)])
    heading = ["Result", "Value", "Unit", "How it is found"]
    yield table("results", heading, rows, left=(0, 2, 3), look="dense")
    if absent:
        yield element("p", f"None in this water: {', '.join(absent)}.", class_="small")


def doses_line(case: Case) -> str:
    """The blend and the doses in one line."""
    blend = ", ".join(
        f"{figure(100 * float(part))} % {case.outcome.stage(water).name}"
        for water, part in case.outcome.parts.items()
    )
    doses = ", ".join(
        f"{case.outcome.stage(step).name} {figure(float(value))} {unit_text(unit)}"
        for step, (value, unit, _) in case.outcome.doses.items()
    )
    return f"{blend}; {doses}" if doses else blend


def season_line(case: Case) -> str:
    """Season and temperature, which every result depends on."""
    temperature = in_words(case.value("temperature"), READOUTS["temperature"])
    blend = in_words(case.value("temperature", "blend"), READOUTS["temperature"])
    after = "" if blend == temperature else f" (blend {blend})"
    return f"Season {case.season}, finished water at {temperature}{after}"
