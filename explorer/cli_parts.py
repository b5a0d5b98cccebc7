"""What the commands share: arguments, opening a scenario, tables of text."""

import argparse
from collections.abc import Callable, Iterator, Sequence
from typing import Any

import numpy as np

from explorer.scenario.dials import neat, turn
from explorer.scenario.files import open_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import MINUS, NO_VALUE


class UsageError(ValueError):
    """The command line itself is wrong."""


def number(text: str) -> float:
    """A finite number. Raises ArgumentTypeError."""
    try:
        value = float(text)
    except ValueError:
        value = float("nan")
    if not np.isfinite(value):
        raise argparse.ArgumentTypeError(f"'{text}' is not a finite number")
    return value


def pair(form: str) -> Callable[[str], tuple[str, float]]:
    """Reader of a name and a number written as ``form``, such as DIAL=VALUE."""

    def read(text: str) -> tuple[str, float]:
        name, equals, value = (part.strip() for part in text.partition("="))
        if not name or not equals:
            raise argparse.ArgumentTypeError(f"'{text}' is not of the form {form}")
        try:
            return name, number(value)
        except argparse.ArgumentTypeError as error:
            raise argparse.ArgumentTypeError(f"{name}: {error}") from None

    return read


def scenario_arguments(parser: argparse.ArgumentParser) -> None:
    """The file, dials to turn first, and the season."""
    parser.add_argument("file", metavar="FILE", help="scenario file")
    form = "DIAL=VALUE"
    parser.add_argument(
        "--set", action="append", default=[], type=pair(form), metavar=form, help="turn a dial first"
    )
    parser.add_argument("--season", help="season whose analyses count; the scenario's own without it")


def opened(options: argparse.Namespace) -> tuple[Scenario, dict[str, float]]:
    """The scenario, and the dials that were set, each checked against what is allowed for it."""
    scenario = open_scenario(options.file)
    for dial, value in options.set:
        turn(scenario.copy(), dial, value, options.season)
    return scenario, dict(options.set)


def entered(value: Any) -> str:
    """A dose or dial value: four figures, without trailing zeros."""
    value = float(value)
    return f"{neat(float(f'{value:.4g}'))}".replace("-", MINUS) if np.isfinite(value) else NO_VALUE


def aligned(rows: Sequence[Sequence[str]], right: Sequence[int] | range) -> Iterator[str]:
    """Lines of a table; the columns ``right`` are set flush right."""
    widths = [max(len(row[column]) for row in rows) for column in range(len(rows[0]))]
    for row in rows:
        cells = [
            text.rjust(width) if column in right else text.ljust(width)
            for column, (text, width) in enumerate(zip(row, widths, strict=True))
        ]
        yield f"  {'  '.join(cells)}".rstrip()
