"""From the sources to the finished water: stages, ledger, hand checks, quantities, measured points."""

from collections.abc import Iterator, Sequence

import numpy as np

from explorer.report.case import Case
from explorer.report.entered import dose_text
from explorer.report.markup import Markup, Part, element
from explorer.report.tables import Row, table
from explorer.scenario.errors import ScenarioError
from explorer.scenario.readouts import MINUS, NO_VALUE, READOUTS, format_value
from explorer.scenario.words import number_text, unit_text
from explorer.studies.hand_checks import figure, hand_checks
from explorer.studies.ledger import SUM, Ledger
from explorer.studies.measured import all_compared
from explorer.studies.quantities import DoseUse, quantities

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
    money = any(np.isfinite(dose.cost_per_ml) for dose in made.doses)
    currency = made.currency or "cost"
    heading = ["Chemical", "Dose", "Active, kg/d", "Product, kg/d", "t/year", "Pump, L/h", "Range, L/h"]
    rows = [_dose_row(case, dose, money) for dose in made.doses]
    if money:
        heading += [f"{currency} per ML", f"{currency} per year"]
        rows.append(["All", *[""] * 6, _amount_of(made.cost_per_ml), _amount_of(made.cost_per_year)])
    yield table("quantities", heading, rows, left=(0, 1))
    solids = [
        [
            solid.name,
            _amount_of(solid.concentration),
            _amount_of(solid.kg_per_day),
            _amount_of(solid.t_per_year),
        ]
        for solid in made.solids
        if solid.concentration > 0
    ]
    yield table("solids", ["Dry solids formed", "mg/L", "kg/d", "t/year"], solids)
    said = [note.text for note in made.notes]
    if money and made.price_date:
        said.append(f"prices of {made.price_date}")
    if made.doses:
        said.append("range of the pump: over all seasons at the flow entered")
    if said:
        sentence = "; ".join(said)
        yield element("p", f"{sentence[0].upper()}{sentence[1:]}.", class_="small")


def _dose_row(case: Case, dose: DoseUse, money: bool) -> Row:
    pump = [dose.lowest_rate, dose.highest_rate]
    span = " to ".join(dict.fromkeys(_amount_of(rate) for rate in pump))
    return [
        dose.name,
        dose_text(case, dose.step),
        _amount_of(dose.active_kg_per_day),
        _amount_of(dose.product_kg_per_day),
        _amount_of(dose.product_t_per_year),
        _amount_of(dose.rate),
        span,
        *((_amount_of(dose.cost_per_ml), _amount_of(dose.cost_per_year)) if money else ()),
    ]


def _amount_of(value: float) -> str:
    """A quantity to three figures, or all of a larger one."""
    if not np.isfinite(value):
        return NO_VALUE
    return (
        f"{value:,.0f}".replace(",", "\u202f").replace("-", MINUS) if abs(value) >= 1000 else figure(value, 3)
    )


def measured(case: Case) -> Markup | None:
    """How far measured points are from the model."""
    said = [comparison.sentence() for comparison in all_compared(case.scenario)]
    return element("ul", [element("li", f"{sentence}.") for sentence in said]) if said else None
