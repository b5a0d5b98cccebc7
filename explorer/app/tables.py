"""Tables of the views: HTML tables from plain data, and the same for a spreadsheet."""

from __future__ import annotations

from collections.abc import Callable, Container, Iterable, Sequence
from dataclasses import dataclass
from typing import Any

from explorer.app.file_names import file_name
from explorer.app.live_view import Node, node
from explorer.app.pickers import spoken_name
from explorer.app.state import Session
from explorer.scenario.csv_text import BYTE_ORDER_MARK, csv_text

Cell = str | Node | None
"""What stands in a cell: a text, a node of its own, or nothing."""


@dataclass(frozen=True)
class Row:
    """The cells of a line; ``look`` names its CSS classes, ``key`` the row on the page."""

    cells: Sequence[Cell]
    look: str = ""
    key: str = ""


@dataclass(frozen=True)
class Group:
    """A line that names the lines below it."""

    title: str


def table(
    caption: str,
    heading: Sequence[Cell],
    rows: Iterable[Row | Group],
    *,
    foot: Iterable[Row] = (),
    words: Container[int] = (0,),
    look: str = "",
    searched: bool = False,
) -> Node:
    """A table inside a part of its own that scrolls.

    caption: what the table is about, for screen readers. words: columns that are read as words; figures are
    set flush right. searched: whether its rows are looked through by the search field of the view.
    """
    sides = ["text" if column in words else "figures" for column in range(len(heading))]
    head = [_cell("th", part, side, scope="col") for part, side in zip(heading, sides, strict=True)]
    extra = {"data_words": True} if searched else {}

    def line(row: Row | Group) -> Node:
        if isinstance(row, Group):
            title = node("th", "text", text=row.title, colspan=len(heading), scope="rowgroup")
            return node("tr", "group", title)
        first, *others = zip(row.cells, sides, strict=True)
        cells = [_cell("td", part, side) for part, side in others]
        return node("tr", row.look, _cell("th", *first, scope="row"), *cells, key=row.key, **extra)

    below = [line(row) for row in foot]
    drawn = node(
        "table",
        f"table {look}".strip(),
        node("caption", text=caption),
        node("thead", "", node("tr", "", *head)),
        node("tbody", "", *map(line, rows)),
        node("tfoot", "", *below) if below else None,
    )
    return node("div", "scroll", drawn, tabindex="0", role="region", aria_label=caption)


def _cell(tag: str, part: Cell, side: str, **properties: Any) -> Node:
    if isinstance(part, Node):
        return node(tag, side, part, **properties)
    return node(tag, side, text=part or "", **properties)


def over(title: str, unit: str) -> Node:
    """A heading with the unit of its column below it."""
    return node("span", "", node("span", text=title), node("small", text=unit))


def csv_button(
    session: Session,
    what: str,
    rows: Callable[[], Iterable[Sequence[Any]]],
    key: str = "csv",
    text: str = "Save as CSV",
) -> Node:
    """The button that lets a table be saved; ``what`` names it, ``rows`` are its lines, the heading first."""

    def save(value: Any) -> None:
        name = file_name(f"{session.scenario.title} {what}", "csv")
        session.offer(name, BYTE_ORDER_MARK + csv_text(rows()))

    hint = f"Save the {what} as CSV, for a spreadsheet"
    spoken = spoken_name(text, hint)
    return node("button", "button", text=text, key=key, type="button", title=hint, aria_label=spoken, on=save)
