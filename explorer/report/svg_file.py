"""A drawing as a file of its own: with a heading, the scenario it is of, and its style inside."""

from explorer.report.markup import Markup, element
from explorer.report.style import svg_style
from explorer.report.svg_parts import EDGE, HEIGHT, WIDTH, label
from explorer.scenario.words import plain

HEAD, FOOT = 36.0, 18.0
"""Room for title and note above a drawing, and for the line below it."""

SCALE = 2
"""Pixels for each unit of a drawing where a program shows it at its own size."""

LONGEST, LONGEST_TITLE = 62, 46
"""Letters of a line, and of the title."""


def svg_file(drawn: Markup, title: str, note: str = "", source: str = "", height: float = HEIGHT) -> str:
    """A drawing (its ``svg`` element, ``height`` high) as the text of an SVG file.

    note: what stands below the title. source: the scenario it is of.
    """
    whole = HEAD + height + FOOT
    return element(
        "svg",
        element("title", title),
        element("style", Markup(svg_style(alone=True))),
        element("rect", width=f"{WIDTH:g}", height=f"{whole:g}", fill="#fff"),
        label(plain(title, LONGEST_TITLE), EDGE, 17, "start", "heading"),
        label(plain(note, LONGEST), EDGE, 31, "start"),
        element("svg", drawn, x=0, y=f"{HEAD:g}", width=f"{WIDTH:g}", height=f"{height:g}"),
        label(plain(source, LONGEST), EDGE, whole - 7, "start", "source"),
        xmlns="http://www.w3.org/2000/svg", viewBox=f"0 0 {WIDTH:g} {whole:g}",
        width=f"{SCALE * WIDTH:g}", height=f"{SCALE * whole:g}", font_size="10.5",
        font_family="system-ui, 'Segoe UI', Roboto, 'DejaVu Sans', sans-serif",
    )  # fmt: skip
