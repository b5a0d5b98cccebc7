"""Linked plots over one swept dial: figures are built once, afterwards only columns and ranges change.

The operating point is one editable span shared by all plots. Curves come as ``multi_line`` rows, so that more
curves never mean more models. Labels that follow the pointer, names at the ends of curves and the rings on
the operating point live in the page (``sweep.js``): moving the pointer costs no message.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from bokeh.events import MouseLeave, MouseMove, Pan, PanEnd, PanStart, Tap
from bokeh.models import CustomJS, Range1d, Span

from explorer.app.line_plot import LinePlot
from explorer.app.look import Palette
from explorer.app.plot_parts import pointer_line, script, ticks
from explorer.app.saving import Plate, picture_plate
from explorer.studies.pictures import Axis, Picture

_SCRIPT = script("numbers.js", "sweep.js")

POINT_WIDTH = 1.6


class LinkedPlots:
    """Several :class:`LinePlot` over one x axis, crosshair and operating point, in reading order.

    The last of two ``columns`` has room for the names of curves; the lowest row carries the axis label.
    ``turned`` is called with the place the operating point was dragged or tapped to, in the dial's unit;
    without it the point is a mark that nobody moves. ``kind``: what the plots are.
    ``named``: every plot has room for the names of curves. ``saved_as``: begins the names of their files.
    """

    def __init__(
        self,
        names: Sequence[str],
        turned: Callable[[float], None] | None = None,
        columns: int = 2,
        kind: type[LinePlot] = LinePlot,
        named: bool = False,
        saved_as: str = "sweep",
    ) -> None:
        self.turned, self.saved_as = turned, saved_as
        self.x_range = Range1d(0, 1)
        self.point = Span(
            name="operating-point",
            dimension="height",
            location=0,
            editable=turned is not None,
            line_width=POINT_WIDTH,
            line_dash=[2, 3],
            level="annotation",
        )
        cross = pointer_line("height", 0.6)
        self.plots = {
            name: kind(
                name, self.x_range, self.point, cross,
                labels_right=named or index % columns == 1, x_label=index >= len(names) - columns,
            )
            for index, name in enumerate(names)
        }  # fmt: skip
        self.scale = 1.0
        self.along: Axis | None = None
        self._lowest = names[-columns:]
        self._quiet = False
        self.point.on_change("location", self._moved)
        self._wire()

    def _wire(self) -> None:
        parts = [
            {
                "lines": plot.lines,
                "others": plot.others,
                "rings": plot.rings,
                "labels": plot.labels,
                "ends": plot.ends,
                "y_range": plot.y_range,
                "axis": plot.figure.xaxis[0],
                "figure": plot.figure,
            }
            for plot in self.plots.values()
        ]
        react = CustomJS(args={"parts": parts, "point": self.point, "x_range": self.x_range}, code=_SCRIPT)
        moving = () if self.turned is None else (Tap, PanStart, Pan, PanEnd)
        for plot in self.plots.values():
            for event in (MouseMove, MouseLeave, *moving):
                plot.figure.js_on_event(event, react)
            plot.lines.js_on_change("data", react)
            plot.others.js_on_change("data", react)
            plot.figure.js_on_change("inner_height", react)
        self.point.js_on_change("location", react)
        self.x_range.js_on_change("end", react)

    def show(self, pictures: dict[str, Picture], along: Axis) -> None:
        """Show all pictures (by plot name); they share ``x``."""
        self.along = along
        x = next(iter(pictures.values())).x
        start, end = float(x[0]), float(x[-1])
        if (self.x_range.start, self.x_range.end) != (start, end):
            self.x_range.update(start=start, end=end)
        for name, picture in pictures.items():
            self.plots[name].show(picture, along)

    def set_axis(self, along: Axis) -> None:
        """Decimals and unit of the places the page prints; short units stand behind every tick, too."""
        unit = along.unit
        if self.point.tags != [along.digits, unit, self.scale]:
            self.point.tags = [along.digits, unit, self.scale]
        after = f" {unit}" if unit in {"%", "°C", "°F"} else ""
        for plot in self.plots.values():
            if plot.figure.xaxis[0].formatter.args["after"] != after:
                plot.figure.xaxis[0].formatter = ticks(after)

    def enlarge(self, scale: float) -> None:
        """Texts and lines so many times their usual size; enlarged plots all carry the axis label."""
        if scale == self.scale:
            return
        self.scale = scale
        self.point.line_width = POINT_WIDTH * scale
        for name, plot in self.plots.items():
            plot.enlarge(scale, name in self._lowest or scale > 1)

    def set_point(self, x: float, step: float) -> None:
        """Move the operating point unless it is there already, to within half a step of the dial."""
        if self.point.location is None or abs(float(self.point.location) - x) > step / 2:
            self._quiet = True
            try:
                self.point.location = x
            finally:
                self._quiet = False

    def plate(self, name: str) -> Plate | None:
        """A plot as it can be saved; None while it shows nothing."""
        plot = self.plots[name]
        if plot.picture is None or self.along is None:
            return None
        here = None if self.point.location is None else float(self.point.location)
        return picture_plate(self.saved_as, plot.picture, self.along, here, plot.written())

    def restyle(self, palette: Palette) -> None:
        """Take the colours of another palette."""
        self.point.line_color = palette.ink
        for plot in self.plots.values():
            plot.restyle(palette)

    def _moved(self, attr: str, old: Any, new: Any) -> None:
        if self.turned is not None and not self._quiet and new is not None:
            self.turned(float(new))
