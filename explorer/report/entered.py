"""What was entered: source waters with their analyses, and the treatment train."""

from collections.abc import Iterator, Sequence

import numpy as np

from explorer.report.case import Case
from explorer.report.markup import Markup, Part, element
from explorer.report.tables import Group, Row, table
from explorer.scenario.fields import Flag, Number
from explorer.scenario.measured import ENTRY_RULES
from explorer.scenario.model import DoseStep, Measured, Quantity, Step, Water
from explorer.scenario.readouts import NO_VALUE, READOUTS, format_value
from explorer.scenario.words import formula_text, short_number, unit_text
from explorer.studies.hand_checks import figure
from explorer.treatment.analysis import entry_units
from explorer.treatment.chemicals import density
from explorer.treatment.units import find_unit, from_base

ABREAST = 5
"""Waters beside each other in one table."""

NOT_AMOUNTS = ("temperature", "ph", "tds", "conductivity")
"""Entries that are no amount of substance."""


def waters(case: Case) -> Iterator[Markup | None]:
    """The source waters side by side, with what was said about single values."""
    every = case.scenario.waters
    for first in range(0, len(every), ABREAST):
        some = every[first : first + ABREAST]
        heading = ["", *(water.title for water in some)]
        yield table("source-waters", heading, _water_rows(case, some), look="named")
    marks = "In brackets: the same in mmol/L, alkalinity in meq/L. † assumed, not measured."
    yield element("p", marks, class_="small")
    remarks = list(_remarks(case))
    if remarks:
        yield element("ul", [element("li", remark) for remark in remarks], class_="small")


def _water_rows(case: Case, some: Sequence[Water]) -> Iterator[Row]:
    parts = case.outcome.parts
    yield ["Share of the blend", *(_share(parts.get(water.id)) for water in some)]
    flow_unit = _flow_unit(case)
    if flow_unit:
        flow = float(case.outcome.stage("blend").flow)
        flows = [float(from_base(parts.get(water.id, 0.0) * flow, flow_unit, "flow")) for water in some]
        yield [f"Flow, {flow_unit}", *(figure(value) for value in flows)]
    analyses = [water.analyses[case.season] for water in some]
    keys = dict.fromkeys(key for key in ENTRY_RULES if any(key in a.entries for a in analyses))
    keys |= dict.fromkeys(key for analysis in analyses for key in analysis.entries)
    for key in keys:
        entries = [analysis.entries.get(key) for analysis in analyses]
        units = {entry.unit for entry in entries if entry is not None}
        common = units.pop() if len(units) == 1 else ""
        label = _entry_label(case, key)
        heading = f"{label}, {unit_text(common)}" if common else label
        yield [heading, *(_entry(case, key, entry, not common) for entry in entries)]


def _share(part: np.ndarray | None) -> str:
    return "out of service" if part is None else f"{figure(100 * float(part))} %"


def _flow_unit(case: Case) -> str:
    """Unit in which the flow was entered, "" where none was."""
    given = [case.scenario.flow, *(water.flow for water in case.scenario.waters)]
    return next((flow.unit for flow in given if flow is not None), "")


def _entry_label(case: Case, key: str) -> str:
    own = next((acid for acid in case.scenario.acids if acid.id == key), None)
    return (own.name or own.id) if own is not None else ENTRY_RULES[key].label


def _entry(case: Case, key: str, entry: Measured | None, with_unit: bool) -> Part:
    if entry is None:
        return NO_VALUE
    text = short_number(entry.value) if entry.below is None else f"< {short_number(entry.below)}"
    text += f" {unit_text(entry.unit)}" if with_unit and entry.unit else ""
    text += f" ± {short_number(entry.plus_minus)}" if entry.plus_minus is not None else ""
    text += f" at {short_number(entry.read_at)} °C" if entry.read_at is not None else ""
    return [text + " †" * entry.assumed, _in_moles(case, key, entry)]


def _in_moles(case: Case, key: str, entry: Measured) -> Markup | None:
    if key in NOT_AMOUNTS:
        return None
    units = entry_units(key, case.outcome.stages[0].system)
    moles = 1000 * float(find_unit(entry.unit, units).to_base(entry.central))
    return element("small", f" ({figure(moles, 3)})", class_="moles")


def _remarks(case: Case) -> Iterator[str]:
    for water in case.scenario.waters:
        if water.note:
            yield f"{water.title}: {water.note}"
        for key, entry in water.analyses[case.season].entries.items():
            if entry.note:
                yield f"{water.title}, {_entry_label(case, key)}: {entry.note}"


# ---- train -------------------------------------------------------------------------------------------------


def train(case: Case) -> Markup | None:
    """Every step in the order of flow, its settings as entered; › marks those on a side stream."""
    rows: list[Row | Group] = []
    for place, steps in case.places():
        rows += [Group(place), *(_step_row(case, depth, step) for depth, step in steps)]
    heading = ["Step", "As entered", "mmol/L", "Product", "pH after"]
    return table("train", heading, rows, left=(0, 1, 3))


def _step_row(case: Case, depth: int, step: Step) -> Row:
    name: Part = [
        "› " * depth + case.name(step),
        element("small", step.note, class_="under") if step.note else None,
    ]
    if not step.on:
        return [name, "out of service", "", "", ""]
    after = format_value(case.value("ph", step.id), READOUTS["ph"])
    if isinstance(step, DoseStep):
        dose = case.outcome.dosing[step.id]
        return [name, _dose(case, step), figure(1000 * float(dose.moles), 3), _product(case, step), after]
    return [name, ", ".join(_settings(step)) or step.kind_title, "", "", after]


def dose_text(case: Case, step_id: str) -> str:
    """A dose with its unit and what it is counted as."""
    dose = case.outcome.dosing[step_id]
    value = figure(float(dose.value)) if dose.held else short_number(float(dose.value))
    basis = f" as {formula_text(dose.chemical.plain)}" if dose.unit == "mg/L" and dose.chemical.plain else ""
    return f"{value} {unit_text(dose.unit)}{basis}"


def _dose(case: Case, step: DoseStep) -> Part:
    chemical = case.outcome.dosing[step.id].chemical
    named = "" if case.name(step) == chemical.name else f"{chemical.name}, "
    if step.hold is None:
        return named + dose_text(case, step.id)
    readout = READOUTS[step.hold.readout]
    ceiling = f"{short_number(step.hold.ceiling.value)} {unit_text(step.hold.ceiling.unit)}"
    held = f"{readout.label} {short_number(step.hold.value)}{readout.unit_text}"
    met = "" if bool(case.outcome.dosing[step.id].met) else "; ▲ not met"
    return f"{named}{dose_text(case, step.id)}, computed to hold {held}, at most {ceiling}{met}"


def _product(case: Case, step: DoseStep) -> Part:
    """Strength and density of the product; the usual ones where none was entered."""
    dose = case.outcome.dosing[step.id]
    strength = dose.chemical.usual_strength if dose.strength is None else float(dose.strength)
    if strength is None:
        return NO_VALUE
    heavy = float(density(dose.chemical, strength))
    text = f"{short_number(strength)} %" + (f", {figure(heavy, 3)} kg/L" if np.isfinite(heavy) else "")
    return text + (" (usual)" if step.strength is None else "")


def _settings(step: Step) -> Iterator[str]:
    """Settings of a step that is no dose, as far as they were entered: label, value, unit."""
    written = step.to_dict()
    for key, part in step.fields().items():
        value = getattr(step, key)
        if key in ("id", "name", "note", "on", "train") or key not in written or value is None:
            continue
        label = part.label
        if isinstance(value, Quantity):
            yield f"{label} {short_number(value.value)} {unit_text(value.unit)}"
        elif isinstance(part, Number):
            yield f"{label} {short_number(value)} {unit_text(part.unit)}".strip()
        elif isinstance(part, Flag):
            if value:
                yield label
        else:
            yield f"{label} {', '.join(value) if isinstance(value, list) else value}"
