"""One plot of a quantity along a dial: curves, their fan, target band, crossings, gaps, operating point."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import numpy as np
from bokeh.core.properties import value
from bokeh.models import (
    BasicTicker,
    BoxAnnotation,
    ColumnDataSource,
    CrosshairTool,
    PlainText,
    Range1d,
    Span,
)
from bokeh.plotting import figure

from explorer.app.look import (
    CROSSING_MARKER,
    DASHES,
    DOT_MARKERS,
    DOT_SIZE,
    FAN_ALPHA,
    LIGHT,
    LINE_WIDTH,
    POINT_MARKER,
    THIN_LINE_WIDTH,
    Palette,
)
from explorer.app.plot_parts import in_page, lettered, pointer_line, put, ticks
from explorer.studies.pictures import Axis, Band, Layer, Picture
from explorer.studies.titration_pictures import Name

SMALL, USUAL = 11, 12
"""Texts of a plot, pixels: at axes and marks; names and values of curves."""


class LinePlot:
    """One figure, built once; :meth:`show` changes columns and ranges only."""

    def __init__(
        self, name: str, x_range: Range1d, point: Span, cross: Span, labels_right: bool, x_label: bool
    ) -> None:
        self.name = name
        self.picture: Picture | None = None
        self.palette = LIGHT
        self._band: Band | None = None
        self.y_range = Range1d(0, 1)
        self.has_x_label = x_label
        self._right = 74 if labels_right else 28
        self.lines = ColumnDataSource(
            data={
                key: []
                for key in ("xs", "ys", "colour", "dash", "label", "digits", "figures", "signed", "unit")
            }
        )
        self.others = ColumnDataSource(data={key: [] for key in ("xs", "ys", "colour", "dash", "label")})
        self.fan = ColumnDataSource(data={"xs": [], "ys": [], "alpha": []})
        self.ends = in_page(x=[], y=[], text=[], colour=[])
        self.crossings = ColumnDataSource(data={key: [] for key in ("x", "y", "text", "dx", "dy", "align")})
        self.gaps = ColumnDataSource(data={key: [] for key in ("x0", "x1", "x", "y", "text", "angle")})
        self.dots = ColumnDataSource(data={key: [] for key in ("x", "y", "marker", "colour")})
        self.rings = in_page(x=[], y=[], colour=[])
        self.labels = in_page(x=[], y=[], text=[], colour=[], dx=[], dy=[], align=[])
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
            min_border_right=self._right,
            min_border_bottom=26,
            output_backend="canvas",
            html_attributes={"role": "img", "aria-label": self.name},
        )
        fig.xgrid.grid_line_color = None
        fig.xaxis.formatter, fig.yaxis.formatter = ticks(), ticks()
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
        self.gap_text = lettered(
            fig,
            self.gaps,
            angle="angle",
            text_align="center",
            text_baseline="middle",
            background_fill_alpha=0.9,
            padding=3,
            border_radius=3,
        )
        self.fan_area = fig.patches(xs="xs", ys="ys", source=self.fan, fill_alpha="alpha", line_alpha=0)
        self.curve = fig.multi_line(
            xs="xs",
            ys="ys",
            source=self.lines,
            line_color="colour",
            line_dash="dash",
            line_width=LINE_WIDTH,
            line_join="round",
        )
        self.other = fig.multi_line(
            xs="xs",
            ys="ys",
            source=self.others,
            line_color="colour",
            line_dash="dash",
            line_width=THIN_LINE_WIDTH,
            line_join="round",
        )
        self.dot = fig.scatter(
            x="x",
            y="y",
            source=self.dots,
            marker="marker",
            size=DOT_SIZE,
            line_color="colour",
            line_width=1.6,
            fill_alpha=0.85,
            level="annotation",
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
        self.crossing_text = lettered(
            fig,
            self.crossings,
            x_offset="dx",
            y_offset="dy",
            text_align="align",
            text_baseline="bottom",
            level="annotation",
        )
        self.end = lettered(
            fig,
            self.ends,
            size=USUAL,
            text_color="colour",
            x_offset=7,
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
        self.label = lettered(
            fig,
            self.labels,
            size=USUAL,
            text_color="colour",
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
        fig.add_tools(CrosshairTool(overlay=[cross, pointer_line("width", 0.0)]))
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

    def written(self) -> Sequence[Name]:
        """Names of the curves that stand on the curves; none where they stand at their ends."""
        return ()

    def enlarge(self, scale: float, x_label: bool) -> None:
        """Texts, lines and marks so many times their usual size, with or without the label of the x axis."""
        for text, size in (
            (self.gap_text, SMALL),
            (self.crossing_text, SMALL),
            (self.end, USUAL),
            (self.label, USUAL),
        ):
            text.glyph.text_font_size = value(f"{size * scale:g}px")
        for axis in (*self.figure.xaxis, *self.figure.yaxis):
            axis.major_label_text_font_size = f"{SMALL * scale:g}px"
            axis.axis_label_text_font_size = f"{11.5 * scale:g}px"
        self.curve.glyph.line_width = LINE_WIDTH * scale
        self.other.glyph.line_width = THIN_LINE_WIDTH * scale
        self.ring.glyph.update(size=9 * scale, line_width=LINE_WIDTH * scale)
        self.figure.update(
            min_border_top=round(6 * scale),
            min_border_left=round(54 * scale), min_border_right=round(self._right * scale),
            min_border_bottom=round(26 * scale),
        )  # fmt: skip
        self.has_x_label = x_label
        if not x_label:
            self.figure.xaxis[0].axis_label = None

    def restyle(self, palette: Palette) -> None:
        """Take the colours of another palette."""
        self.palette = palette
        self.band.update(fill_color=palette.ok, line_color=palette.ok)
        self.fan_area.glyph.fill_color = palette.accent
        self.gap.glyph.update(fill_color=palette.track, hatch_color=palette.soft)
        self.gap_text.glyph.update(text_color=palette.soft, background_fill_color=palette.card)
        self.dot.glyph.fill_color = palette.card
        self.crossing.glyph.update(fill_color=palette.card, line_color=palette.ink)
        self.crossing_text.glyph.update(text_color=palette.soft)
        self.ring.glyph.update(fill_color=palette.card)
        self.label.glyph.update(background_fill_color=palette.card)
        if self.picture is not None:
            self._draw()

    def _draw(self) -> None:
        picture, palette = self.picture, self.palette
        assert picture is not None
        lines, count = picture.lines, len(picture.lines)
        colours = [_chosen(palette.series, line.colour, place) for place, line in enumerate(lines)]
        if count == 1 and lines[0].colour is None:
            colours = [palette.accent]
        self.lines.data = {
            "xs": [picture.x] * count,
            "ys": [line.y for line in lines],
            "colour": colours,
            "dash": [_chosen(DASHES, line.dash, place) for place, line in enumerate(lines)],
            "label": [line.name for line in lines],
            "digits": [picture.digits] * count,
            "figures": [picture.significant or 0] * count,
            "signed": [picture.signed] * count,
            "unit": [picture.unit] * count,
        }
        put(self.others, other_columns(picture, palette))
        put(self.fan, fan_columns(picture.x, picture.fan))
        put(self.dots, dot_columns(picture, palette))
        put(self.crossings, self._crossing_labels(picture))
        put(self.gaps, self._gap_labels(picture))

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


def _chosen(styles: Sequence[Any], wanted: int | None, place: int) -> Any:
    """One of the styles there are; they begin anew after the last."""
    return styles[(place if wanted is None else wanted) % len(styles)]


def dot_columns(picture: Picture, palette: Palette) -> dict[str, list[Any]]:
    """Measured points within the range, each set with a marker of its own; colours are those after the
    curve's."""
    columns: dict[str, list[Any]] = {"x": [], "y": [], "marker": [], "colour": []}
    for place, part in enumerate(picture.dots):
        seen = (part.x >= picture.x[0]) & (part.x <= picture.x[-1])
        columns["x"] += part.x[seen].tolist()
        columns["y"] += part.y[seen].tolist()
        columns["marker"] += [_chosen(DOT_MARKERS, None, place)] * int(seen.sum())
        columns["colour"] += [_chosen(palette.series, None, place + 1)] * int(seen.sum())
    return columns


def other_columns(picture: Picture, palette: Palette) -> dict[str, list[Any]]:
    """Curves of kept options."""
    others = picture.others
    return {
        "xs": [picture.x.tolist()] * len(others),
        "ys": [line.y.tolist() for line in others],
        "colour": [_chosen(palette.series, line.colour, place) for place, line in enumerate(others)],
        "dash": [_chosen(DASHES, line.dash, place) for place, line in enumerate(others)],
        "label": [line.name for line in others],
    }


def fan_columns(x: np.ndarray, fan: Sequence[Layer]) -> dict[str, list[Any]]:
    """Outlines of the layers of a fan, each solved stretch one patch."""
    xs: list[list[float]] = []
    ys: list[list[float]] = []
    alphas: list[float] = []
    for layer in fan:
        solved = np.flatnonzero(np.isfinite(layer.low) & np.isfinite(layer.high))
        for part in np.split(solved, np.flatnonzero(np.diff(solved) > 1) + 1):
            if part.size > 1:
                xs.append([*x[part].tolist(), *x[part][::-1].tolist()])
                ys.append([*layer.high[part].tolist(), *layer.low[part][::-1].tolist()])
                alphas.append(FAN_ALPHA)
    return {"xs": xs, "ys": ys, "alpha": alphas}
