"""Measured points beside the model: reading them from pasted text, and how far the two are apart."""

import csv
import io
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from explorer.scenario.dials import find
from explorer.scenario.errors import ScenarioError, shown, unknown
from explorer.scenario.evaluate import evaluate
from explorer.scenario.fields import LARGEST_NUMBER
from explorer.scenario.model import MeasuredPoints, Scenario
from explorer.scenario.observed import MOST_POINTS
from explorer.scenario.readouts import MINUS, READOUTS, format_value
from explorer.studies.plain import known
from explorer.studies.sweep import headed, listed
from explorer.studies.titration import titrated

Pairs = list[list[float]]

_LAYOUT = "allowed two columns (dial or dose; value) or three with the readout between them"


class _Fault(ValueError):
    """What is wrong with one line; ``line`` counts from 1."""

    def __init__(self, line: int, message: str) -> None:
        self.line, self.message = line, message


def read_points(text: str, readout: str | None = None) -> dict[str, Pairs]:
    """Points by readout from pasted or CSV text.

    A line holds the dial value or dose and what was measured, or both with the readout between them (key,
    label or short name). Columns are parted by tabs, semicolons, commas or blanks; the comma may be the
    decimal sign where it does not part columns. A heading is passed over; it may name the readout of a second
    column, ``readout`` does so otherwise.

    Raises ScenarioError, naming the line, for anything that cannot be read.
    """
    lines = [
        (number, line) for number, line in enumerate(text.lstrip("\ufeff").splitlines(), 1) if line.strip()
    ]
    if not lines:
        raise ScenarioError("points", f"there are no points; {_LAYOUT}")
    first_fault = None
    for mark in (
        mark for mark in ("\t", ";", ",", " ") if mark == " " or any(mark in line for _, line in lines)
    ):
        try:
            return _read(lines, mark, readout)
        except _Fault as fault:
            first_fault = first_fault or fault
    raise ScenarioError(f"line {first_fault.line}", first_fault.message)


def _read(lines: Sequence[tuple[int, str]], mark: str, readout: str | None) -> dict[str, Pairs]:
    rows = [(number, _cells(line, mark)) for number, line in lines]
    number, heading = rows[0]
    if not any(_is_number(cell, mark) for cell in heading):
        named = _readout_named(heading[1]) if len(heading) == 2 else None
        readout, rows = named or readout, rows[1:]
        if not rows:
            raise _Fault(number, f"there are no points below the heading; {_LAYOUT}")
    found: dict[str, Pairs] = {}
    for number, cells in rows:
        if len(cells) not in (2, 3):
            count = f"{len(cells)} column" + "s" * (len(cells) != 1)
            raise _Fault(
                number, f"{count} found; {_LAYOUT}, commas parting columns only where none is decimal"
            )
        key = readout if len(cells) == 2 else _readout_named(cells[1])
        if key is None and len(cells) == 3:
            raise _Fault(number, unknown(cells[1], "a readout", READOUTS))
        if key is None:
            raise _Fault(
                number, "the readout is not named; allowed in the heading or in a column between the two"
            )
        found.setdefault(key, []).append([_number(cells[0], mark, number), _number(cells[-1], mark, number)])
    if len(rows) > MOST_POINTS:
        raise _Fault(rows[MOST_POINTS][0], f"there are too many points; allowed {MOST_POINTS}")
    return found


def _cells(line: str, mark: str) -> list[str]:
    """Cells of a line without the empty ones that spreadsheets leave at the end."""
    cells = line.split() if mark == " " else next(csv.reader(io.StringIO(line), delimiter=mark))
    cells = [cell.strip() for cell in cells]
    while cells and not cells[-1]:
        cells.pop()
    return cells


def _readout_named(text: str) -> str | None:
    """Key of the readout whose key, label or short name a text is; a unit in brackets is passed over."""
    plain = text.split("[")[0].strip().casefold()
    for key, readout in READOUTS.items():
        if plain in (key.casefold(), readout.label.casefold(), readout.short.casefold()):
            return key
    return None


def _is_number(text: str, mark: str) -> bool:
    try:
        return bool(np.isfinite(_parsed(text, mark)))
    except ValueError:
        return False


def _parsed(text: str, mark: str) -> float:
    plain = text.replace(MINUS, "-")
    if "_" in plain:
        raise ValueError
    return float(plain if mark == "," or "." in plain else plain.replace(",", ".", 1))


def _number(text: str, mark: str, line: int) -> float:
    if not text:
        raise _Fault(line, "a number is missing; allowed a number in the first and the last column")
    if not _is_number(text, mark) or abs(_parsed(text, mark)) > LARGEST_NUMBER:
        raise _Fault(line, f"{shown(text)} is not a number; allowed figures such as 8.25 or 8,25")
    return _parsed(text, mark)


# ---- comparison --------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Comparison:
    """Model against measurement, point by point.

    ``x``: dial value or dose in ``x_unit``. ``measured``, ``model``: the readout in its unit; the model is
    nan where it has no answer, and such points do not count. ``difference``: model less measured.
    """

    name: str
    readout: str
    stage: str
    x_label: str
    x_unit: str
    x: np.ndarray
    measured: np.ndarray
    model: np.ndarray

    @property
    def difference(self) -> np.ndarray:
        return self.model - self.measured

    @property
    def count(self) -> int:
        """Points that count."""
        return int(np.isfinite(self.difference).sum())

    @property
    def bias(self) -> float:
        """Mean difference; positive where the model is high, nan without points that count."""
        return float(np.mean(self._known)) if self.count else float("nan")

    @property
    def scatter(self) -> float:
        """Standard deviation of the differences about their mean (n − 1), nan for fewer than two points."""
        return float(np.std(self._known, ddof=1)) if self.count > 1 else float("nan")

    @property
    def worst(self) -> int | None:
        """Position of the point with the largest difference; None without points that count."""
        return int(np.nanargmax(np.abs(self.difference))) if self.count else None

    @property
    def _known(self) -> np.ndarray:
        return self.difference[np.isfinite(self.difference)]

    def brief(self) -> str:
        """Number of points, bias and scatter in a few words."""
        count = f"{self.x.size} measured"
        if not self.count:
            return f"{count}, no answer of the model"
        spread = "" if self.count < 2 else f", scatter {self._amount(self.scatter)}"
        return f"{count}, model {self._side(self._amount, 'level')}{spread}"

    def sentence(self) -> str:
        """The comparison in one sentence."""
        if not self.count:
            return f"{self.name}: the model has no answer at any measured point"

        def amount(value: float) -> str:
            return self._amount(value) + READOUTS[self.readout].unit_text

        x, far = float(self.x[self.worst]), float(self.difference[self.worst])
        spread = "" if self.count < 2 else f", scatter {amount(self.scatter)}"
        left_out = self.x.size - self.count
        gaps = f"; {left_out} without an answer of the model" if left_out else ""
        return (
            f"{self.name}: the model is {self._side(amount, 'level with')} {self.count} measured"
            f" point{'s' * (self.count > 1)} on average{spread}; the largest difference is {amount(far)} at"
            f" {x:.4g}{f' {self.x_unit}' if self.x_unit else ''}{gaps}"
        ).replace("-", MINUS)

    def _amount(self, value: float) -> str:
        return format_value(abs(value), READOUTS[self.readout])

    def _side(self, amount: Callable[[float], str], level: str) -> str:
        """Where the model is on average; ``level``: words for a bias that prints as nought."""
        if not float(self._amount(self.bias)):
            return level
        return f"{amount(self.bias)} {'above' if self.bias > 0 else 'below'}"

    def to_dict(self) -> dict[str, Any]:
        """Plain data; None where there is no answer."""
        return {
            "name": self.name,
            "readout": self.readout,
            "stage": self.stage,
            "x_unit": self.x_unit,
            "x": self.x.tolist(),
            "measured": self.measured.tolist(),
            "model": listed(self.model),
            "count": self.count,
            "bias": known(self.bias),
            "scatter": known(self.scatter),
            "worst": None if self.worst is None else float(self.x[self.worst]),
        }


def compared(
    scenario: Scenario,
    points: MeasuredPoints,
    dials: Mapping[str, ArrayLike] = MappingProxyType({}),
    season: str | None = None,
) -> Comparison:
    """One set of measured points against the model, everything else as it stands or as ``dials`` say.

    Raises ScenarioError for a set that does not fit the scenario.
    """
    x, measured = np.array(points.points, float).T
    if points.titration is not None:
        axis = points.titration
        titrant = titrated(scenario, points.stage, axis.chemical, axis.unit, axis.opposite, dials, season)
        label, unit = f"Dose of {titrant.chemical.name.lower()}", axis.unit
        model = titrant.after(x).readout(points.readout)
    else:
        dial = find(scenario, points.dial, season)
        label, unit = dial.label, dial.unit
        model = evaluate(scenario, {**dials, dial.address: x}, season).readout(points.readout, points.stage)
    model = np.array(np.broadcast_to(model, x.shape))
    return Comparison(points.name, points.readout, points.stage, label, unit, x, measured, model)


def all_compared(
    scenario: Scenario,
    dials: Mapping[str, ArrayLike] = MappingProxyType({}),
    season: str | None = None,
) -> Iterator[Comparison]:
    """Every set of the scenario that can be compared as it stands, in its order."""
    for points in scenario.measured:
        try:
            yield compared(scenario, points, dials, season)
        except ScenarioError:
            # A water or step out of service has no dial and no stage; its points wait for its return.
            continue


def measured_table(comparisons: Iterable[Comparison]) -> list[list[Any]]:
    """Rows for a spreadsheet, the heading first: every point of every set, beside the model."""
    rows: list[list[Any]] = [["Points", "Against", "Value", "What", "Measured", "Model", "Difference"]]
    for made in comparisons:
        readout = READOUTS[made.readout]
        against, what = headed(made.x_label, made.x_unit), headed(readout.label, readout.unit)
        columns = made.x.tolist(), made.measured.tolist(), listed(made.model), listed(made.difference)
        rows += [[made.name, against, x, what, *values] for x, *values in zip(*columns, strict=True)]
    return rows
