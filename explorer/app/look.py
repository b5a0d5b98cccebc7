"""The look in one place: colours, page and view styles, Bokeh themes, line colours, dashes and markers.

A palette names each colour by what it means. The page reads it as CSS variables (``--ink``, ``--accent`` …),
which reach into every shadow root; plots, being canvases, get it through :func:`bokeh_theme` and the columns
of their sources. Text colours keep a contrast of at least 4.5:1 on ``card`` in both palettes (tested).
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from pathlib import Path
from typing import Any

from bokeh.themes import Theme

FOLDER = Path(__file__).parent

FONT = 'system-ui, -apple-system, "Segoe UI", Roboto, "DejaVu Sans", sans-serif'


@dataclass(frozen=True)
class Palette:
    """Colours by meaning. ``series`` orders line and label colours so that neighbours stay apart for
    colour-blind readers; each comes with a dash of its own (``DASHES``), so colour never speaks alone."""

    scheme: str
    bg: str
    rail: str
    card: str
    field: str
    ink: str
    soft: str
    line: str
    grid: str
    track: str
    bar: str
    bar_ink: str
    accent: str
    accent_soft: str
    on_accent: str
    ok: str
    ok_soft: str
    warn: str
    warn_soft: str
    bad: str
    bad_soft: str
    shadow: str
    series: tuple[str, ...]
    waters: tuple[str, ...]


LIGHT = Palette(
    scheme="light",
    bg="#f3f4f1",
    rail="#fafbf9",
    card="#ffffff",
    field="#ffffff",
    ink="#1c2b30",
    soft="#56666b",
    line="#d9dedb",
    grid="#eceeec",
    track="#e4e9e6",
    bar="#16323a",
    bar_ink="#ffffff",
    accent="#0b6e69",
    accent_soft="#e2f0ee",
    on_accent="#ffffff",
    ok="#1d7a46",
    ok_soft="#bfe0cc",
    warn="#a34a08",
    warn_soft="#fbeedd",
    bad="#b3261e",
    bad_soft="#fbe7e5",
    shadow="rgba(20, 40, 45, .16)",
    series=("#0072b2", "#b84f00", "#7b4ea3", "#007d5c", "#a8497d", "#8a6400", "#3f6fd1", "#6b5d4f"),
    waters=("#0072b2", "#d98c00", "#7b4ea3", "#009e73", "#cc5f9c", "#56a4d8", "#a0522d", "#6b7a80"),
)

DARK = Palette(
    scheme="dark",
    bg="#101719",
    rail="#141c1f",
    card="#192327",
    field="#10191c",
    ink="#e7edec",
    soft="#a3b2b4",
    line="#304046",
    grid="#263338",
    track="#304046",
    bar="#0b2228",
    bar_ink="#f2f6f5",
    accent="#4fb8ae",
    accent_soft="#1d3f3d",
    on_accent="#08211f",
    ok="#5cc98a",
    ok_soft="#2c6647",
    warn="#eda75f",
    warn_soft="#3d2f1c",
    bad="#f38d85",
    bad_soft="#43211f",
    shadow="rgba(0, 0, 0, .5)",
    series=("#56b4e9", "#ff9457", "#bd9be6", "#43c79d", "#e79cc6", "#e8b93f", "#8fa8ff", "#c7b299"),
    waters=("#3f9fdb", "#e5a32e", "#a983d1", "#2fb58c", "#d981b3", "#7cc3ee", "#c98a63", "#93a3a8"),
)

PALETTES = {palette.scheme: palette for palette in (LIGHT, DARK)}

DASHES: tuple[list[int], ...] = (
    [], [8, 4], [2, 3], [9, 3, 2, 3], [14, 4], [5, 2, 1, 2, 1, 2], [4, 2], [1, 5],
)  # fmt: skip
"""Dash of the n-th line of a plot, in pixels on and off; [] is solid."""

LINE_WIDTH = 2.2
MEETING_SCALE = 1.5
"""Texts and lines of plots in the meeting view."""

THIN_LINE_WIDTH = 1.2
"""Of curves beside the main ones."""

FAN_ALPHA = 0.15
"""Of each layer of a fan; where layers overlap they add up."""

BAR_ALPHA = 0.45

POINTER = "#7f8f93"
"""Line under the pointer, in both palettes."""

HATCHES = (
    "right_diagonal_line", "left_diagonal_line", "horizontal_line", "dot", "vertical_line", "cross",
    "diagonal_cross", "ring",
)  # fmt: skip
"""Hatch of the n-th missed target of a map; study.css draws them alike in the legend."""

NO_ANSWER_HATCH = "dot"
MAP_ALPHA, HATCH_ALPHA = 0.13, 0.5

CROSSING_MARKER = "diamond"
POINT_MARKER = "circle"

DOT_MARKERS = ("square", "triangle", "inverted_triangle", "hex", "star")
"""Marker of the n-th set of measured points of a plot."""

DOT_SIZE = 8


def water_colour(index: int) -> str:
    """CSS colour of the swatch of the water at ``index`` (0-based; repeats after eight)."""
    return f"var(--water-{index % len(LIGHT.waters)})"


def css_variables(palette: Palette) -> str:
    """The palette as CSS declarations, with the variables Panel's own widgets read."""
    values = {
        field.name.replace("_", "-"): getattr(palette, field.name)
        for field in fields(palette)
        if field.name not in {"scheme", "series", "waters"}
    }
    values |= {f"water-{index}": colour for index, colour in enumerate(palette.waters)}
    values |= {f"series-{index}": colour for index, colour in enumerate(palette.series)}
    values |= {
        "panel-background-color": palette.bg,
        "panel-on-background-color": palette.ink,
        "panel-surface-color": palette.card,
        "panel-on-surface-color": palette.ink,
        "panel-border-color": palette.line,
        "panel-primary-color": palette.accent,
        "font": FONT,
    }
    return f"color-scheme:{palette.scheme};" + "".join(f"--{name}:{value};" for name, value in values.items())


def page_css() -> str:
    """Styles of the page itself: both palettes and the grid; dark where the page says ``data-theme=dark``."""
    return f":root{{{css_variables(LIGHT)}}}\n:root[data-theme=dark]{{{css_variables(DARK)}}}\n" + (
        FOLDER / "look.css"
    ).read_text(encoding="utf-8")


VIEW_STYLES = ("live_view.css", "views.css")
"""Style files of the main column's views, which carry them because page styles stop at a shadow root."""


STUDY_STYLES = (*VIEW_STYLES, "study.css")
"""The same for views of long calculations."""

VIEW_HOST_CSS = """:host { min-height: 0 !important; height: 100%; }
@media print { :host { flex: var(--sheet-flex, 1 1 0) !important; } }"""
"""For a view that fills the place under the verdict and shrinks with it."""

PLOT_GRID_CSS = """
:host { display: grid !important; grid-template-columns: var(--plot-columns, repeat(2, minmax(0, 1fr)));
  /* the lower row carries the axis label */
  grid-template-rows: var(--plot-rows, calc(50% - 15px) calc(50% + 5px)); gap: 10px;
  margin-top: 9px !important; min-height: 0; }
@media (max-width: 759px) {
  :host { grid-template-columns: minmax(0, 1fr);
    grid-template-rows: var(--plot-rows, repeat(4, minmax(0, 1fr))); }
}
"""

TITRATION_GRID_CSS = """
:host { display: grid !important; grid-template-columns: repeat(2, minmax(0, 1fr)); min-height: 0; gap: 10px;
  /* the lower row carries the axis label */
  grid-template-rows: calc(50% - 15px) calc(50% + 5px); margin-top: 9px !important; }
:host > .diagram { grid-area: 1 / 2 / 3 / 3; }
@media (max-width: 759px) {
  :host { grid-template-columns: minmax(0, 1fr);
    grid-template-rows: repeat(2, minmax(0, 1fr)) minmax(0, 1.6fr); }
  :host > .diagram { grid-area: auto; }
}
"""

MAP_GRID_CSS = """
:host { display: grid !important; grid-template: minmax(0, 100%) / minmax(0, 1fr) 232px; gap: 12px;
  min-height: 0; margin-top: 9px !important; }
@media (max-width: 759px) { :host { grid-template: 420px auto / minmax(0, 1fr); } }
"""

SPREAD_GRID_CSS = """
:host { display: grid !important; grid-template-columns: minmax(0, 1.35fr) minmax(0, 1fr); gap: 10px;
  grid-template-rows: minmax(230px, 46%) max-content; margin-top: 9px !important; min-height: 0;
  overflow-y: auto; scrollbar-width: thin; }
@media (max-width: 759px) {
  :host { grid-template-columns: minmax(0, 1fr); grid-template-rows: 260px 240px max-content max-content; }
}
"""

COMPARE_GRID_CSS = """
:host { display: grid !important; grid-template-columns: minmax(0, 1.3fr) minmax(0, 1fr); gap: 10px;
  grid-template-rows: minmax(0, 1fr); margin-top: 9px !important; min-height: 0; }
@media (max-width: 1099px) {
  :host { grid-template-columns: minmax(0, 1fr); grid-template-rows: minmax(0, 1.2fr) minmax(0, 1fr); }
}
"""

PLOT_CARD_CSS = """
:host { background: var(--card); border: 1px solid var(--line); border-radius: 7px; overflow: hidden;
  min-height: 0; transition: opacity .2s; }
:host(.old) { opacity: .45; }
"""


def styles(names: tuple[str, ...]) -> list[str]:
    """Contents of style files beside this module."""
    return [(FOLDER / name).read_text(encoding="utf-8") for name in names]


def bokeh_theme(palette: Palette) -> Theme:
    """Bokeh defaults of a palette. Applies to what a figure does not set itself."""
    attrs: dict[str, dict[str, Any]] = {
        "Plot": {
            # The card shows through: a filled border leaves a light hairline at two edges of the canvas.
            "background_fill_color": None,
            "border_fill_color": None,
            "outline_line_color": None,
            "border_line_color": None,
        },
        "Axis": {
            "axis_line_color": palette.line,
            "major_tick_line_color": None,
            "minor_tick_line_color": None,
            "major_label_text_color": palette.soft,
            "major_label_text_font": FONT,
            "major_label_text_font_size": "11px",
            "major_label_standoff": 6,
            "axis_label_text_color": palette.soft,
            "axis_label_text_font": FONT,
            "axis_label_text_font_size": "11.5px",
            "axis_label_text_font_style": "normal",
            "axis_label_standoff": 3,
        },
        "Grid": {"grid_line_color": palette.grid},
    }
    return Theme(json={"attrs": attrs})


THEMES = {palette.scheme: bokeh_theme(palette) for palette in (LIGHT, DARK)}
