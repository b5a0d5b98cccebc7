"""What the results rest on: assumptions, data, method, constants, cautions, and what is to be tested."""

from collections.abc import Iterator

import numpy as np

from explorer.chemistry.constants import Constant, dissolved, log_k, solids
from explorer.report.case import Case
from explorer.report.markup import Markup, Part, element
from explorer.report.tables import Group, Row, table, unit_cell
from explorer.scenario.readouts import NO_VALUE, READOUTS, format_value
from explorer.scenario.version import method
from explorer.scenario.words import number_text, short_number
from explorer.studies.basis import assumptions, held_values, provenance
from explorer.studies.cautions import EXCLUDED, hazards, next_tests, standing_cautions
from explorer.studies.methods import METHOD, OUTSIDE_CHECKS, VALIDITY, reaction_text
from explorer.studies.outside_checks import OutsideCheck, by_topic
from explorer.treatment.analysis import Balance

LEVELS = {"error": "✕", "caution": "▲", "info": "i"}


def alarms(case: Case) -> Markup | None:
    """What should make a reader stop, the most serious first."""
    order = list(LEVELS)
    found = sorted(case.alarms, key=lambda note: order.index(note.level))
    said = list(
        dict.fromkeys((note.level, case.place_of(note.where), note.text, note.source) for note in found)
    )
    items = [
        element(
            "li",
            element("span", LEVELS[level], class_="glyph"),
            element("strong", f"{place}: ") if place else None,
            text,
            element("small", f" ({source})") if source else None,
            class_=level,
        )
        for level, place, text, source in said
    ]
    return element("ul", items, class_="alarms") if items else None


def cautions(case: Case) -> Iterator[Markup | None]:
    """What always goes with the results, and with the chemicals."""
    yield element("ul", [element("li", text) for text in standing_cautions(case.scenario)])
    rows = [
        [hazard.chemical, ", ".join(hazard.steps), "; ".join(hazard.cautions)]
        for hazard in hazards(case.scenario, case.outcome)
    ]
    yield table("chemicals", ["Chemical", "Where", "Beware"], rows, left=(0, 1, 2))


def exclusions() -> Markup:
    """What no result counts."""
    return element("ul", [element("li", element("strong", f"{what}: "), text) for what, text in EXCLUDED])


def tests(case: Case) -> Markup:
    """What has to be tested before anybody relies on the results."""
    found = next_tests(case.scenario, case.outcome)
    return element("ol", [element("li", f"{test.what} ({test.why}).") for test in found])


def holds(case: Case) -> Markup | None:
    """Every dial that is computed, what it holds, and whether that is reached."""
    rows = [
        [
            found.dial,
            element("strong", found.takes),
            unit_cell(found.unit),
            found.limits,
            f"{found.readout} {found.goal}",
            found.where,
            element(
                "span",
                found.state if found.met else f"▲ {found.state}",
                class_=None if found.met else "missed",
            ),
        ]
        for found in held_values(case.scenario, case.outcome)
    ]
    heading = ["Computed", "Takes", "Unit", "Within", "To hold", "Where", "State"]
    return table("holds", heading, rows, left=(0, 2, 3, 4, 5, 6)) if rows else None


def register(case: Case) -> Markup | None:
    """Every assumption."""
    rows = [
        [found.what, found.value, unit_cell(found.unit), found.basis, found.source]
        for found in assumptions(case.scenario, case.outcome)
    ]
    return table(
        "assumptions",
        ["Assumption", "Value", "Unit", "Basis", "Source"],
        rows,
        left=(0, 2, 3, 4),
        look="dense",
    )


def data(case: Case) -> Markup | None:
    """Where the analyses are from, and whether they balance."""
    rows: list[Row] = []
    for found in provenance(case.scenario):
        remarks: Part = [
            element("small", text, class_="under") for text in (*found.remarks, found.note) if text
        ]
        closed = _balance(found.after) + f" ({found.closed_with})" if found.closed_with else "not closed"
        mark = "" if found.before.acceptable else " ▲"
        rows.append(
            [
                [f"{found.water}, {found.season}", remarks],
                found.lab or NO_VALUE,
                found.sampled or NO_VALUE,
                found.file or NO_VALUE,
                found.by or NO_VALUE,
                [_balance(found.before) + mark, element("small", found.before.limit, class_="under")],
                closed,
            ]
        )
    heading = [
        "Analysis",
        "Laboratory",
        "Sampled",
        "File",
        "Entered by",
        "Charge balance as entered",
        "Closed",
    ]
    return table("provenance", heading, rows, left=range(5), look="dense")


def _balance(balance: Balance) -> str:
    return f"{number_text(balance.percent, 1, signed=True)} %"


# ---- method ------------------------------------------------------------------------------------------------


def method_text(case: Case) -> Iterator[Markup]:
    """How it was calculated, within which limits."""
    for paragraph in (*METHOD, VALIDITY):
        yield element("p", paragraph)
    strengths = [float(stage.readout("ionic_strength")) for stage in case.outcome.stages]
    known = [strength for strength in strengths if np.isfinite(strength)]
    most = format_value(max(known), READOUTS["ionic_strength"]) if known else NO_VALUE
    yield element("p", f"Highest ionic strength here: {most} mol/L. Method: {method()}.")


def constants(case: Case) -> Markup | None:
    """Reactions whose species occur here, with constant and source; then those left out of them."""
    temperature = case.value("temperature")
    species = _occurring(case)
    used = [one for one in dissolved() if one.used and one.name in species]
    rows: list[Row | Group] = [Group("Dissolved species"), *(_constant(one, temperature) for one in used)]
    rows += [
        Group("Solids"),
        *(_constant(one, temperature) for one in solids().values() if _may_form(one, species)),
    ]
    left = [one for one in dissolved() if not one.used and _sides(one) <= species]
    if left:
        rows += [
            Group("Left out"),
            *([reaction_text(one), NO_VALUE, NO_VALUE, one.note or one.source] for one in left),
        ]
    heading = ["Reaction", *(_at(celsius) for celsius in (25.0, temperature)), "Source"]
    return table("constants", heading, rows, left=(0, 3), look="dense")


def outside_checks() -> Iterator[Markup | None]:
    """Published figures beside those of the engine."""
    yield element("ul", [element("li", text) for text in OUTSIDE_CHECKS])
    rows = [line for topic, found in by_topic() for line in (Group(topic), *map(_check, found))]
    heading = ["Published case", "Printed", "Engine", "Difference", "Allowed", "Reason", "Source"]
    yield table("outside checks", heading, rows, left=(0, 5, 6), look="dense checks")


def _check(one: OutsideCheck) -> Row:
    about = element("small", one.about, class_="under") if one.about else None
    printed, engine, difference, allowed = one.numbers
    mark = "▲ " if one.parts else ""
    figures = [[printed, " ", unit_cell(one.unit)], engine, mark + difference, allowed]
    return [[one.case, about], *figures, one.why, one.source]


def _at(celsius: float) -> Part:
    return ["log K", element("small", f"{short_number(round(celsius, 1))} °C", class_="under")]


def _occurring(case: Case) -> set[str]:
    """Species with a concentration anywhere in the plant, and what every water has."""
    found = {"H2O", "H+"}
    for stage in case.outcome.stages:
        solution = stage.solution
        found |= {name for name in solution.species if np.any(solution.concentration(name) > 0)}
    return found


def _sides(constant: Constant) -> set[str]:
    return {name for name in constant.reaction if name != constant.name}


def _may_form(constant: Constant, species: set[str]) -> bool:
    return constant.used and {name for name, count in constant.reaction.items() if count > 0} <= species


def _constant(constant: Constant, temperature: float) -> Row:
    at = float(log_k([constant], temperature)[0])
    memory = "" if constant.confidence == "verified" else " (from memory)"
    return [
        reaction_text(constant),
        number_text(constant.log_k25, 3),
        number_text(at, 3),
        [
            constant.source + memory,
            element("small", constant.note, class_="under") if constant.note else None,
        ],
    ]
