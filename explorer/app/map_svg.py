"""The map of two dials as a drawing for paper, with a legend below it."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

import numpy as np

from explorer.app.window_drawing import Drawing
from explorer.report.markup import Markup, element
from explorer.report.svg import COLOURS
from explorer.report.svg_parts import (
    EDGE,
    HEIGHT,
    LETTER,
    LINE,
    TOP,
    WIDTH,
    Frame,
    axis_title,
    box,
    dial_axis,
    drawing,
    hatch,
    label,
    rule,
    ticks,
)
from explorer.scenario.words import compact, plain
from explorer.studies.window_picture import Place, Region, WindowPicture, percent_text

HATCHES = (
    "M0 6L6 0", "M0 0L6 6", "M0 3H6", "M2 3h1.6", "M3 0V6", "M0 3H6M3 0V6", "M0 0L6 6M0 6L6 0",
    "M1 3a2 2 0 1 0 4 0a2 2 0 1 0 -4 0",
)  # fmt: skip
"""What fills the region of the n-th target, so that it reads in grey print."""

LONGEST_LINE = 58
"""Letters of a line of the legend."""

NO_ANSWER = "#6b777b"


def map_height(drawn: Drawing) -> float:
    """Height of the drawing with its legend."""
    return HEIGHT + 12 + LINE * 1.25 * len(_legend(drawn))


def map_plot(drawn: Drawing, here: Place) -> Markup:
    """A map as an ``svg`` element. here: both dials at the operating point."""
    picture = drawn.picture
    rows = ticks((float(picture.y[0]), float(picture.y[-1])), 5)
    left = 24 + LETTER * max(len(text) for _, text in rows)
    ends = [(float(side[0]), float(side[-1])) for side in (picture.x, picture.y)]
    frame = Frame(*ends, left, WIDTH - EDGE)
    area = element("rect", **box(frame.left, TOP, frame.right, frame.bottom))
    return drawing(
        picture.words,
        element("defs", _patterns(drawn), element("clipPath", area, id="map-area")),
        element("g", _regions(drawn, frame), _lines(drawn, frame), clip_path="url(#map-area)"),
        _axes(picture, frame, rows),
        _texts(drawn, frame),
        _point(frame, here),
        _named(drawn),
        height=map_height(drawn),
    )


def _look(region: Region) -> tuple[str, str]:
    """Colour and pattern of a region."""
    if region.target is None:
        return NO_ANSWER, "map-lost"
    place = region.target
    return COLOURS[place % len(COLOURS)], f"map-{place % len(HATCHES)}"


def _patterns(drawn: Drawing) -> Iterator[Markup]:
    used = {_look(region)[1]: region for region, *_ in drawn.outlines}
    for name, region in used.items():
        path = HATCHES[3] if region.target is None else HATCHES[region.target % len(HATCHES)]
        yield hatch(name, path, _look(region)[0])


def _regions(drawn: Drawing, frame: Frame) -> Iterator[Markup]:
    for region, xs, ys in drawn.outlines:
        colour, pattern = _look(region)
        rings = (
            _path(x, y, frame) + "Z" for part in zip(xs, ys, strict=True) for x, y in zip(*part, strict=True)
        )
        outline = "".join(rings)
        yield element("path", class_="region", d=outline, fill=colour, fill_rule="evenodd")
        yield element("path", d=outline, fill=f"url(#{pattern})", fill_rule="evenodd", fill_opacity="0.7")


def _lines(drawn: Drawing, frame: Frame) -> Iterator[Markup]:
    for x, y in zip(*drawn.contours, strict=True):
        yield element("path", class_="contour", d=_path(x, y, frame))
    for line in drawn.picture.border:
        yield element("path", class_="border", d=_path(line[..., 0].ravel(), line[..., 1].ravel(), frame))


def _path(x: Sequence[Any] | np.ndarray, y: Sequence[Any] | np.ndarray, frame: Frame) -> str:
    """A path through places of the map; nan lifts the pen."""
    words, drawing_on = [], False
    for a, b in zip(np.asarray(x, float), np.asarray(y, float), strict=True):
        known = bool(np.isfinite(a) and np.isfinite(b))
        if known:
            words.append(f"{'L' if drawing_on else 'M'}{frame.across(a):.1f} {frame.up(b):.1f}")
        drawing_on = known
    return "".join(words)


def _axes(picture: WindowPicture, frame: Frame, rows: Sequence[tuple[float, str]]) -> Iterator[Markup]:
    for value, text in rows:
        yield rule(frame.left - 3, frame.up(value), frame.left, frame.up(value), "axis")
        yield label(text, frame.left - 5, frame.up(value) + 3.5, "end")
    yield rule(frame.left, TOP, frame.left, frame.bottom, "axis")
    middle = (TOP + frame.bottom) / 2
    turned = f"translate(11 {middle:.1f}) rotate(-90)"
    yield element("text", axis_title(picture.up), text_anchor="middle", transform=turned)
    yield from dial_axis(axis_title(picture.across), frame)


def _texts(drawn: Drawing, frame: Frame) -> Iterator[Markup]:
    """Values of contours, and the names of regions where there is room."""
    for text, (x, y) in drawn.labels:
        yield label(text, frame.across(x), frame.up(y) + 3.5, "middle", "said")
    regions = [region for region, *_ in drawn.outlines]
    for region in [*regions, *([drawn.picture.met] if drawn.found.targets else [])]:
        if region.place is None:
            continue
        lines = region.text.split("\n")
        for number, words in enumerate(lines):
            y = frame.up(region.place[1]) + 3.5 + LINE * (number - (len(lines) - 1) / 2)
            yield label(words, frame.across(region.place[0]), y, "middle", "said strong")


def _point(frame: Frame, here: Place) -> Iterator[Markup]:
    x, y = here
    if frame.x[0] <= x <= frame.x[1] and frame.y[0] <= y <= frame.y[1]:
        yield rule(frame.across(x), TOP, frame.across(x), frame.bottom, "here")
        yield rule(frame.left, frame.up(y), frame.right, frame.up(y), "here")
        ring = {"cx": f"{frame.across(x):.1f}", "cy": f"{frame.up(y):.1f}"}
        yield element("circle", class_="ring", r=4, stroke="#1c2b30", **ring)


def _legend(drawn: Drawing) -> list[tuple[Region | None, str]]:
    """Every region with its part of the map; the part that meets all targets comes first."""
    picture = drawn.picture
    rows: list[tuple[Region | None, str]] = []
    if drawn.found.targets:
        part = percent_text(picture.met.part)
        rows.append((None, f"{picture.met.label}: {part}, within the green line"))
    for region, *_ in drawn.outlines:
        how = "" if region.target is None else "first missed: "
        rows.append((region, f"{how}{region.label}: {percent_text(region.part)}"))
    unit = f", {picture.quantity.unit}" if picture.quantity.unit else ""
    return [*rows, (None, f"grey lines: {compact(picture.quantity.label)}{unit}; ring: as it stands")]


def _named(drawn: Drawing) -> Iterator[Markup]:
    y = HEIGHT + 12
    for region, words in _legend(drawn):
        if region is not None:
            colour, pattern = _look(region)
            corners = box(EDGE, y - 8, EDGE + 16, y + 1)
            yield element("rect", class_="region", fill=colour, **corners)
            yield element("rect", fill=f"url(#{pattern})", stroke=colour, stroke_width="0.6", **corners)
        yield label(plain(words, LONGEST_LINE), EDGE + 22, y, "start")
        y += LINE * 1.25
