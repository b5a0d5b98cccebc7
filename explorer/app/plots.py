"""Linked plots over one swept dial: figures are built once, afterwards only columns and ranges change.

The operating point is one editable span shared by all plots. Curves come as ``multi_line`` rows, so that more
curves never mean more models. Labels that follow the pointer, names at the ends of curves and the rings on
the operating point live in the page (``sweep.js``): moving the pointer costs no message.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

from bokeh.core.properties import value
from bokeh.events import MouseLeave, MouseMove, Pan, PanEnd, PanStart, Tap
from bokeh.models import (
    BasicTicker,
    BoxAnnotation,
    ColumnDataSource,
    CrosshairTool,
    CustomJS,
    CustomJSTickFormatter,
    PlainText,
    Range1d,
    Span,
)
from bokeh.plotting import figure

from explorer.app.look import (
    CROSSING_MARKER,
    DASHES,
    FOLDER,
    FONT,
    LIGHT,
    LINE_WIDTH,
    POINT_MARKER,
    POINTER,
    Palette,
)
from explorer.studies.pictures import Axis, Band, Picture

_SCRIPT = (FOLDER / "sweep.js").read_text(encoding="utf-8")
_TICKS = """
const largest = Math.max(...ticks.map(Math.abs)), power = largest >= 1e5 ? Math.floor(Math.log10(largest)) : 0
const scaled = (value) => Number((value / 10 ** power).toPrecision(6))
let digits = 0
for (const other of ticks) digits = Math.max(digits, (String(scaled(other)).split(".")[1] ?? "").length)
const text = Math.abs(scaled(tick)).toFixed(Math.min(digits, 8))
const times = power && tick ? "·10" + [...String(power)].map((digit) => "⁰¹²³⁴⁵⁶⁷⁸⁹"[digit]).join("") : ""
return (tick < 0 && Number(text) !== 0 ? "−" : "") + text + times + after
"""


def _ticks(after: str = "") -> CustomJSTickFormatter:
    return CustomJSTickFormatter(code=_TICKS, args={"after": after})


def _in_page(**columns: list[Any]) -> ColumnDataSource:
    """A source that only the page writes; nothing of it travels."""
    source = ColumnDataSource(data=columns)
    source.syncable = False
    return source


def _put(source: ColumnDataSource, columns: dict[str, list[Any]]) -> None:
    """Set columns that have changed; what stays the same is neither sent nor painted."""
    if dict(source.data) != columns:
        source.data = columns


def _pointer_line(dimension: str, alpha: float) -> Span:
    """Line that follows the pointer; its place does not travel either, so its colour suits both palettes."""
    line = Span(dimension=dimension, line_width=1, line_color=POINTER, line_alpha=alpha)
    line.syncable = False
    return line


class LinePlot:
    """One figure: curves, target band, crossings, gaps, end labels, operating point."""

    def __init__(
        self, name: str, x_range: Range1d, point: Span, cross: Span, labels_right: bool, x_label: bool
    ) -> None:
        self.name = name
        self.picture: Picture | None = None
        self.palette = LIGHT
        self._band: Band | None = None
        self.y_range = Range1d(0, 1)
        self.has_x_label = x_label
        self.lines = ColumnDataSource(
            data={
                key: []
                for key in ("xs", "ys", "colour", "dash", "label", "digits", "figures", "signed", "unit")
            }
        )
        self.ends = _in_page(x=[], y=[], text=[], colour=[])
        self.crossings = ColumnDataSource(data={key: [] for key in ("x", "y", "text", "dx", "dy", "align")})
        self.gaps = ColumnDataSource(data={key: [] for key in ("x0", "x1", "x", "y", "text", "angle")})
        self.rings = _in_page(x=[], y=[], colour=[])
        self.labels = _in_page(x=[], y=[], text=[], colour=[], dx=[], dy=[], align=[])
        self.figure = self._build(x_range, point, cross, labels_right)

    def _build(self, x_range: Range1d, point: Span, cross: Span, labels_right: bool) -> figure:
        fig = figure(
            name=self.name,
            x_range=x_range,
            y_range=self.y_range,
            tools=[],
            toolbar_location=None,
            sizing_mode="stretch_both",
            min_height=120,
            min_border_left=54,
            min_border_top=6,
            min_border_right=74 if labels_right else 28,
            min_border_bottom=26,
            output_backend="canvas",
            html_attributes={"role": "img", "aria-label": self.name},
        )
        fig.xgrid.grid_line_color = None
        fig.xaxis.formatter, fig.yaxis.formatter = _ticks(), _ticks()
        fig.yaxis.ticker = BasicTicker(desired_num_ticks=5)
        fig.xaxis.ticker = BasicTicker(desired_num_ticks=6)
        fig.yaxis.axis_line_color = None
        self.band = BoxAnnotation(
            level="underlay", fill_alpha=0.1, line_alpha=0.35, line_dash=[2, 2], visible=False
        )
        fig.add_layout(self.band)
        self.gap = fig.vstrip(
            x0="x0",
            x1="x1",
            source=self.gaps,
            level="underlay",
            line_alpha=0,
            fill_alpha=0.5,
            hatch_pattern="right_diagonal_line",
            hatch_scale=8,
            hatch_weight=0.6,
            hatch_alpha=0.5,
        )
        self.gap_text = fig.text(
            x="x",
            y="y",
            text="text",
            angle="angle",
            source=self.gaps,
            text_font=value(FONT),
            text_font_size="11px",
            text_align="center",
            text_baseline="middle",
            background_fill_alpha=0.9,
            padding=3,
            border_radius=3,
        )
        self.curve = fig.multi_line(
            xs="xs",
            ys="ys",
            source=self.lines,
            line_color="colour",
            line_dash="dash",
            line_width=LINE_WIDTH,
            line_join="round",
        )
        self.crossing = fig.scatter(
            x="x",
            y="y",
            source=self.crossings,
            marker=CROSSING_MARKER,
            size=9,
            line_width=1.2,
            level="annotation",
        )
        self.crossing_text = fig.text(
            x="x",
            y="y",
            text="text",
            source=self.crossings,
            text_font=value(FONT),
            text_font_size="11px",
            x_offset="dx",
            y_offset="dy",
            text_align="align",
            text_baseline="bottom",
            level="annotation",
        )
        self.end = fig.text(
            x="x",
            y="y",
            text="text",
            source=self.ends,
            text_color="colour",
            text_font=value(FONT),
            x_offset=7,
            text_font_size="12px",
            text_baseline="middle",
            level="overlay",
        )
        fig.add_layout(point)
        self.ring = fig.scatter(
            x="x",
            y="y",
            source=self.rings,
            marker=POINT_MARKER,
            size=9,
            line_width=LINE_WIDTH,
            line_color="colour",
            level="overlay",
        )
        self.label = fig.text(
            x="x",
            y="y",
            text="text",
            source=self.labels,
            text_color="colour",
            text_font=value(FONT),
            text_font_size="12px",
            text_font_style="bold",
            x_offset="dx",
            y_offset="dy",
            text_align="align",
            text_baseline="middle",
            background_fill_alpha=0.88,
            padding=3,
            border_radius=3,
            level="overlay",
        )
        fig.add_tools(CrosshairTool(overlay=[cross, _pointer_line("width", 0.0)]))
        return fig

    # ---- drawing -------------------------------------------------------------------------------------

    def show(self, picture: Picture, along: Axis) -> None:
        """Bring the figure to ``picture``; call inside one hold for all plots."""
        self.picture = picture
        low, high = picture.limits
        if (self.y_range.start, self.y_range.end) != (low, high):
            self.y_range.update(start=low, end=high)
        if self.band.visible != (picture.band is not None):
            self.band.visible = picture.band is not None
        # Compared with what was set, not with what is stored: an open side is stored as something else, and
        # setting it makes Bokeh walk through all models of the page.
        if picture.band not in (None, self._band):
            self.band.update(bottom=picture.band[0], top=picture.band[1])
            self._band = picture.band
        self._draw()
        if self.has_x_label:
            label = f"{along.name}, {along.unit}" if along.unit else along.name
            if getattr(self.figure.xaxis[0].axis_label, "text", None) != label:
                self.figure.xaxis[0].axis_label = PlainText(label)
        self.figure.html_attributes = {"role": "img", "aria-label": picture.words}

    def restyle(self, palette: Palette) -> None:
        """Take the colours of another palette."""
        self.palette = palette
        self.band.update(fill_color=palette.ok, line_color=palette.ok)
        self.gap.glyph.update(fill_color=palette.track, hatch_color=palette.soft)
        self.gap_text.glyph.update(text_color=palette.soft, background_fill_color=palette.card)
        self.crossing.glyph.update(fill_color=palette.card, line_color=palette.ink)
        self.crossing_text.glyph.update(text_color=palette.soft)
        self.ring.glyph.update(fill_color=palette.card)
        self.label.glyph.update(background_fill_color=palette.card)
        if self.picture is not None:
            self._draw()

    def _draw(self) -> None:
        picture, palette = self.picture, self.palette
        assert picture is not None
        count = len(picture.lines)
        colours = (
            [palette.accent]
            if count == 1
            else [palette.series[i % len(palette.series)] for i in range(count)]
        )
        self.lines.data = {
            "xs": [picture.x] * count,
            "ys": [line.y for line in picture.lines],
            "colour": colours,
            "dash": [DASHES[i % len(DASHES)] for i in range(count)],
            "label": [line.name for line in picture.lines],
            "digits": [picture.digits] * count,
            "figures": [picture.significant or 0] * count,
            "signed": [picture.signed] * count,
            "unit": [picture.unit] * count,
        }
        _put(self.crossings, self._crossing_labels(picture))
        _put(self.gaps, self._gap_labels(picture))

    @staticmethod
    def _gap_labels(picture: Picture) -> dict[str, list[Any]]:
        """Stretches without a result; their words stand upright, or are left out, where there is no room."""
        width = float(picture.x[-1] - picture.x[0]) or 1.0
        parts = [(stop - start) / width for start, stop, _ in picture.gaps]
        return {
            "x0": [gap[0] for gap in picture.gaps],
            "x1": [gap[1] for gap in picture.gaps],
            "x": [(gap[0] + gap[1]) / 2 for gap in picture.gaps],
            "y": [sum(picture.limits) / 2] * len(parts),
            "text": ["no result" if part > 0.04 else "" for part in parts],
            "angle": [0.0 if part > 0.2 else math.pi / 2 for part in parts],
        }

    @staticmethod
    def _crossing_labels(picture: Picture) -> dict[str, list[Any]]:
        """Marks with their texts outside of the band and beside the curve, on the plot at both ends."""
        start, width = float(picture.x[0]), float(picture.x[-1] - picture.x[0]) or 1.0
        sides = []
        for mark in picture.marks:
            part = (mark.x - start) / width
            left = (mark.rising == mark.upper or part > 0.88) and part > 0.12
            sides.append((left, not mark.upper))
        return {
            "x": [mark.x for mark in picture.marks],
            "y": [mark.y for mark in picture.marks],
            "text": [mark.text for mark in picture.marks],
            "dx": [-7 if left else 7 for left, _ in sides],
            "dy": [18 if below else -4 for _, below in sides],
            "align": ["right" if left else "left" for left, _ in sides],
        }


class LinkedPlots:
    """Several :class:`LinePlot` over one x axis, crosshair and operating point.

    ``turned`` is called with the place the operating point was dragged or tapped to, in the dial's unit.
    """

    def __init__(self, names: list[str], turned: Callable[[float], None]) -> None:
        self.turned = turned
        self.x_range = Range1d(0, 1)
        self.point = Span(
            name="operating-point",
            dimension="height",
            location=0,
            editable=True,
            line_width=1.6,
            line_dash=[2, 3],
            level="annotation",
        )
        cross = _pointer_line("height", 0.6)
        self.plots = {
            name: LinePlot(
                name, self.x_range, self.point, cross, labels_right=index % 2 == 1, x_label=index >= 2
            )
            for index, name in enumerate(names)
        }
        self._quiet = False
        self.point.on_change("location", self._moved)
        self._wire()

    def _wire(self) -> None:
        parts = [
            {
                "lines": plot.lines,
                "rings": plot.rings,
                "labels": plot.labels,
                "ends": plot.ends,
                "y_range": plot.y_range,
                "axis": plot.figure.xaxis[0],
                "figure": plot.figure,
            }
            for plot in self.plots.values()
        ]
        script = CustomJS(args={"parts": parts, "point": self.point, "x_range": self.x_range}, code=_SCRIPT)
        for plot in self.plots.values():
            for event in (MouseMove, MouseLeave, Tap, PanStart, Pan, PanEnd):
                plot.figure.js_on_event(event, script)
            plot.lines.js_on_change("data", script)
            plot.figure.js_on_change("inner_height", script)
        self.point.js_on_change("location", script)
        self.x_range.js_on_change("end", script)

    def show(self, pictures: dict[str, Picture], along: Axis) -> None:
        """Show all pictures (by plot name); they share ``x``."""
        x = next(iter(pictures.values())).x
        start, end = float(x[0]), float(x[-1])
        if (self.x_range.start, self.x_range.end) != (start, end):
            self.x_range.update(start=start, end=end)
        for name, picture in pictures.items():
            self.plots[name].show(picture, along)

    def set_axis(self, along: Axis) -> None:
        """Decimals and unit of the places the page prints; short units stand behind every tick, too."""
        unit = along.unit
        if self.point.tags != [along.digits, unit]:
            self.point.tags = [along.digits, unit]
        after = f" {unit}" if unit in {"%", "°C", "°F"} else ""
        for plot in self.plots.values():
            if plot.figure.xaxis[0].formatter.args["after"] != after:
                plot.figure.xaxis[0].formatter = _ticks(after)

    def set_point(self, x: float, step: float) -> None:
        """Move the operating point unless it is there already, to within half a step of the dial."""
        if self.point.location is None or abs(float(self.point.location) - x) > step / 2:
            self._quiet = True
            try:
                self.point.location = x
            finally:
                self._quiet = False

    def restyle(self, palette: Palette) -> None:
        """Take the colours of another palette."""
        self.point.line_color = palette.ink
        for plot in self.plots.values():
            plot.restyle(palette)

    def _moved(self, attr: str, old: Any, new: Any) -> None:
        if not self._quiet and new is not None:
            self.turned(float(new))
