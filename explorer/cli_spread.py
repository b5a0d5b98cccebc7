"""Commands of the studies of two dials and of tolerances: window, tolerance, allowed."""

import argparse
import json
import sys
from collections.abc import Callable, Iterator
from typing import TYPE_CHECKING, Any

import numpy as np

from explorer.cli_parts import aligned, entered, number, opened, scenario_arguments
from explorer.scenario.csv_text import csv_text
from explorer.scenario.model import Target
from explorer.scenario.readouts import MINUS, READOUTS, format_value

if TYPE_CHECKING:
    from explorer.studies.convergence import Convergence
    from explorer.studies.corners import Extreme
    from explorer.studies.ranking import Allowed, Ranking
    from explorer.studies.tolerance import ToleranceStudy
    from explorer.studies.window import Window

COMMANDS = ("window", "tolerance", "allowed")

Command = Callable[..., argparse.ArgumentParser]

Ends = dict[str, tuple["Extreme", "Extreme"]]
"""Lowest and highest of readouts by key."""


def register(command: Command) -> None:
    """Add the commands; ``command(name, run, help)`` makes the parser of one."""
    window = command("window", _window, "Turn two dials over a map: where are all targets met?")
    scenario_arguments(window)
    for axis in ("x", "y"):
        window.add_argument(f"--{axis}", required=True, metavar="D", help=f"address of the dial along {axis}")
        window.add_argument(f"--{axis}-from", type=number, metavar="A", help="its first value")
        window.add_argument(f"--{axis}-to", type=number, metavar="B", help="its last value")
    window.add_argument("--points", type=int, default=41, metavar="N", help="values a side; %(default)s")
    window.add_argument("--readouts", metavar="K1,K2", help="readouts beside the targets, in CSV and JSON")
    _forms(window)

    spread = command("tolerance", _tolerance, "How far the tolerances let the results spread.")
    scenario_arguments(spread)
    spread.add_argument("--dial", help="address of the dial along the fan; that of the scenario's sweep")
    spread.add_argument("--start", type=number, metavar="A", help="first value, in the unit of the dial")
    spread.add_argument("--stop", type=number, metavar="B", help="last value")
    spread.add_argument("--points", type=int, metavar="N", help="number of values")
    spread.add_argument("--readouts", metavar="K1,K2", help="readouts beside those of the targets")
    spread.add_argument(
        "--rank", metavar="K", help="readout to rank the inputs for; the least certain target"
    )
    spread.add_argument("--anywhere", action="store_true", help="worst along the dial, in any season, too")
    spread.add_argument(
        "--converge", action="store_true", help="percentiles from ten times the samples beside them"
    )
    spread.add_argument("--samples", type=int, default=2048, metavar="N", help="%(default)s without it")
    spread.add_argument(
        "--seed", type=int, default=20, metavar="N", help="of the random numbers; %(default)s"
    )
    _forms(spread)

    allowed = command("allowed", _allowed, "How far dials may be off for a readout to stay near enough.")
    scenario_arguments(allowed)
    allowed.add_argument("--dials", required=True, metavar="D1,D2", help="addresses, off together")
    allowed.add_argument("--readout", required=True, metavar="K", help="readout to keep")
    allowed.add_argument("--within", required=True, type=number, metavar="W", help="how near, in its unit")
    allowed.add_argument("--json", action="store_true", help="print JSON")


def _forms(parser: argparse.ArgumentParser) -> None:
    form = parser.add_mutually_exclusive_group()
    form.add_argument("--csv", action="store_true", help="print CSV")
    form.add_argument("--json", action="store_true", help="print JSON")


def _keys(text: str | None) -> list[str]:
    return [key.strip() for key in text.split(",")] if text else []


# ---- commands ----------------------------------------------------------------------------------------------


def _window(options: argparse.Namespace) -> None:
    from explorer.studies.window import window

    scenario, dials = opened(options)
    *_, made = window(
        scenario, options.x, options.y, (options.x_from, options.x_to), (options.y_from, options.y_to),
        _keys(options.readouts), options.points, options.season, dials,
    )  # fmt: skip
    if options.json:
        print(json.dumps(made.to_dict(), ensure_ascii=False))
    elif options.csv:
        sys.stdout.write(csv_text(made.table()))
    else:
        print("\n".join(_window_text(made)))


def _tolerance(options: argparse.Namespace) -> None:
    from explorer.studies.convergence import convergence
    from explorer.studies.corners import extremes, worst
    from explorer.studies.ranking import ranking
    from explorer.studies.tolerance import tolerance

    scenario, dials = opened(options)
    ranked = _keys(options.rank)
    *_, made = tolerance(
        scenario, options.dial, options.start, options.stop, options.points,
        [*_keys(options.readouts), *ranked], options.season, dials, options.samples, options.seed,
    )  # fmt: skip
    if options.csv:
        sys.stdout.write(csv_text(made.table()))
        return
    ends = {key: extremes(scenario, key, options.season, dials) for key in made.here.values}
    others = {dial: value for dial, value in dials.items() if dial != made.dial.address}
    ends_of_all = {
        key: worst(scenario, key, made.dial.address, made.x[0], made.x[-1], overrides=others)
        for key in (made.here.values if options.anywhere else ())
    }
    settled = (
        convergence(
            scenario, list(made.here.values), options.samples, options.seed, options.season, dials
        )
        if options.converge
        else {}
    )  # fmt: skip
    rank = ranking(scenario, (ranked or [_least_certain(made)])[0], options.season, dials, options.seed)
    if options.json:
        found = {**made.to_dict(), "extremes": _plain(ends), "ranking": rank.to_dict()}
        if options.anywhere:
            found["anywhere"] = _plain(ends_of_all)
        if settled:
            found["convergence"] = {key: part.to_dict() for key, part in settled.items()}
        print(json.dumps(found, ensure_ascii=False))
    else:
        print("\n".join(_tolerance_text(scenario.title, made, ends, ends_of_all, settled, rank)))


def _plain(ends: Ends) -> dict[str, Any]:
    return {key: {"low": low.to_dict(), "high": high.to_dict()} for key, (low, high) in ends.items()}


def _allowed(options: argparse.Namespace) -> None:
    from explorer.studies.ranking import allowed_tolerance

    scenario, dials = opened(options)
    made = allowed_tolerance(
        scenario, _keys(options.dials), options.readout, options.within, options.season, dials
    )
    if options.json:
        print(json.dumps(made.to_dict(), ensure_ascii=False, indent=2))
    else:
        print(_allowed_text(made, options.readout, options.within))


def _least_certain(made: "ToleranceStudy") -> str:
    """Readout of the target with the smallest chance, the first readout where there are no targets."""
    if not made.targets:
        return next(iter(made.here.values))
    chances = [float(made.here.chance(position)[0]) for position in range(len(made.targets))]
    return made.targets[int(np.argmin(chances))].readout


# ---- what is printed ---------------------------------------------------------------------------------------


def _worded(target: Target) -> str:
    ends = [f"from {target.low:g}"] if target.low is not None else []
    ends += [f"up to {target.high:g}"] if target.high is not None else []
    return f"{READOUTS[target.readout].label} {' '.join(ends)}{READOUTS[target.readout].unit_text}"


def _percent(part: float) -> str:
    return f"{100 * part:.1f} %"


def _window_text(made: "Window") -> Iterator[str]:
    for name, axis in (("x", made.x), ("y", made.y)):
        ends = " to ".join(entered(axis.values[end]) for end in (0, -1))
        yield f"{name}: {axis.dial.label}, {ends} {axis.dial.unit}".rstrip()
    yield ""
    rows = [["Part of the map on which", ""], ["all targets are met", _percent(made.part_met)]]
    for target, part in zip(made.targets, made.parts_missed(), strict=True):
        rows.append([f"the first that is missed is: {_worded(target)}", _percent(part)])
    rest = 1 - made.part_met - sum(made.parts_missed())
    if rest > 0.5 / made.missed.size:
        rows.append(["there is no answer", _percent(rest)])
    yield from aligned(rows, right=(1,))
    corners = made.border.reshape(-1, 2)
    if len(corners):
        spans = [
            f"{name} {entered(ends[0])} to {entered(ends[1])} {axis.dial.unit}".rstrip()
            for name, axis, ends in zip(
                ("x", "y"), (made.x, made.y), np.percentile(corners, (0, 100), axis=0).T, strict=True
            )
        ]
        yield from ("", f"  Its border lies within {', '.join(spans)}.")


def _tolerance_text(
    title: str,
    made: "ToleranceStudy",
    ends: Ends,
    ends_of_all: Ends,
    settled: dict[str, "Convergence"],
    rank: "Ranking",
) -> Iterator[str]:
    season = next(iter(ends.values()))[0].season
    inputs = f"{len(made.inputs)} input" + "s" * (len(made.inputs) != 1)
    yield f"{title} ({season}): {made.samples} samples of {inputs}, seed {made.seed}"
    yield ""
    rows = [["", "", "Nominal", "2.5 %", "Median", "97.5 %", "Lowest", "Highest"]]
    for key, (low, high) in ends.items():
        readout, middle = READOUTS[key], made.here.percentiles(key, (2.5, 50, 97.5))[:, 0]
        shown = (made.here.nominal[key][0], *middle, low.value, high.value)
        rows.append([readout.label, readout.unit, *(format_value(value, readout) for value in shown)])
    yield from aligned(rows, right=range(2, 8))
    if settled:
        yield ""
        more = next(iter(settled.values())).more
        rows = [[f"With {more} samples", "", "2.5 %", "Median", "97.5 %", "moved by at most"]]
        for key, part in settled.items():
            shown = [format_value(value, READOUTS[key]) for value in part.many]
            rows.append([READOUTS[key].label, READOUTS[key].unit, *shown, f"{part.shift:.2g}"])
        yield from aligned(rows, right=range(2, 6))
    if ends_of_all:
        yield ""
        rows = [["Anywhere along the dial, in any season", "", "Lowest", "at", "", "Highest", "at", ""]]
        for key, both in ends_of_all.items():
            places = [
                [format_value(end.value, READOUTS[key]), f"{entered(end.x)} {made.dial.unit}", end.season]
                for end in both
            ]
            rows.append([READOUTS[key].label, READOUTS[key].unit, *places[0], *places[1]])
        yield from aligned(rows, right=(2, 3, 5, 6))
    if made.targets:
        yield ""
        rows = [["Chance of meeting the entered target", ""]]
        for position, target in enumerate(made.targets):
            rows.append([_worded(target), _percent(float(made.here.chance(position)[0]))])
        rows.append(["all of them", _percent(float(made.here.chance_of_all()[0]))])
        yield from aligned(rows, right=(1,))
    yield ""
    readout = READOUTS[rank.readout]
    width = format_value(rank.width, readout)
    yield f"What widens {readout.label}: 95 % of it within {width}{readout.unit_text}"
    # Three figures of the whole: what is smaller is within the noise of the samples.
    decimals = max(0, 2 - int(np.floor(np.log10(rank.width)))) if rank.width > 0 else 0
    rows = [["", "alone", "less if halved"]]
    rows += [
        [
            part.input.label,
            *(f"{value:z.{decimals}f}".replace("-", MINUS) for value in (part.alone, part.removed)),
        ]
        for part in rank.ranks
    ]
    yield from aligned(rows, right=(1, 2))


def _allowed_text(made: "Allowed", key: str, within: float) -> str:
    readout = READOUTS[key]
    kept = f"{readout.label} {format_value(made.nominal, readout)} ± {entered(within)}{readout.unit_text}"
    if not made.limited:
        return f"{kept} is kept with anything up to ± {entered(made.half_width)} {made.unit}".rstrip()
    return f"{kept} is kept within ± {entered(made.half_width)} {made.unit}".rstrip()
