"""Tables as CSV, safe to open in a spreadsheet."""

import csv
import io
import re
from collections.abc import Iterable, Sequence

from explorer.scenario.readouts import MINUS

BYTE_ORDER_MARK = "\ufeff"
"""In front of a file it tells spreadsheets that the text is UTF-8; a stream of text does without."""

_NUMBER = re.compile(rf"[-+{MINUS}]?(\d+\.?\d*|\.\d+)([eE][-+]?\d+)?")
_FORMULA = ("=", "+", "-", "@", "\t", "\r")


def csv_text(rows: Iterable[Sequence[object]]) -> str:
    """Rows as CSV (RFC 4180).

    None is an empty cell. A text that a spreadsheet would take for a formula gets an apostrophe before it;
    numbers stay numbers, with a plain minus.
    """
    text = io.StringIO()
    csv.writer(text, lineterminator="\r\n").writerows([_cell(value) for value in row] for row in rows)
    return text.getvalue()


def _cell(value: object) -> object:
    if not isinstance(value, str):
        return value
    if _NUMBER.fullmatch(value.strip()):
        return value.strip().replace(MINUS, "-")
    return f"'{value}" if value.startswith(_FORMULA) else value
