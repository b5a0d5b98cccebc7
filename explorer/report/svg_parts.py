"""What all drawings are made of: where values lie on the paper, round ticks, rules, texts, hatches."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from explorer.report.markup import Markup, Part, element
from explorer.scenario.words import number_text, plain
from explorer.studies.axes import Limits, nice_step
from explorer.studies.pictures import Axis

WIDTH, HEIGHT = 372.0, 236.0
TOP, BOTTOM, EDGE = 16.0, 36.0, 14.0
"""Room above and below the axes, and beside them where no labels stand."""

LETTER, LINE = 5.7, 11.5
"""Usual width of a letter and height of a line of the 10.5 px type."""

LONGEST = 44
"""Letters of the name of the dial below the axis."""


@dataclass(frozen=True)
class Frame:
    """Where values lie on the paper."""

    x: Limits
    y: Limits
    left: float
    right: float

    @property
    def bottom(self) -> float:
        return HEIGHT - BOTTOM

    def across(self, value: float) -> float:
        """Place of a value along the dial."""
        part = (value - self.x[0]) / (self.x[1] - self.x[0])
        return self.left + part * (self.right - self.left)

    def up(self, value: float) -> float:
        """Place of a value of the readout."""
        part = (value - self.y[0]) / (self.y[1] - self.y[0])
        return self.bottom - part * (self.bottom - TOP)


def drawing(words: str, *parts: Part, height: float = HEIGHT) -> Markup:
    """An ``svg`` element of the usual width. ``words``: what it shows, for screen readers."""
    box = f"0 0 {WIDTH:g} {height:g}"
    return element("svg", *parts, viewBox=box, role="img", aria_label=words)


def ticks(limits: Limits, intervals: int) -> list[tuple[float, str]]:
    """Round values within the limits, as printed."""
    low, high = limits
    step = nice_step(high - low, intervals)
    digits = max(0, -int(np.floor(np.log10(step) + 1e-9)))
    digits += not np.isclose(step * 10**digits, round(step * 10**digits))
    first, last = int(np.ceil(low / step - 1e-9)), int(np.floor(high / step + 1e-9))
    return [(count * step, number_text(count * step, digits)) for count in range(first, last + 1)]


def axis_title(along: Axis) -> str:
    """Name and unit of an axis."""
    return plain(along.name, LONGEST) + (f", {along.unit}" if along.unit else "")


def dial_axis(title: str, frame: Frame) -> Iterator[Markup]:
    """The axis at the foot of a drawing."""
    for value, text in ticks(frame.x, 5):
        yield rule(frame.across(value), frame.bottom, frame.across(value), frame.bottom + 3, "axis")
        yield label(text, frame.across(value), frame.bottom + 14, "middle")
    yield rule(frame.left, frame.bottom, frame.right, frame.bottom, "axis")
    yield label(title, (frame.left + frame.right) / 2, HEIGHT - 7, "middle")


def box(left: float, top: float, right: float, bottom: float) -> dict[str, str]:
    """Attributes of a ``rect``."""
    parts = {"x": left, "y": top, "width": right - left, "height": bottom - top}
    return {key: f"{value:.1f}" for key, value in parts.items()}


def rule(x1: float, y1: float, x2: float, y2: float, look: str) -> Markup:
    """A straight line."""
    ends = {"x1": x1, "y1": y1, "x2": x2, "y2": y2}
    return element("line", class_=look, **{key: f"{value:.1f}" for key, value in ends.items()})


def label(
    words: str, x: float, y: float, anchor: str, look: str | None = None, fill: str | None = None
) -> Markup:
    """A text; ``anchor``: which part of it stands at ``x``."""
    return element(
        "text", words, class_=look, x=f"{x:.1f}", y=f"{y:.1f}", text_anchor=anchor,
        style=f"fill:{fill}" if fill else None,
    )  # fmt: skip


def hatch(name: str, path: str, colour: str = "#8d999c") -> Markup:
    """A pattern 6 wide and high that repeats ``path``; ``name``: its own on the page."""
    stroke = element("path", d=path, stroke=colour, stroke_width="0.8", fill="none")
    return element("pattern", stroke, id=name, width=6, height=6, patternUnits="userSpaceOnUse")
