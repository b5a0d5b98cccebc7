"""Parts that all plots are made of: tick labels, sources, texts, the line under the pointer."""

from __future__ import annotations

from typing import Any

from bokeh.core.properties import value
from bokeh.models import ColumnDataSource, CustomJSTickFormatter, GlyphRenderer, Span
from bokeh.plotting import figure

from explorer.app.look import FOLDER, FONT, POINTER

_TICKS = """
const largest = Math.max(...ticks.map(Math.abs)), power = largest >= 1e5 ? Math.floor(Math.log10(largest)) : 0
const scaled = (value) => Number((value / 10 ** power).toPrecision(6))
let digits = 0
for (const other of ticks) digits = Math.max(digits, (String(scaled(other)).split(".")[1] ?? "").length)
const text = Math.abs(scaled(tick)).toFixed(Math.min(digits, 8))
const times = power && tick ? "·10" + [...String(power)].map((digit) => "⁰¹²³⁴⁵⁶⁷⁸⁹"[digit]).join("") : ""
return (tick < 0 && Number(text) !== 0 ? "−" : "") + text + times + after
"""


def ticks(after: str = "") -> CustomJSTickFormatter:
    """Numbers at an axis: no more decimals than they need, a real minus, ``after`` behind each."""
    return CustomJSTickFormatter(code=_TICKS, args={"after": after})


def script(*names: str) -> str:
    """Scripts beside this module, one after the other, as one for the page."""
    return "\n".join((FOLDER / name).read_text(encoding="utf-8") for name in names)


def in_page(**columns: list[Any]) -> ColumnDataSource:
    """A source that only the page writes; nothing of it travels."""
    source = ColumnDataSource(data=columns)
    source.syncable = False
    return source


def put(source: ColumnDataSource, columns: dict[str, list[Any]]) -> None:
    """Set columns that have changed; what stays the same is neither sent nor painted."""
    if dict(source.data) != columns:
        source.data = columns


def pointer_line(dimension: str, alpha: float) -> Span:
    """Line that follows the pointer; its place does not travel either, so its colour suits both palettes."""
    line = Span(dimension=dimension, line_width=1, line_color=POINTER, line_alpha=alpha)
    line.syncable = False
    return line


def lettered(fig: figure, source: ColumnDataSource, size: int = 11, **properties: Any) -> GlyphRenderer:
    """Texts at the places ``x``, ``y`` of a source, in the font of the page."""
    usual = {"x": "x", "y": "y", "text": "text", "text_font": value(FONT), "text_font_size": f"{size}px"}
    return fig.text(source=source, **(usual | properties))
