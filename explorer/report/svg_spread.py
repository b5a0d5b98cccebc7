"""The distribution of a readout as a drawing: bars, entered target, value with nothing off, percentiles."""

from collections.abc import Iterator

import numpy as np

from explorer.report.markup import Markup, element
from explorer.report.svg_parts import EDGE, TOP, WIDTH, Frame, box, dial_axis, drawing, label, rule
from explorer.scenario.readouts import format_value
from explorer.scenario.words import compact, unit_text
from explorer.studies.spread_pictures import Distribution

MARKS = ("2.5 %", "median", "97.5 %")
LEVELS = (0.80, 0.93, 0.80)
"""Heights of the percentiles with their texts, in parts of the drawing."""

ROOM = 1.45
"""Height of the drawing in bars of the greatest height: the figures stand above the bars."""


def distribution_plot(found: Distribution) -> Markup:
    """A distribution as an ``svg`` element."""
    most = float(found.parts.max()) if found.parts.size else 0.0
    frame = Frame(found.limits, (0.0, ROOM * (most or 1.0)), EDGE, WIDTH - EDGE)
    unit, name = unit_text(found.readout.unit), compact(found.readout.label)
    return drawing(
        found.words,
        _target(found, frame),
        _bars(found, frame),
        _percentiles(found, frame),
        _nominal(found, frame),
        list(dial_axis(f"{name}, {unit}" if unit else name, frame)),
    )


def _target(found: Distribution, frame: Frame) -> Iterator[Markup]:
    if found.band is None:
        return
    ends = [end if bound is None else bound for bound, end in zip(found.band, frame.x, strict=True)]
    left, right = (frame.across(float(np.clip(end, *frame.x))) for end in ends)
    if left < right:
        yield element("rect", class_="target", **box(left, TOP, right, frame.bottom))
    for bound in found.band:
        if bound is not None and frame.x[0] <= bound <= frame.x[1]:
            yield rule(frame.across(bound), TOP, frame.across(bound), frame.bottom, "bound")


def _bars(found: Distribution, frame: Frame) -> Iterator[Markup]:
    for left, right, part in zip(found.edges, found.edges[1:], found.parts, strict=False):
        corners = box(frame.across(left), frame.up(part), frame.across(right), frame.bottom)
        yield element("rect", class_="bar", **corners)


def _nominal(found: Distribution, frame: Frame) -> Iterator[Markup]:
    if np.isfinite(found.nominal):
        x = frame.across(found.nominal)
        yield rule(x, TOP + 14, x, frame.bottom, "nominal")


def _percentiles(found: Distribution, frame: Frame) -> Iterator[Markup]:
    """Percentiles with their values, one above the other so that they never cover each other."""
    for place, name, level in zip(found.marks, MARKS, LEVELS, strict=True):
        if np.isfinite(place):
            x, y = frame.across(place), frame.up(level * frame.y[1])
            yield rule(x, y, x, frame.bottom, "percentile")
            part = (place - frame.x[0]) / (frame.x[1] - frame.x[0])
            outwards = "end" if name == MARKS[0] else "start"
            side = "start" if part < 0.25 else "end" if part > 0.7 else outwards
            shift = 4 if side == "start" else -4
            yield label(f"{name}: {format_value(place, found.readout)}", x + shift, y + 4, side, "said")
