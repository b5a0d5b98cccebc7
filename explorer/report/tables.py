"""Tables of the report, and the same as CSV."""

import html
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from urllib.parse import quote

from explorer.report.markup import Markup, Part, element, joined
from explorer.scenario.csv_text import BYTE_ORDER_MARK, csv_text
from explorer.scenario.words import unit_text

Row = Sequence[Part]

SHORT = 12
"""Rows of a table that is not broken between two pages."""

_TAGS = re.compile(r"<[^<>]*>")


@dataclass(frozen=True)
class Group:
    """A row that names the rows below it."""

    title: str


def unit_cell(text: str) -> Markup:
    """A unit, kept on one line."""
    return element("span", unit_text(text), class_="unit")


def table(
    name: str,
    heading: Row,
    rows: Iterable[Row | Group],
    *,
    left: Sequence[int] = (0,),
    look: str = "",
    full: Sequence[Sequence[object]] | None = None,
) -> Markup | None:
    """A table with its CSV; None without rows.

    name: of the CSV file. left: columns of words; the others are set flush right. full: rows for the CSV,
    the heading first, where it holds more than the page shows.
    """
    rows = list(rows)
    if not rows:
        return None
    sides = ["words" if column in left else "figures" for column in range(len(heading))]
    head = element(
        "tr",
        [element("th", part, class_=side, scope="col") for part, side in zip(heading, sides, strict=True)],
    )
    body = [
        element("tr", element("th", row.title, colspan=len(heading), scope="rowgroup"), class_="group")
        if isinstance(row, Group)
        else _row(row, sides)
        for row in rows
    ]
    drawn = element("table", element("thead", head), element("tbody", body), class_=look or None)
    room = "table short" if len(rows) <= SHORT else "table"
    return element("div", drawn, _download(name, full or _shown(heading, rows)), class_=room)


def _row(row: Row, sides: Sequence[str]) -> Markup:
    first, *others = zip(row, sides, strict=True)
    return element(
        "tr",
        element("th", first[0], class_=first[1], scope="row"),
        [element("td", part, class_=side) for part, side in others],
    )


def _shown(heading: Row, rows: Iterable[Row | Group]) -> list[list[str]]:
    """What the page shows, without markup."""
    texts = [[row.title] if isinstance(row, Group) else row for row in rows]
    return [[_bare(part) for part in row] for row in [heading, *texts]]


def _bare(part: Part) -> str:
    """A cell without its markup; what stands on a line of its own is set off by a semicolon."""
    text = joined(part).replace('<small class="under">', "; ")
    return html.unescape(_TAGS.sub("", text)).strip()


def _download(name: str, rows: Sequence[Sequence[object]]) -> Markup:
    link = f"data:text/csv;charset=utf-8,{quote(BYTE_ORDER_MARK + csv_text(rows))}"
    return element(
        "a", "CSV", href=link, download=f"{name}.csv", class_="csv", title="This table for a spreadsheet"
    )
