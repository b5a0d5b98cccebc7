"""The map of two dials as a figure: built once, afterwards only columns and ranges change."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from bokeh.core.properties import field, value
from bokeh.events import MouseLeave, MouseMove, Tap
from bokeh.models import BasicTicker, ColumnDataSource, CrosshairTool, CustomJS, PlainText, Range1d, Span
from bokeh.plotting import figure

from explorer.app.look import (
    FONT,
    HATCH_ALPHA,
    HATCHES,
    LIGHT,
    LINE_WIDTH,
    MAP_ALPHA,
    NO_ANSWER_HATCH,
    POINT_MARKER,
    Palette,
)
from explorer.app.plot_parts import in_page, lettered, pointer_line, script, ticks
from explorer.app.window_drawing import Drawing
from explorer.scenario.readouts import READOUTS
from explorer.scenario.words import brief_label, unit_text
from explorer.studies.window import NO_ANSWER
from explorer.studies.window_picture import Region

_SCRIPT = script("numbers.js", "window.js")


class WindowPlot:
    """The figure. ``chosen`` is called with the place in both dials' units that was clicked."""

    def __init__(self, chosen: Callable[[float, float], None]) -> None:
        self.chosen = chosen
        self.palette = LIGHT
        self.drawing: Drawing | None = None
        self.x_range, self.y_range = Range1d(0, 1), Range1d(0, 1)
        self.areas = ColumnDataSource(data={key: [] for key in ("xs", "ys", "colour", "hatch")})
        self.border = ColumnDataSource(data={"xs": [], "ys": []})
        self.lines = ColumnDataSource(data={"xs": [], "ys": []})
        self.line_texts = ColumnDataSource(data={"x": [], "y": [], "text": []})
        self.names = ColumnDataSource(data={key: [] for key in ("x", "y", "text", "colour")})
        self.point = ColumnDataSource(data={"x": [], "y": []})
        self.grid = ColumnDataSource(
            data={
                key: []
                for key in ("name", "values", "low", "high", "slack", "digits", "figures", "signed", "unit")
            }
        )
        self.axes = ColumnDataSource(data={"name": [], "digits": [], "unit": []})
        self.lost = ColumnDataSource(data={"reason": [], "map": []})
        self.tip = in_page(x=[], y=[], text=[], dx=[], dy=[], anchor=[])
        self.figure = self._build()

    def _build(self) -> figure:
        fig = figure(
            name="window", x_range=self.x_range, y_range=self.y_range, tools=[], toolbar_location=None,
            sizing_mode="stretch_both", min_height=120, min_border_left=64, min_border_top=6,
            min_border_right=18, min_border_bottom=40, output_backend="canvas",
            html_attributes={"role": "img", "aria-label": "map of two dials"},
        )  # fmt: skip
        fig.grid.grid_line_color = None
        fig.xaxis.formatter, fig.yaxis.formatter = ticks(), ticks()
        fig.xaxis.ticker, fig.yaxis.ticker = (BasicTicker(desired_num_ticks=count) for count in (7, 6))
        fig.multi_polygons(
            xs="xs", ys="ys", source=self.areas, fill_color="colour", fill_alpha=MAP_ALPHA, line_alpha=0,
            hatch_color="colour", hatch_alpha=HATCH_ALPHA, hatch_pattern=field("hatch"), hatch_weight=0.8,
            hatch_scale=11, level="underlay",
        )  # fmt: skip
        self.border_line = fig.multi_line(xs="xs", ys="ys", source=self.border, line_width=LINE_WIDTH)
        self.contour = fig.multi_line(xs="xs", ys="ys", source=self.lines, line_width=1.1, line_alpha=0.75)
        texts = {
            "text_align": "center", "text_baseline": "middle", "background_fill_alpha": 0.88, "padding": 3,
            "border_radius": 3,
        }  # fmt: skip
        self.line_text = lettered(fig, self.line_texts, level="overlay", **texts)
        self.name = lettered(
            fig, self.names, 12, text_color="colour", text_font_style="bold", level="overlay", **texts
        )
        self.marks = [Span(dimension=side, line_width=1.4, line_dash=[2, 3]) for side in ("height", "width")]
        for mark in self.marks:
            fig.add_layout(mark)
        self.ring = fig.scatter(
            x="x", y="y", source=self.point, marker=POINT_MARKER, size=11, line_width=LINE_WIDTH,
            level="overlay",
        )  # fmt: skip
        self.tip_text = fig.text(
            x="x", y="y", text="text", source=self.tip, text_font=value(FONT), text_font_size="12px",
            x_offset="dx", y_offset="dy", anchor=field("anchor"), text_line_height=1.35,
            border_line_width=1, padding=7, border_radius=5, level="overlay",
        )  # fmt: skip
        fig.add_tools(CrosshairTool(overlay=[pointer_line("width", 0.6), pointer_line("height", 0.6)]))
        fig.on_event(Tap, self._tapped)
        react = CustomJS(
            args={
                "grid": self.grid, "axes": self.axes, "lost": self.lost, "tip": self.tip,
                "x_range": self.x_range, "y_range": self.y_range, "figure": fig,
            },
            code=_SCRIPT,
        )  # fmt: skip
        for event in (MouseMove, MouseLeave):
            fig.js_on_event(event, react)
        return fig

    # ---- drawing -------------------------------------------------------------------------------------

    def show(self, drawn: Drawing) -> None:
        """Bring the figure to a map."""
        self.drawing = drawn
        picture = drawn.picture
        sides = ((self.x_range, picture.x), (self.y_range, picture.y))
        for side, values in sides:
            if (side.start, side.end) != (values[0], values[-1]):
                side.update(start=float(values[0]), end=float(values[-1]))
        for axis, along in ((self.figure.xaxis[0], picture.across), (self.figure.yaxis[0], picture.up)):
            label = f"{along.name}, {along.unit}" if along.unit else along.name
            if getattr(axis.axis_label, "text", None) != label:
                axis.axis_label = PlainText(label)
        self.border.data = {"xs": list(picture.border[..., 0]), "ys": list(picture.border[..., 1])}
        xs, ys = drawn.contours
        self.lines.data = {"xs": list(xs), "ys": list(ys)}
        self.line_texts.data = {
            "x": [place[0] for _, place in drawn.labels],
            "y": [place[1] for _, place in drawn.labels],
            "text": [text for text, _ in drawn.labels],
        }
        self._tell(drawn)
        self._colour()
        self.figure.html_attributes = {"role": "img", "aria-label": picture.words}

    def set_point(self, x: float, y: float) -> None:
        """Mark the operating point."""
        self.marks[0].location, self.marks[1].location = x, y
        self.point.data = {"x": [x], "y": [y]}

    def restyle(self, palette: Palette) -> None:
        """Take the colours of another palette."""
        self.palette = palette
        self.border_line.glyph.line_color = palette.ok
        self.contour.glyph.line_color = palette.soft
        self.line_text.glyph.update(text_color=palette.ink, background_fill_color=palette.card)
        self.name.glyph.background_fill_color = palette.card
        for mark in self.marks:
            mark.line_color = palette.ink
        self.ring.glyph.update(line_color=palette.ink, fill_color=palette.card)
        self.tip_text.glyph.update(
            text_color=palette.ink, background_fill_color=palette.card, border_line_color=palette.line
        )
        if self.drawing is not None:
            self._colour()

    def _colour(self) -> None:
        assert self.drawing is not None
        picture, outlines, palette = self.drawing.picture, self.drawing.outlines, self.palette
        styles = [_style(region, palette) for region, *_ in outlines]
        self.areas.data = {
            "xs": [xs for _, xs, _ in outlines],
            "ys": [ys for _, _, ys in outlines],
            "colour": [colour for colour, _ in styles],
            "hatch": [hatch for _, hatch in styles],
        }
        named = [(region, colour) for (region, *_), (colour, _) in zip(outlines, styles, strict=True)]
        if self.drawing.found.targets:
            named.append((picture.met, palette.ok))
        rows = [(*region.place, region.text, colour) for region, colour in named if region.place is not None]
        # Bokeh 3.9 lays out texts again with their new colours before it knows that there are fewer of them,
        # and fails; so their number never falls.
        spare = len(self.names.data["text"]) - len(rows)
        rows += [(np.nan, np.nan, "", palette.soft)] * spare
        keys = ("x", "y", "text", "colour")
        self.names.data = {key: [row[place] for row in rows] for place, key in enumerate(keys)}

    def _tell(self, drawn: Drawing) -> None:
        """What the page needs to say what is at the pointer."""
        found, picture = drawn.found, drawn.picture
        rows = [(READOUTS[target.readout], target.low, target.high) for target in found.targets]
        aimed = {target.readout for target in found.targets}
        rows += [(READOUTS[key], None, None) for key in found.readouts if key not in aimed]
        self.grid.tags = [len(picture.x), len(picture.y), bool(found.targets)]
        self.grid.data = {
            "name": [brief_label(readout) for readout, *_ in rows],
            "values": [found.readouts[readout.key].astype(np.float32) for readout, *_ in rows],
            "low": [np.nan if low is None else low for _, low, _ in rows],
            "high": [np.nan if high is None else high for *_, high in rows],
            "slack": [readout.slack for readout, *_ in rows],
            "digits": [readout.digits for readout, *_ in rows],
            "figures": [readout.significant or 0 for readout, *_ in rows],
            "signed": [readout.sign_words is not None for readout, *_ in rows],
            "unit": [unit_text(readout.unit) for readout, *_ in rows],
        }
        sides = (picture.across, picture.up)
        self.axes.data = {
            "name": [along.name for along in sides],
            "digits": [along.digits for along in sides],
            "unit": [along.unit for along in sides],
        }
        reasons = ["", *picture.reasons]
        codes = np.zeros(found.missed.shape, np.uint8)
        for code, reason in enumerate(reasons):
            codes[(found.missed == NO_ANSWER) & (found.reasons == reason)] = min(code, 255)
        self.lost.data = {"reason": reasons, "map": [codes] + [[]] * (len(reasons) - 1)}

    def _tapped(self, event: Any) -> None:
        if self.drawing is None:
            return
        inside = all(
            side.start <= place <= side.end
            for side, place in ((self.x_range, event.x), (self.y_range, event.y))
        )
        if inside:
            self.chosen(float(event.x), float(event.y))


def _style(region: Region, palette: Palette) -> tuple[str, str]:
    """Colour and hatch of a region."""
    if region.target is None:
        return palette.soft, NO_ANSWER_HATCH
    return palette.series[region.target % len(palette.series)], HATCHES[region.target % len(HATCHES)]
