"""Command line: serve the page, or answer without one.

Whatever the user can get wrong is answered by one sentence on stderr and exit status 2. The page and the
report are imported only by the commands that need them, so that ``solve`` starts quickly.
"""

import argparse
import json
import os
import sys
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any, NoReturn

import numpy as np

from explorer import cli_spread, cli_studies
from explorer.cli_parts import UsageError, aligned, entered, number, opened, scenario_arguments
from explorer.scenario.csv_text import csv_text
from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.evaluate import Outcome, Stage, evaluate
from explorer.scenario.files import open_scenario, write_text
from explorer.scenario.model import Scenario, Target
from explorer.scenario.readouts import MINUS, READOUTS, format_value, in_words, status
from explorer.treatment.notes import Note

if TYPE_CHECKING:
    from explorer.studies.sweep import Sweep

COMMANDS = ("serve", "solve", "sweep", "check", "report", *cli_studies.COMMANDS, *cli_spread.COMMANDS)

USER_ERROR = 2
INTERRUPTED = 130

SWEPT = ("ph", "alkalinity", "calcium", "si_calcite", "ccpp", "buffer_intensity")
"""Readouts of a sweep where none are asked for and no target names any."""

STAGE_COLUMNS = ("ph", "temperature", "alkalinity", "dic", "calcium", "ccpp")


class _Parser(argparse.ArgumentParser):
    def error(self, message: str) -> NoReturn:
        raise UsageError(message)


def main(arguments: Sequence[str] | None = None) -> int:
    """Run a command; returns the exit status."""
    given = list(sys.argv[1:] if arguments is None else arguments)
    if not given or given[0] not in (*COMMANDS, "-h", "--help"):
        given.insert(0, "serve")
    try:
        options = _parser().parse_args(given)
        options.run(options)
        sys.stdout.flush()
    except BrokenPipeError:
        # The reader of a pipe has seen enough; nothing more may be written, not even at exit.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    except KeyboardInterrupt:
        return INTERRUPTED
    except OSError as error:
        return _refuse(f"{error.filename or 'the system'}: {(error.strerror or str(error)).lower()}")
    except ValueError as error:
        return _refuse(str(error))
    return 0


def _refuse(sentence: str) -> int:
    print(" ".join(sentence.split()), file=sys.stderr)
    return USER_ERROR


def _parser() -> argparse.ArgumentParser:
    parser = _Parser(
        prog="blendwright",
        description="What-if explorer for blending source waters and dosing treatment chemicals.",
        epilog="Without a command, FILE is served: blendwright [FILE] is blendwright serve [FILE].",
        allow_abbrev=False,
    )
    commands = parser.add_subparsers(required=True, metavar="COMMAND", parser_class=_Parser)

    def command(name: str, run: Any, help: str) -> argparse.ArgumentParser:
        added = commands.add_parser(name, help=help, description=help, allow_abbrev=False)
        added.set_defaults(run=run)
        return added

    serve = command("serve", _serve, "Serve the page on this machine and open the browser.")
    serve.add_argument("file", nargs="?", metavar="FILE", help="scenario file; a shipped example without one")
    serve.add_argument("--port", type=_port, default=0, help="a free one without it")
    serve.add_argument(
        "--address", default="127.0.0.1", help="interface to listen on; %(default)s without it"
    )
    serve.add_argument("--no-browser", action="store_true", help="do not open the browser")

    solve = command("solve", _solve, "Solve a scenario and print the finished water.")
    scenario_arguments(solve)
    solve.add_argument("--json", action="store_true", help="print JSON")

    sweep = command("sweep", _sweep, "Turn one dial over a range.")
    scenario_arguments(sweep)
    sweep.add_argument("--dial", help="address of the dial; that of the scenario's own sweep without it")
    sweep.add_argument("--start", type=number, metavar="A", help="first value, in the unit of the dial")
    sweep.add_argument("--stop", type=number, metavar="B", help="last value")
    sweep.add_argument("--points", type=int, metavar="N", help="number of values")
    sweep.add_argument("--readouts", metavar="K1,K2", help="readouts, separated by commas")
    sweep.add_argument("--stage", default="finished", metavar="S", help="stage; %(default)s without it")
    form = sweep.add_mutually_exclusive_group()
    form.add_argument("--csv", metavar="OUT", help="write a CSV file; - for the screen")
    form.add_argument("--json", action="store_true", help="print JSON")

    cli_studies.register(command)
    cli_spread.register(command)

    check = command("check", _check, "Say whether a file is valid, its analyses balance, what is assumed.")
    check.add_argument("file", metavar="FILE")

    report = command("report", _report, "Write a report as one self-contained HTML file.")
    report.add_argument("file", metavar="FILE")
    report.add_argument("--season", help="season whose analyses count; the scenario's own without it")
    report.add_argument("-o", "--output", required=True, metavar="OUT", help="HTML file to write")
    return parser


def _port(text: str) -> int:
    if not text.isdecimal() or int(text) > 65535:
        raise argparse.ArgumentTypeError(f"'{text}' is not a port; allowed 0 to 65535")
    return int(text)


# ---- commands ----------------------------------------------------------------------------------------------


def _serve(options: argparse.Namespace) -> None:
    path = None if options.file is None else Path(options.file)
    if path is not None:
        open_scenario(path)
    from explorer.app.serve import serve

    serve(path, options.port, options.address, not options.no_browser)


def _solve(options: argparse.Namespace) -> None:
    scenario, dials = opened(options)
    outcome = evaluate(scenario, dials, options.season)
    if options.json:
        print(json.dumps(solved(scenario.title, outcome), ensure_ascii=False, indent=2))
    else:
        print("\n".join(_solved_text(scenario, outcome)))


def _sweep(options: argparse.Namespace) -> None:
    from explorer.studies.sweep import sweep

    scenario, dials = opened(options)
    if options.dial in dials:
        raise UsageError(f"{options.dial} is swept and set; allowed one of the two")
    named = options.readouts.split(",") if options.readouts else [t.readout for t in scenario.targets]
    readouts = list(dict.fromkeys(key.strip() for key in named)) or list(SWEPT)
    for key in readouts:
        if key not in READOUTS:
            raise ScenarioError("", unknown(key, "a readout", READOUTS))
    swept = sweep(scenario, options.dial, options.start, options.stop, options.points, options.season, dials)
    if options.json:
        print(json.dumps(swept.to_dict(readouts, options.stage), ensure_ascii=False))
        return
    if options.csv is None:
        print("\n".join(_swept_text(swept, readouts, options.stage)))
        return
    text = csv_text(swept.table(readouts, options.stage))
    if options.csv == "-":
        sys.stdout.write(text)
    else:
        write_text(text, options.csv)


def _check(options: argparse.Namespace) -> None:
    from explorer.scenario.compile import compiled
    from explorer.treatment.analysis import examine

    scenario = open_scenario(options.file)
    lines = [f"{scenario.title}: the file is valid"]
    for season in scenario.seasons:
        evaluate(scenario, season=season)
        plan = compiled(scenario, season)
        for source in plan.sources:
            found = examine(dict(source.entries), plan.system, close_with=source.close_with)
            lines += ["", f"{source.name}, {season}"]
            verdict = "acceptable" if found.balance.acceptable else "not acceptable"
            percent = f"{found.balance.percent:+.1f}".replace("-", MINUS)
            sums = f"{found.balance.cations:.2f} and {found.balance.anions:.2f} meq/L"
            lines.append(f"  charge balance {percent} % of {sums}, {verdict} ({found.balance.limit})")
            lines += [f"  {note.level}: {note.where}: {note.text}" for note in found.notes]
    print("\n".join(lines))


def _report(options: argparse.Namespace) -> None:
    from explorer.report import write_report

    scenario, output = open_scenario(options.file), Path(options.output)
    if output.exists() and output.samefile(options.file):
        raise UsageError(f"{options.output} is the scenario itself; allowed another file for the report")
    write_report(scenario, output, season=options.season)


# ---- what is printed ---------------------------------------------------------------------------------------


def solved(title: str, outcome: Outcome) -> dict[str, Any]:
    """A single solution as plain data; a value without a solution is None, with a note that says why."""
    targets = {target.readout: target for target in _weakest_first(outcome)}
    finished = {}
    for key, value in _values(outcome.stage()).items():
        target = targets.get(key)
        low, high = (None, None) if target is None else (target.low, target.high)
        finished[key] = {
            **value,
            "status": None if target is None else _status(value["value"], key, target),
            "low": low,
            "high": high,
        }
    notes = [*outcome.notes, *(note for stage in outcome.stages for note in _missing(stage))]
    return {
        "title": title,
        "season": outcome.season,
        "readouts": finished,
        "stages": [
            {"id": stage.id, "name": stage.name, "readouts": _values(stage)} for stage in outcome.stages
        ],
        "doses": {
            step: {"value": _plain(value), "unit": unit, "held": held}
            for step, (value, unit, held) in outcome.doses.items()
        },
        **({"held": _held(outcome)} if outcome.held else {}),
        "notes": [{"level": note.level, "where": note.where, "text": note.text} for note in notes],
    }


def _held(outcome: Outcome) -> dict[str, dict[str, Any]]:
    return {
        address: {"value": _plain(dial.value), "unit": dial.unit, "met": bool(dial.met)}
        for address, dial in outcome.held.items()
    }


def _weakest_first(outcome: Outcome) -> list[Target]:
    """Targets ordered so that, of several for one readout, the one with the least margin comes last."""
    ordered = sorted(outcome.targets(), key=lambda found: -np.nan_to_num(float(found[3]), nan=-np.inf))
    return [target for target, *_ in ordered]


def _status(value: float | None, key: str, target: Target) -> str:
    return status(np.nan if value is None else value, target.low, target.high, READOUTS[key].slack)


def _plain(value: Any) -> float | None:
    value = float(value)
    return value if np.isfinite(value) else None


def _values(stage: Stage) -> dict[str, dict[str, Any]]:
    return {
        key: {"value": _plain(stage.readout(key)), "unit": readout.unit} for key, readout in READOUTS.items()
    }


def _missing(stage: Stage) -> Iterator[Note]:
    """Why readouts of a stage have no value, one note a reason."""
    reasons: dict[str, list[str]] = {}
    for key in READOUTS:
        reason = str(stage.reasons(key))
        if reason:
            reasons.setdefault(reason, []).append(key)
    for reason, keys in reasons.items():
        yield Note("info", stage.id, f"{reason}: no {', '.join(keys)}")


def _solved_text(scenario: Scenario, outcome: Outcome) -> Iterator[str]:
    yield f"{scenario.title} ({outcome.season})"
    yield ""
    yield from _finished_text(outcome)
    if outcome.doses:
        yield from ("", "Doses")
        yield from aligned(
            [
                [outcome.stage(step).name, entered(value), unit, "held" if held else ""]
                for step, (value, unit, held) in outcome.doses.items()
            ],
            right=(1,),
        )
    if outcome.held:
        yield from ("", "Held dials")
        yield from aligned(
            [
                [address, entered(dial.value), dial.unit, "" if dial.met else "not met"]
                for address, dial in outcome.held.items()
            ],
            right=(1,),
        )
    yield from ("", "Stages")
    heading = ["", *(READOUTS[key].short for key in STAGE_COLUMNS)]
    rows = [
        [stage.name, *(format_value(stage.readout(key), READOUTS[key]) for key in STAGE_COLUMNS)]
        for stage in outcome.stages
    ]
    yield from aligned([heading, *rows], right=range(1, len(heading)))
    if outcome.notes:
        yield from ("", "Notes")
        yield from (f"  {note.level}: {note.where}: {note.text}" for note in outcome.notes)


def _finished_text(outcome: Outcome) -> Iterator[str]:
    targets: dict[str, list[Target]] = {}
    for target, *_ in outcome.targets():
        targets.setdefault(target.readout, []).append(target)
    rows = [["Finished water", "Value", "Unit", "Target", "Status"]]
    for key, readout in READOUTS.items():
        value = outcome.readout(key)
        if np.isnan(value) and key not in targets:
            continue
        text = in_words(value, readout).removesuffix(readout.unit_text) if readout.sign_words else None
        row = [readout.label, text or format_value(value, readout), readout.unit]
        for target in targets.get(key, [None]):
            band = ["", ""] if target is None else [_band(target), _status(float(value), key, target)]
            rows.append([*row, *band])
    yield from aligned(rows, right=(1,))


def _band(target: Target) -> str:
    if target.low is None:
        return f"up to {target.high:g}"
    return f"from {target.low:g}" if target.high is None else f"{target.low:g} to {target.high:g}"


def _swept_text(swept: "Sweep", keys: Sequence[str], stage: str) -> Iterator[str]:
    readouts = [READOUTS[key] for key in keys]
    columns = [[swept.dial.label, swept.dial.unit, *map(entered, swept.x)]]
    for readout in readouts:
        values = swept.outcome.readout(readout.key, stage)
        columns.append([readout.short, readout.unit, *(format_value(value, readout) for value in values)])
    columns += [[label, unit, *map(entered, values)] for label, unit, values in swept.held()]
    columns.append(["", "", *swept.outcome.reasons(stage).tolist()])
    yield from aligned(list(zip(*columns, strict=True)), right=range(len(columns) - 1))
