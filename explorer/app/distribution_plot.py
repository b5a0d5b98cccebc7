"""The distribution of a readout at the operating point as a figure; built once, then only columns change."""

from __future__ import annotations

import math
from typing import Any

from bokeh.models import BasicTicker, BoxAnnotation, ColumnDataSource, PlainText, Range1d, Span
from bokeh.plotting import figure

from explorer.app.look import BAR_ALPHA, LIGHT, LINE_WIDTH, Palette
from explorer.app.plot_parts import lettered, put, ticks
from explorer.scenario.readouts import format_value
from explorer.scenario.words import compact, unit_text
from explorer.studies.spread_pictures import Distribution

MARKS = ("2.5 %", "median", "97.5 %")


class DistributionPlot:
    """Bars of outcomes, target band, value with nothing off, and the percentiles with their values."""

    def __init__(self) -> None:
        self.palette = LIGHT
        self.x_range, self.y_range = Range1d(0, 1), Range1d(0, 1)
        self.bars = ColumnDataSource(data={"left": [], "right": [], "top": []})
        self.marks = ColumnDataSource(data={"x": [], "top": [], "base": []})
        self.texts = ColumnDataSource(data={key: [] for key in ("x", "y", "text", "align", "dx")})
        self.figure = self._build()

    def _build(self) -> figure:
        fig = figure(
            name="distribution", x_range=self.x_range, y_range=self.y_range, tools=[], toolbar_location=None,
            sizing_mode="stretch_both", min_height=120, min_border_left=16, min_border_right=16,
            min_border_top=6, min_border_bottom=40, output_backend="canvas",
            html_attributes={"role": "img", "aria-label": "distribution at the operating point"},
        )  # fmt: skip
        fig.grid.grid_line_color = None
        fig.yaxis.visible = False
        fig.xaxis.formatter, fig.xaxis.ticker = ticks(), BasicTicker(desired_num_ticks=5)
        self.band = BoxAnnotation(
            level="underlay", fill_alpha=0.1, line_alpha=0.35, line_dash=[2, 2], visible=False
        )
        fig.add_layout(self.band)
        self.bar = fig.quad(
            left="left", right="right", bottom=0, top="top", source=self.bars, fill_alpha=BAR_ALPHA,
            line_alpha=0.6, line_width=0.6,
        )  # fmt: skip
        self.mark = fig.segment(
            x0="x", x1="x", y0="base", y1="top", source=self.marks, line_width=1.3, line_dash="5 3"
        )
        self.nominal = Span(dimension="height", line_width=LINE_WIDTH, level="overlay", visible=False)
        fig.add_layout(self.nominal)
        self.text = lettered(
            fig, self.texts, text_align="align", x_offset="dx", text_baseline="middle",
            background_fill_alpha=0.85, padding=2, border_radius=3, level="overlay",
        )  # fmt: skip
        return fig

    def show(self, found: Distribution) -> None:
        """Bring the figure to a distribution."""
        low, high = found.limits
        if (self.x_range.start, self.x_range.end) != (low, high):
            self.x_range.update(start=low, end=high)
        most = float(found.parts.max()) if found.parts.size else 0.0
        # The figures stand above the bars.
        top = 1.45 * (most or 1.0)
        self.y_range.end = top
        self.bars.data = {"left": found.edges[:-1], "right": found.edges[1:], "top": found.parts}
        self._show_marks(found, top)
        self.nominal.update(visible=math.isfinite(found.nominal), location=found.nominal)
        self.band.visible = found.band is not None
        if found.band is not None:
            self.band.update(left=found.band[0], right=found.band[1])
        unit = unit_text(found.readout.unit)
        name = compact(found.readout.label)
        label = f"{name}, {unit}" if unit else name
        axis = self.figure.xaxis[0]
        if getattr(axis.axis_label, "text", None) != label:
            axis.axis_label = PlainText(label)
        self.figure.html_attributes = {"role": "img", "aria-label": found.words}

    def _show_marks(self, found: Distribution, top: float) -> None:
        """Percentiles with their values, one above the other so that they never cover each other."""
        low, high = found.limits
        levels = [0.78 * top, 0.93 * top, 0.78 * top]
        known = [
            (place, name, level)
            for place, name, level in zip(found.marks, MARKS, levels, strict=True)
            if math.isfinite(place)
        ]
        lines = {
            "x": [place for place, *_ in known],
            "top": [level for *_, level in known],
            "base": [0.0] * len(known),
        }
        put(self.marks, lines)
        texts: dict[str, list[Any]] = {"x": [], "y": [], "text": [], "align": [], "dx": []}
        for place, name, level in known:
            part = (place - low) / (high - low)
            outwards = "right" if name == MARKS[0] else "left"
            align = "left" if part < 0.25 else "right" if part > 0.7 else outwards
            texts["x"].append(place)
            texts["y"].append(level)
            texts["text"].append(f"{name}: {format_value(place, found.readout)}")
            texts["align"].append(align)
            texts["dx"].append(5 if align == "left" else -5)
        put(self.texts, texts)

    def restyle(self, palette: Palette) -> None:
        """Take the colours of another palette."""
        self.palette = palette
        self.bar.glyph.update(fill_color=palette.accent, line_color=palette.accent)
        self.band.update(fill_color=palette.ok, line_color=palette.ok)
        self.mark.glyph.line_color = palette.soft
        self.nominal.line_color = palette.ink
        self.text.glyph.update(text_color=palette.ink, background_fill_color=palette.card)
