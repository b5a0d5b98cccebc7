"""A laboratory sheet as text, pasted from a spreadsheet or read from a CSV file, understood line by line.

Columns are told apart by their heading or by what stands in them, in any order: parameter, value, unit. A
sheet with its parameters side by side is turned first. Nothing is guessed in silence: every line says what it
was understood as, what has to be checked, and why it was not understood.
"""

import csv
import re
import unicodedata
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import zip_longest

from explorer.scenario.analysis_names import find_key, find_unit, is_heading, normal
from explorer.scenario.errors import ScenarioError, listed
from explorer.scenario.measured import ENTRY_RULES, entry_faults
from explorer.treatment.analysis import Measured
from explorer.treatment.units import default_unit, units_for

CARBONATE = ("ph", "alkalinity", "dic", "co2")
"""Two of these fix the carbonate system."""

LONGEST_TEXT = 100_000
MOST_LINES, MOST_COLUMNS, LONGEST_CELL = 200, 60, 200

AMBIGUOUS = {"nitrate": "NO3", "ammonia": "NH4", "phosphate": "PO4"}
"""Parameters whose plain mg/L many laboratories mean as nitrogen or phosphorus, and what it means here."""

UNDETECTED = ("nd", "n d", "bdl", "bql", "loq", "lod", "not detected", "nicht nachweisbar", "nn", "bg")

_VALUE = re.compile(
    r"(?P<below><|≤|&lt;)?\s*(?P<number>[+-]?(?:\d[\d'\u2019 ]*(?:[.,]\d+)*|[.,]\d+)(?:e[+-]?\d+)?)"
    r"(?:\s*(?:±|\+/-|\+-)\s*(?P<width>\d+(?:[.,]\d+)?))?\s*(?P<rest>.*)",
    re.IGNORECASE,
)
_NAME_VALUE = re.compile(r"(?P<name>.*?[^\W\d_)\]%].*?)[\s:=]+(?P<value>(?:<|≤)?\s*[+-]?\d[\d.,]*.*)")
_SPACES = dict.fromkeys(map(ord, "\u00a0\u202f\u2009\u2007"), " ") | {ord("\u2212"): "-"}


@dataclass(frozen=True)
class SheetLine:
    """One line of a sheet: the parameter, value and unit as written, and what they were understood as.

    key: analysis key, "" where the line is left out. measured: the entry, None where there is none.
    remark: what to check, or why there is no entry; "" where nothing is doubtful.
    """

    name: str
    value: str
    unit: str
    key: str = ""
    measured: Measured | None = None
    remark: str = ""


def read_sheet(text: str, own: Mapping[str, str] | None = None) -> tuple[SheetLine, ...]:
    """Lines of a pasted sheet that name a parameter or carry a value, in their order.

    own: names of the scenario's weak acids by id, which may be parameters too. Raises ScenarioError for a
    text without anything to read.
    """
    if len(text) > LONGEST_TEXT:
        raise ScenarioError("", f"the text is too long for one analysis; allowed {LONGEST_TEXT} characters")
    rows = _rows(text)
    if not rows:
        raise ScenarioError("", "nothing to read was pasted; allowed lines with parameter, value and unit")
    if len(rows) > MOST_LINES:
        raise ScenarioError("", f"{len(rows)} lines are too many for one analysis; allowed {MOST_LINES}")
    own = dict(own or {})
    rows = _upright(rows, own)
    places, rows = _places(rows, own)
    lines: list[SheetLine] = []
    taken: set[str] = set()
    for row in rows:
        cells = [row[place] if place is not None and place < len(row) else "" for place in places]
        line = _split_name(SheetLine(*cells))
        if not line.value and not find_key(line.name, own)[0]:
            continue
        key, _ = find_key(line.name, own)
        read = understood(line, key, own)
        if key and key in taken:
            read = SheetLine(
                line.name, line.value, line.unit, "", None, "is there twice; the first one is taken"
            )
        taken.add(key)
        lines.append(read)
    if not lines:
        raise ScenarioError("", "no line has a parameter with a value; allowed lines like: Calcium; 26; mg/L")
    return tuple(lines)


def understood(line: SheetLine, key: str, own: Mapping[str, str] | None = None) -> SheetLine:
    """The same line, taken as the parameter ``key``; "" leaves it out."""
    bare = (line.name, line.value, line.unit)
    if not key:
        known = find_key(line.name, own or {})[0]
        return SheetLine(*bare, remark="left out" if known else "this parameter is not known")
    try:
        measured, remark = _measured(line, key, key in (own or {}))
    except ScenarioError as error:
        return SheetLine(*bare, key, None, error.message)
    return SheetLine(*bare, key, measured, remark)


def entries_of(lines: Iterable[SheetLine]) -> dict[str, Measured]:
    """The entries of an analysis that lines were understood as."""
    return {line.key: line.measured for line in lines if line.key and line.measured is not None}


def completed(
    entries: Mapping[str, Measured], before: Mapping[str, Measured]
) -> tuple[dict[str, Measured], tuple[str, ...]]:
    """An analysis from the entries of a sheet, and what of the one before had to stay for it.

    A water needs a temperature and two of pH, alkalinity, inorganic carbon and carbon dioxide. What the sheet
    does not have of these stays as it was, marked as assumed.
    """
    needed = [] if "temperature" in entries else ["temperature"]
    given = sum(key in entries for key in CARBONATE)
    needed += [key for key in CARBONATE if key in before and key not in entries][: max(0, 2 - given)]
    stays = tuple(key for key in needed if key in before)
    kept = {key: replace(before[key], assumed=True) for key in stays}
    return {key: (kept | dict(entries))[key] for key in (*stays, *entries)}, stays


# ---- one line --------------------------------------------------------------------------------------------


def _measured(line: SheetLine, key: str, own: bool) -> tuple[Measured, str]:
    """Entry of a line and what to check of it. Raises ScenarioError."""
    text = line.value.translate(_SPACES).strip()
    if normal(text) in UNDETECTED:
        raise ScenarioError("", "not detected, but the limit is not given; allowed: < and the limit")
    match = _VALUE.fullmatch(text)
    if match is None:
        raise ScenarioError(
            "", f"{line.value[:24] or 'nothing'!r} is not a value; allowed a number, or < and a limit"
        )
    number, doubt = _number(match["number"])
    width = None if match["width"] is None else _number(match["width"])[0]
    written = line.unit or match["rest"].strip(" ()[]")
    unit, factor, remark = _unit(written, line.name, key, own)
    given = (
        {"value": None, "below": number * factor}
        if match["below"]
        else {"value": number * factor, "below": None}
    )
    measured = Measured(**given, unit=unit, plus_minus=None if width is None else width * factor)
    own_units = ("mg/L", "µg/L", "mmol/L", "mol/L") if own else None
    for _, wrong in entry_faults(key, measured, own_units):
        raise ScenarioError("", wrong)
    return measured, "; ".join(part for part in (doubt, remark) if part)


def _number(text: str) -> tuple[float, str]:
    """Number as it is meant, and what to check: the last of two different marks is the decimal one."""
    digits = re.sub(r"['\u2019 ]", "", text)
    points, commas = digits.count("."), digits.count(",")
    doubt = ""
    if points and commas:
        grouping = "," if digits.rindex(".") > digits.rindex(",") else "."
        digits = digits.replace(grouping, "")
    elif points > 1 or commas > 1:
        digits = digits.replace("." if points else ",", "")
    elif re.fullmatch(r"[+-]?[1-9]\d{0,2},\d{3}", digits):
        doubt = f"read as {digits.replace(',', '.')}, not as {digits.replace(',', '')}"
    return float(digits.replace(",", ".")), doubt


def _unit(written: str, name: str, key: str, own: bool) -> tuple[str, float, str]:
    """Unit of an entry, the factor to it, and what to check. Raises ScenarioError."""
    allowed = ("mg/L", "µg/L", "mmol/L", "mol/L") if own else units_for(key)
    usual = allowed[0] if own else default_unit(key)
    basis = "" if own else find_key(name, {})[1]
    unit, factor, written_basis = find_unit(written)
    basis = written_basis or basis
    if not written and allowed == ("",):
        return "", 1.0, ""
    if not written:
        assumed = f"mg/L as {basis}" if f"mg/L as {basis}" in allowed else usual
        certain = key in {"temperature", "ph"}
        return assumed, 1.0, "" if certain else f"no unit given, taken as {assumed}"
    if unit is None:
        if allowed == ("",):
            return "", 1.0, ""
        raise ScenarioError("", f"{written[:24]!r} is not a unit here; allowed: {listed(allowed)}")
    if key == "ph":
        return "", 1.0, ""
    if unit in {"mg/L", "µg/L"} and basis:
        named = f"mg/L as {basis}"
        if named in allowed:
            return named, factor * (0.001 if unit == "µg/L" else 1.0), ""
    if unit not in allowed and unit == "mg/L" and usual.startswith("mg/L as"):
        return usual, factor, f"basis not given, taken as {usual}"
    if unit not in allowed and unit == "µg/L" and usual.startswith("mg/L"):
        return usual, factor * 0.001, f"taken as {usual}"
    if unit not in allowed:
        raise ScenarioError("", f"{written[:24]!r} is not a unit here; allowed: {listed(allowed)}")
    ion = AMBIGUOUS.get(key, "")
    doubtful = ion and unit in {"mg/L", "µg/L"} and normal(ion) not in normal(name).split()
    return unit, factor, f"taken as {ion} itself" if doubtful else ""


# ---- rows and columns ------------------------------------------------------------------------------------


def _rows(text: str) -> list[list[str]]:
    """Cells of all lines that are not empty."""
    cleaned = "".join(
        sign
        for sign in re.sub(r"\r\n?", "\n", text.removeprefix("\ufeff"))
        if sign in "\n\t" or unicodedata.category(sign)[0] != "C"
    )
    lines = [line for line in cleaned.split("\n") if line.strip(" ;,\t")]
    mark = _separator(lines)
    cells = map(_loose, lines) if mark is None else csv.reader(lines, delimiter=mark)
    return [[cell.strip()[:LONGEST_CELL] for cell in row[:MOST_COLUMNS]] for row in cells]


def _separator(lines: Sequence[str]) -> str | None:
    """What parts the columns: tab, semicolon, or a comma that is not a decimal one."""
    if any("\t" in line for line in lines):
        return "\t"
    if sum(";" in line for line in lines) * 2 > len(lines):
        return ";"
    commas = [line for line in lines if re.search(r",\s*[^\d\s]|[^\d\s]\s*,|\d,\d+,", line)]
    return "," if len(commas) * 2 > len(lines) else None


def _loose(line: str) -> list[str]:
    """Cells of a line without separators: two blanks part them, else name, value and unit are told apart."""
    parts = re.split(r"\s{2,}|\s*\|\s*", line.strip(" |"))
    if len(parts) > 1:
        return parts
    match = _NAME_VALUE.fullmatch(line.strip())
    return [line.strip()] if match is None else [match["name"], match["value"]]


def _upright(rows: list[list[str]], own: Mapping[str, str]) -> list[list[str]]:
    """Turned so that every line is a parameter, where the parameters stand side by side."""
    across = sum(bool(find_key(cell, own)[0]) for cell in rows[0])
    down = sum(bool(row) and bool(find_key(row[0], own)[0]) for row in rows)
    if across < 3 or across <= down:
        return rows
    return [list(column) for column in zip_longest(*rows, fillvalue="")]


def _places(
    rows: list[list[str]], own: Mapping[str, str]
) -> tuple[tuple[int | None, int | None, int | None], list[list[str]]]:
    """Columns of parameter, value and unit, None for one that is not there; the rows below the heading."""
    heading = [is_heading(cell) for cell in rows[0]]
    if "value" in heading and "name" in heading:
        return tuple(
            heading.index(part) if part in heading else None for part in ("name", "value", "unit")
        ), rows[1:]
    width = max(map(len, rows))
    columns = [[row[place] if place < len(row) else "" for row in rows] for place in range(width)]

    def best(score: list[int], without: set[int | None]) -> int | None:
        found = [place for place in range(width) if place not in without and score[place] > 0]
        return max(found, key=lambda place: (score[place], -place), default=None)

    name = best([sum(bool(find_key(cell, own)[0]) for cell in column) for column in columns], set())
    if name is None:
        name = 0
    value = best([sum(_is_value(cell) for cell in column) for column in columns], {name})
    unit = best(
        [sum(bool(cell) and find_unit(cell)[0] is not None for cell in column) for column in columns],
        {name, value},
    )
    return (name, value, unit), rows


def _is_value(cell: str) -> bool:
    return bool(_VALUE.fullmatch(cell.translate(_SPACES).strip())) or normal(cell) in UNDETECTED


def _split_name(line: SheetLine) -> SheetLine:
    """A unit in brackets behind the name moves to the unit: "Calcium [mg/L]"."""
    match = re.fullmatch(r"(.*?)\s*[\[(]([^\[\]()]*)[\])]\s*", line.name)
    if match and not line.unit and find_unit(match[2])[0] is not None:
        return SheetLine(match[1], line.value, match[2])
    match = re.fullmatch(r"([^,]*),\s*([^,]+)", line.name)
    if match and not line.unit and find_unit(match[2])[0] is not None:
        return SheetLine(match[1], line.value, match[2])
    return line


KNOWN_KEYS = tuple(ENTRY_RULES)
"""Parameters a line may be taken as, apart from the scenario's own acids."""
