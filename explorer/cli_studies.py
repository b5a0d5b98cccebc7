"""Commands of the studies: ledger, titrate, compare, quantities."""

import argparse
import json
import sys
from collections.abc import Callable, Iterator, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from explorer.cli_parts import UsageError, aligned, entered, number, opened, pair, scenario_arguments
from explorer.scenario.csv_text import csv_text
from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.evaluate import evaluate
from explorer.scenario.readouts import MINUS, NO_VALUE, READOUTS, format_value
from explorer.treatment.units import to_base

if TYPE_CHECKING:
    from explorer.studies.compare import Comparison
    from explorer.studies.ledger import Ledger
    from explorer.studies.quantities import DoseUse, Quantities
    from explorer.studies.titration import Titration

COMMANDS = ("ledger", "titrate", "compare", "quantities")

LEDGER_COLUMNS = (
    "alkalinity",
    "dic",
    "calcium",
    "hardness",
    "sodium",
    "chloride",
    "sulfate",
    "free_chlorine",
)
"""Columns of a ledger on the screen where none are asked for."""

Command = Callable[..., argparse.ArgumentParser]


def register(command: Command) -> None:
    """Add the commands; ``command(name, run, help)`` makes the parser of one."""
    ledger = command("ledger", _ledger, "What every source, dose, solid and gas adds or takes, step by step.")
    scenario_arguments(ledger)
    ledger.add_argument("--columns", metavar="K1,K2", help="quantities on the screen, separated by commas")
    _forms(ledger)

    titrate = command("titrate", _titrate, "Add acid or base to the water at a stage.")
    scenario_arguments(titrate)
    titrate.add_argument("--stage", default="finished", metavar="S", help="stage; %(default)s without it")
    titrate.add_argument("--chemical", required=True, metavar="C", help="key of the chemical")
    titrate.add_argument("--opposite", metavar="C", help="chemical that negative doses stand for")
    titrate.add_argument("--unit", metavar="U", help="unit of the dose; the usual one without it")
    titrate.add_argument("--from", dest="start", type=number, default=0.0, metavar="A", help="first dose")
    titrate.add_argument("--to", dest="stop", type=number, required=True, metavar="B", help="last dose")
    titrate.add_argument("--points", type=int, default=21, metavar="N", help="number of doses")
    _forms(titrate)

    compare = command("compare", _compare, "Options, seasons and sources off side by side, what differs.")
    compare.add_argument("file", metavar="FILE", help="scenario file")
    compare.add_argument("--season", help="season whose analyses count; the scenario's own without it")
    compare.add_argument("--readouts", metavar="K1,K2", help="readouts to look at, separated by commas")
    _forms(compare)

    quantities = command("quantities", _quantities, "Product, pumps, tanks, solids and money.")
    scenario_arguments(quantities)
    form = "STEP=M3"
    quantities.add_argument(
        "--tank", action="append", default=[], type=pair(form), metavar=form, help="usable volume of a tank"
    )
    quantities.add_argument(
        "--low-flow", type=number, metavar="Q", help="lowest flow, in the scenario's unit"
    )
    quantities.add_argument("--high-flow", type=number, metavar="Q", help="highest flow")
    quantities.add_argument("--json", action="store_true", help="print JSON")


def _forms(parser: argparse.ArgumentParser) -> None:
    form = parser.add_mutually_exclusive_group()
    form.add_argument("--csv", action="store_true", help="print CSV")
    form.add_argument("--json", action="store_true", help="print JSON")


def _print(options: argparse.Namespace, made: Any, text: Iterator[str]) -> None:
    if options.json:
        print(json.dumps(made.to_dict(), ensure_ascii=False, indent=2))
    elif getattr(options, "csv", False):
        sys.stdout.write(csv_text(made.table()))
    else:
        print("\n".join(text))


# ---- commands ----------------------------------------------------------------------------------------------


def _ledger(options: argparse.Namespace) -> None:
    from explorer.studies.hand_checks import hand_checks
    from explorer.studies.ledger import ledger

    scenario, dials = opened(options)
    outcome = evaluate(scenario, dials, options.season)
    made = ledger(scenario, outcome)
    keys = [column.key for column in made.columns]
    asked = options.columns.split(",") if options.columns else [key for key in LEDGER_COLUMNS if key in keys]
    for key in asked:
        if key.strip() not in keys:
            raise ScenarioError("columns", unknown(key.strip(), "a column of this ledger", keys))
    checks = hand_checks(scenario, outcome)
    if options.json:
        print(
            json.dumps(
                {**made.to_dict(), "hand_checks": [c.to_dict() for c in checks]}, ensure_ascii=False, indent=2
            )
        )
        return
    _print(options, made, _ledger_text(made, [key.strip() for key in asked], [c.text() for c in checks]))


def _titrate(options: argparse.Namespace) -> None:
    from explorer.studies.titration import titration

    scenario, dials = opened(options)
    made = titration(
        scenario, options.stage, options.chemical, start=options.start, stop=options.stop,
        points=options.points, unit=options.unit, opposite=options.opposite, dials=dials,
        season=options.season,
    )  # fmt: skip
    _print(options, made, _titration_text(made))


def _compare(options: argparse.Namespace) -> None:
    from explorer.scenario.files import open_scenario
    from explorer.studies.compare import all_cases, compare

    scenario = open_scenario(options.file)
    readouts = None if options.readouts is None else [key.strip() for key in options.readouts.split(",")]
    cases = all_cases(scenario, options.season)
    if len(cases) < 2:
        raise UsageError("there is nothing to compare; allowed with an option, a second season or source")
    made = compare(cases, readouts)
    _print(options, made, _comparison_text(made))


def _quantities(options: argparse.Namespace) -> None:
    from explorer.studies.quantities import quantities

    scenario, dials = opened(options)
    unit = next(
        (
            flow.unit
            for flow in (scenario.flow, *(water.flow for water in scenario.waters))
            if flow is not None
        ),
        None,
    )
    ends = (options.low_flow, options.high_flow)
    if unit is None and any(end is not None for end in ends):
        raise UsageError("the scenario has no flow; allowed a range of flows only beside one")
    low, high = (None if end is None else float(to_base(end, unit, "flow")) for end in ends)
    made = quantities(scenario, dials, options.season, tanks=dict(options.tank), low_flow=low, high_flow=high)
    _print(options, made, _quantities_text(made))


# ---- what is printed ---------------------------------------------------------------------------------------


def _change(value: float) -> str:
    """What a line adds or takes; nothing where it does neither."""
    return f"{value:+.3f}".replace("-", MINUS) if value else ""


def _ledger_text(made: "Ledger", keys: Sequence[str], checks: Sequence[str]) -> Iterator[str]:
    places = [made.column(key) for key in keys]
    yield f"Ledger, {made.season}: per litre of finished water"
    yield ""
    heading = ["", "", *(made.columns[place].label for place in places)]
    units = ["", "", *(made.columns[place].unit for place in places)]
    rows = [
        [line.place, line.text, *(entered(line.amounts[place]) if line.kind in ("source", "sum") else
                                  _change(line.amounts[place]) for place in places)]
        for line in made.lines
    ]  # fmt: skip
    ends = [("Total of the lines", made.total), ("Finished water", made.finished)]
    rows += [["", text, *(entered(amounts[place]) for place in places)] for text, amounts in ends]
    rows.append(["", "Residual", *(f"{made.residual[place]:.1e}".replace("-", MINUS) for place in places)])
    yield from aligned([heading, units, *rows], right=range(2, len(heading)))
    yield ""
    yield "  The ledger closes." if made.closed else "  The ledger does not close."
    if checks:
        yield from ("", "Hand checks")
        yield from (f"  {check}" for check in checks)


def _titration_text(made: "Titration") -> Iterator[str]:
    against = f" (negative: {made.opposite})" if made.opposite else ""
    yield f"{made.name}, {entered(made.temperature)} °C, with {made.chemical}{against}"
    yield ""
    rows = [["Dose", "pH", READOUTS["buffer_intensity"].label, ""], [made.unit, "", "mmol/L per pH", ""]]
    for x, ph, buffer, reason in zip(made.x, made.ph, made.buffer_intensity, made.reasons, strict=True):
        values = (format_value(ph, READOUTS["ph"]), format_value(buffer, READOUTS["buffer_intensity"]))
        rows.append([entered(x), *values, str(reason)])
    yield from aligned(rows, right=(0, 1, 2))


def _comparison_text(made: "Comparison") -> Iterator[str]:
    for case, problem in zip(made.cases, made.problems, strict=True):
        yield f"{case.title} ({case.season})" + (f": {case.note}" if case.note else "")
        if problem:
            yield f"  no answer: {problem}"
    for section in dict.fromkeys(row.section for row in made.rows):
        yield ""
        rows = [[section, "", *(case.title for case in made.cases)]]
        for row in made.section(section):
            marks = row.statuses or ("",) * len(row.texts)
            cells = [
                text + (f" ({mark})" if mark and mark != "no value" else "")
                for text, mark in zip(row.texts, marks, strict=True)
            ]
            rows.append([row.label, row.unit, *cells])
        yield from aligned(rows, right=range(2, 2 + len(made.cases)))


def _quantities_text(made: "Quantities") -> Iterator[str]:
    known = "" if np.isnan(made.flow) else f", at {entered(made.flow)} m³/h"
    yield f"Quantities, {made.season}{known}"
    if made.doses:
        yield ""
        priced = np.isfinite(made.cost_per_ml)
        heading = ["Dose", "", "", "kg/d", "t/year", "as", "L/h", "least", "most", "turndown", "days"]
        rows = [
            [
                dose.name, entered(dose.dose), dose.unit, entered(dose.active_kg_per_day),
                entered(dose.active_t_per_year), dose.basis, entered(dose.rate), entered(dose.lowest_rate),
                entered(dose.highest_rate), NO_VALUE if np.isnan(dose.turndown) else f"1:{dose.turndown:.3g}",
                entered(dose.storage), *_costs(dose, priced),
            ]
            for dose in made.doses
        ]  # fmt: skip
        heading += [f"{made.currency or 'cost'} per day", "per ML", "per year"] if priced else []
        total = [["Together", *[""] * 10, *_costs(made, priced)]] if priced else []
        yield from aligned([heading, *rows, *total], right=(1, 3, 4, *range(6, 14)))
    if made.solids:
        yield ""
        rows = [["Dry solids", "mg/L", "kg/d", "t/year"]]
        for solid in made.solids:
            rows.append(
                [solid.name, *map(entered, (solid.concentration, solid.kg_per_day, solid.t_per_year))]
            )
        yield from aligned(rows, right=(1, 2, 3))
    if made.price_date:
        yield from ("", f"  Prices of {made.price_date}")
    if made.notes:
        yield ""
        yield from (f"  {note.level}: {note.where}: {note.text}" for note in made.notes)


def _costs(owner: "DoseUse | Quantities", priced: bool) -> list[str]:
    costs = (owner.cost_per_day, owner.cost_per_ml, owner.cost_per_year)
    return [entered(cost) for cost in costs] if priced else []
