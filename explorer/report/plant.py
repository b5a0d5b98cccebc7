"""From the sources to the finished water: stages, ledger, hand checks, quantities, measured points."""

from collections.abc import Iterator, Sequence

import numpy as np

from explorer.report.case import Case
from explorer.report.entered import dose_text
from explorer.report.markup import Markup, Part, element
from explorer.report.tables import Row, table
from explorer.scenario.errors import ScenarioError
from explorer.scenario.readouts import NO_VALUE, READOUTS, format_value
from explorer.scenario.words import number_text, unit_text
from explorer.studies.hand_checks import figure, hand_checks
from explorer.studies.ledger import SUM, Ledger
from explorer.studies.measured import all_compared
from explorer.studies.quantities import Quantities, amount_text, quantities

STAGES = ("ph", "temperature", "alkalinity", "dic", "calcium", "buffer_intensity", "ccpp")
"""Results shown at every stage."""

COLUMNS = 7
"""Columns of the ledger beside each other."""


def stages(case: Case) -> Markup | None:
    """The water after every source, step and the blend."""
    readouts = [READOUTS[key] for key in STAGES]
    heading = ["Water", *([readout.short, _under(unit_text(readout.unit))] for readout in readouts)]
    rows = [
        [
            element("strong", stage.name) if stage.kind in ("water", "blend") else stage.name,
            *(format_value(stage.readout(readout.key), readout) for readout in readouts),
        ]
        for stage in case.outcome.stages
    ]
    return table("stages", heading, rows)


def _under(text: str) -> Markup | None:
    return element("small", text, class_="under") if text else None


# ---- ledger ------------------------------------------------------------------------------------------------


def ledger_tables(case: Case) -> Iterator[Markup | None]:
    """What everything brings into a litre of finished water or takes from it, a few columns at a time."""
    made = case.ledger
    if made is None:
        yield element("p", "There is no answer here, so there is no ledger.")
        return
    for first in range(0, len(made.columns), COLUMNS):
        some = range(first, min(first + COLUMNS, len(made.columns)))
        heading = ["Per litre of finished water", *(_column(made, number) for number in some)]
        yield table("ledger", heading, _ledger_rows(made, some), look="dense", full=made.table())
    closing = (
        "Every column closes: the lines add up to the finished water but for rounding."
        if made.closed
        else "▲ The lines do not add up to the finished water; the residual says by how much."
    )
    yield element("p", closing, class_="small")


def _column(made: Ledger, number: int) -> Part:
    return [made.columns[number].label, _under(unit_text(made.columns[number].unit))]


def _ledger_rows(made: Ledger, some: Sequence[int]) -> Iterator[Row]:
    decimals = {number: _decimals(made, number) for number in some}

    def row(title: Part, amounts: np.ndarray, signed: bool = True) -> Row:
        return [title, *(_amount(float(amounts[number]), decimals[number], signed) for number in some)]

    for line in made.lines:
        sums = line.kind == SUM
        yield row(element("em", line.text) if sums else line.text, line.amounts, not sums)
    yield row(element("strong", "Finished water"), made.finished, False)
    if not made.closed:
        yield row("Residual", made.residual)


def _decimals(made: Ledger, number: int) -> int:
    """Decimals with which the largest amount of a column has four figures."""
    largest = max(abs(float(line.amounts[number])) for line in made.lines)
    return int(np.clip(3 - np.floor(np.log10(largest)), 0, 4)) if largest else 0


def _amount(value: float, decimals: int, signed: bool) -> str:
    return number_text(value, decimals, signed) if value else ""


def checks(case: Case) -> Markup | None:
    """Arithmetic that a sceptic can repeat on paper."""
    made = hand_checks(case.scenario, case.outcome)
    return element("ol", [element("li", check.text()) for check in made]) if made else None


# ---- quantities --------------------------------------------------------------------------------------------


def amounts(case: Case) -> Iterator[Markup | None]:
    """Chemicals, pumps, solids and money."""
    try:
        made = quantities(case.scenario)
    except ScenarioError as error:
        yield element("p", f"There are no quantities; {error}.")
        return
    yield table("quantities", *_chemicals(case, made), left=(0, 1), full=made.table())
    yield table("pumps", *_pumps(made), left=(0,))
    solids = [
        [
            solid.name,
            amount_text(solid.concentration),
            amount_text(solid.kg_per_day),
            amount_text(solid.t_per_year),
        ]
        for solid in made.solids
        if solid.concentration > 0
    ]
    yield table("solids", ["Dry solids formed", "mg/L", "kg/d", "t/year"], solids)
    said = [note.text for note in made.notes]
    if np.isfinite(made.cost_per_ml) and made.price_date:
        said.append(f"prices of {made.price_date}")
    if made.doses:
        said.append(f"pumps: over all seasons{_flow_range(made)}; t/year at the flow and doses of now")
    if said:
        sentence = "; ".join(said)
        yield element("p", f"{sentence[0].upper()}{sentence[1:]}.", class_="small")


def _flow_range(made: Quantities) -> str:
    if made.low_flow < made.high_flow:
        return f" and flows of {amount_text(made.low_flow)} to {amount_text(made.high_flow)} m³/h"
    return ", at the flow entered"


def _chemicals(case: Case, made: Quantities) -> tuple[Row, list[Row]]:
    """Heading and rows: what is used, and what it costs where prices are entered."""
    money = np.isfinite(made.cost_per_ml)
    heading = ["Chemical", "Dose", "Active, kg/d", "Product, kg/d", "Product, t/year"]
    rows = [
        [
            dose.name,
            dose_text(case, dose.step),
            amount_text(dose.active_kg_per_day),
            amount_text(dose.product_kg_per_day),
            amount_text(dose.product_t_per_year),
            *(map(amount_text, (dose.price, dose.cost_per_ml, dose.cost_per_year)) if money else ()),
        ]
        for dose in made.doses
    ]
    if money:
        label = made.currency or "cost"
        heading += [f"{label} per kg", f"{label} per ML", f"{label} per year"]
        rows.append(["All", *[""] * 5, amount_text(made.cost_per_ml), amount_text(made.cost_per_year)])
    return heading, rows


def _pumps(made: Quantities) -> tuple[Row, list[Row]]:
    """Heading and rows: what the pumps must deliver, and how long a tank lasts where tanks are entered."""
    tanks = any(np.isfinite(dose.tank) for dose in made.doses)
    heading = ["Pump", "Strength, %", "kg/L", "L/h now", "least", "most", "Turndown"]
    heading += ["Tank, m³", "lasts, days"] if tanks else []
    rows = [
        [
            dose.name,
            *map(amount_text, (dose.strength, dose.density, dose.rate, dose.lowest_rate, dose.highest_rate)),
            f"{figure(dose.turndown, 3)} : 1" if np.isfinite(dose.turndown) else NO_VALUE,
            *(map(amount_text, (dose.tank, dose.storage)) if tanks else ()),
        ]
        for dose in made.doses
    ]
    return heading, rows


def measured(case: Case) -> Markup | None:
    """How far measured points are from the model."""
    said = [comparison.sentence() for comparison in all_compared(case.scenario)]
    return element("ul", [element("li", f"{sentence}.") for sentence in said]) if said else None
