"""Saving what a plot shows: its curves for a spreadsheet, its drawing as SVG, its picture as PNG.

Drawings are those of the report, so that page and paper show the same; the page makes the picture of them.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

from explorer.app.file_names import file_name
from explorer.app.live_view import Node
from explorer.app.pickers import Act, menu
from explorer.app.state import Session
from explorer.report.markup import Markup
from explorer.report.svg import plot
from explorer.report.svg_file import svg_file
from explorer.report.svg_parts import HEIGHT
from explorer.scenario.csv_text import BYTE_ORDER_MARK, csv_text
from explorer.studies.picture_table import picture_table
from explorer.studies.pictures import Axis, Picture
from explorer.studies.titration_pictures import Name

SVG, PNG = "image/svg+xml", "image/png"

NOTHING = "There is nothing to save yet: the plot is empty."


@dataclass(frozen=True)
class Plate:
    """A plot ready to be saved. ``name``: of its files. ``drawn``: makes its ``svg`` element, ``height``
    high. ``rows``: makes its lines for a spreadsheet, the heading first."""

    name: str
    title: str
    note: str
    drawn: Callable[[], Markup]
    rows: Callable[[], Sequence[Sequence[Any]]]
    height: float = HEIGHT


def picture_plate(
    kind: str, picture: Picture, along: Axis, here: float | None, names: Sequence[Name] = ()
) -> Plate:
    """A plot of curves. kind: what its files are called, before its title. here: the place that is marked.
    names: of curves, where they stand on the curves."""
    return Plate(
        f"{kind} {picture.title}", picture.title, picture.note,
        lambda: plot(picture, along, here, "plot", names), lambda: picture_table(picture, along),
    )  # fmt: skip


def save_menu(
    session: Session, made: Callable[[], Plate | None] | None, what: str, key: str = "save"
) -> list[Node]:
    """The button beside a plot and its menu; nothing where ``made``, which gives the plot as it is now, is
    None. what: the plot, for screen readers."""
    if made is None:
        return []

    def act(ending: str, kind: str, text: Callable[[Plate], str]) -> Callable[[], None]:
        def save() -> None:
            plate = made()
            if plate is None:
                session.message = NOTHING
            else:
                session.offer(file_name(f"{session.scenario.title} {plate.name}", ending), text(plate), kind)

        return save

    def drawn(plate: Plate) -> str:
        source = f"{session.scenario.title} · {session.season}"
        return svg_file(plate.drawn(), plate.title, plate.note, source, plate.height)

    def figures(plate: Plate) -> str:
        return BYTE_ORDER_MARK + csv_text(plate.rows())

    acts = [
        Act("png", "Picture (PNG)", act("png", PNG, drawn)),
        Act("svg", "Drawing (SVG)", act("svg", SVG, drawn)),
        Act("csv", "Figures (CSV)", act("csv", "text/csv", figures)),
    ]
    return menu(key, f"Save the plot: {what}", acts, "⤓")
