"""Pictures as inline SVG: every curve with a dash and a label of its own, so that it reads in grey print."""

from collections.abc import Iterator, Sequence
from dataclasses import replace

import numpy as np

from explorer.report.markup import Markup, element, joined
from explorer.report.svg_parts import (
    EDGE,
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
from explorer.studies.axes import outward
from explorer.studies.pictures import Axis, Layer, Line, Mark, Picture
from explorer.studies.titration_pictures import Name

COLOURS = ("#0b6e69", "#b84f00", "#6a3f95", "#0062a0", "#a8497d", "#7a5900", "#3a3f44", "#6b5d4f")
"""Apart for colour-blind readers in this order; each line has a dash and a label of its own as well."""

DASHES = (None, "7 3", "2 2.5", "9 3 2 3", "12 3", "5 2 1 2 1 2", "3.5 2", "1 4")


def plot(picture: Picture, along: Axis, here: float | None, name: str, names: Sequence[Name] = ()) -> Markup:
    """A picture as an ``svg`` element.

    here: the dial at the operating point. name: its own on the page, for what its parts refer to. names:
    places of the names of curves on the curves; without them the names stand at the right ends.
    """
    picture = _with_room(picture)
    frame = _frame(picture, not names)
    if not picture.lines:
        middle = (frame.left + frame.right) / 2
        content = joined(label(picture.empty or "no solution", middle, (TOP + frame.bottom) / 2, "middle"))
    else:
        content = joined(
            _curves(picture, frame, name),
            _bounds(picture, frame),
            _marks(picture.marks, frame),
            _here(picture, along, frame, here),
            _names(picture, names, frame) if names else _end_labels(picture, frame),
        )
    return drawing(
        picture.words or picture.title,
        _definitions(frame, name),
        _target(picture, frame),
        _axes(along, frame),
        _gaps(picture, frame, name),
        content,
    )


def _with_room(picture: Picture) -> Picture:
    """The picture with an axis that holds the fan and the measured points as well."""
    extra = [end for layer in picture.fan for end in (layer.low, layer.high)]
    values = np.concatenate([np.array(picture.limits), *extra, *(dots.y for dots in picture.dots)])
    low, high = float(np.nanmin(values)), float(np.nanmax(values))
    return picture if (low, high) == picture.limits else replace(picture, limits=outward(low, high))


def _frame(picture: Picture, named: bool) -> Frame:
    labels = [text for _, text in ticks(picture.limits, 4)]
    left = 10 + LETTER * max(map(len, labels))
    names = [len(line.name) for line in (*picture.lines, *picture.others)] if named else []
    right = WIDTH - EDGE - LETTER * max(names, default=0)
    return Frame((float(picture.x[0]), float(picture.x[-1])), picture.limits, left, right)


def _definitions(frame: Frame, name: str) -> Markup:
    area = element("rect", **box(frame.left, TOP, frame.right, frame.bottom))
    return element("defs", hatch(f"{name}-gap", "M0 6L6 0"), element("clipPath", area, id=f"{name}-area"))


def _target(picture: Picture, frame: Frame) -> Iterator[Markup]:
    if picture.band is None:
        return
    low, high = frame.y
    ends = [end if bound is None else bound for bound, end in zip(picture.band, frame.y, strict=True)]
    top, bottom = frame.up(min(ends[1], high)), frame.up(max(ends[0], low))
    if top < bottom:
        yield element("rect", class_="target", **box(frame.left, top, frame.right, bottom))


def _bounds(picture: Picture, frame: Frame) -> Iterator[Markup]:
    """Edges of the target, above the fan so that they stay visible."""
    low, high = frame.y
    for bound in picture.band or ():
        if bound is not None and low <= bound <= high:
            yield rule(frame.left, frame.up(bound), frame.right, frame.up(bound), "bound")


def _axes(along: Axis, frame: Frame) -> Iterator[Markup]:
    for value, text in ticks(frame.y, 4):
        y = frame.up(value)
        yield rule(frame.left, y, frame.right, y, "grid")
        yield label(text, frame.left - 5, y + 3.5, "end")
    yield from dial_axis(axis_title(along), frame)


def _gaps(picture: Picture, frame: Frame, name: str) -> Iterator[Markup]:
    for start, stop, reason in picture.gaps:
        left, right = frame.across(start), max(frame.across(stop), frame.across(start) + 1)
        title = element("title", f"No result: {reason}")
        yield element(
            "g", title,
            element("rect", fill=f"url(#{name}-gap)", **box(left, TOP, right, frame.bottom)),
        )  # fmt: skip


def _curves(picture: Picture, frame: Frame, name: str) -> Markup:
    parts = [_area(picture.x, layer, frame) for layer in picture.fan]
    for look, lines in (("option", picture.others), ("curve", picture.lines)):
        for number, line in enumerate(lines):
            path = _path(picture.x, line.y, frame)
            parts.append(element("path", class_=look, d=path, **_look(number, line)))
    for dots in picture.dots:
        for x, y in zip(dots.x, dots.y, strict=True):
            if frame.x[0] <= x <= frame.x[1]:
                cross = f"M{frame.across(x) - 3:.1f} {frame.up(y) - 3:.1f}l6 6m-6 0l6 -6"
                parts.append(element("path", class_="measured", d=cross))
    return element("g", parts, clip_path=f"url(#{name}-area)")


def _area(x: np.ndarray, layer: Layer, frame: Frame) -> Markup:
    known = np.isfinite(layer.low) & np.isfinite(layer.high)
    x, low, high = x[known], layer.low[known], layer.high[known]
    around = [*zip(x, high, strict=True), *zip(x[::-1], low[::-1], strict=True)]
    corners = " ".join(f"{frame.across(a):.1f},{frame.up(b):.1f}" for a, b in around)
    return element("polygon", class_="fan", points=corners)


def _path(x: np.ndarray, y: np.ndarray, frame: Frame) -> str:
    """A path that leaves out what is not solved; a single point is a dot."""
    words, drawing = [], False
    for a, b in zip(x, y, strict=True):
        if np.isfinite(b):
            words.append(f"{'L' if drawing else 'M'}{frame.across(a):.1f} {frame.up(b):.1f}")
            words += [] if drawing else ["h0"]
        drawing = bool(np.isfinite(b))
    return "".join(words)


def _look(number: int, line: Line) -> dict[str, str | None]:
    dash = number if line.dash is None else line.dash
    return {"stroke": _colour(number, line), "stroke_dasharray": DASHES[dash % len(DASHES)]}


def _colour(number: int, line: Line) -> str:
    return COLOURS[(number if line.colour is None else line.colour) % len(COLOURS)]


def _marks(marks: Sequence[Mark], frame: Frame) -> Iterator[Markup]:
    """Where bounds are crossed, with the value of the dial outside of the target."""
    for mark in marks:
        x, y = frame.across(mark.x), frame.up(mark.y)
        yield element("path", class_="mark", d=f"M{x:.1f} {y - 4:.1f}l4 4l-4 4l-4 -4z")
        yield label(
            mark.text, _inside(x, mark.text, frame), y - 7 if mark.upper else y + 15, "middle", "said"
        )


def _inside(x: float, text: str, frame: Frame) -> float:
    """A place for the middle of a text that keeps it within the plot."""
    half = 0.62 * LETTER * len(text)
    return float(np.clip(x, frame.left + half, max(frame.left + half, WIDTH - half)))


def _here(picture: Picture, along: Axis, frame: Frame, here: float | None) -> Iterator[Markup]:
    """The operating point: a line across, a ring on every curve, its value beside a single one."""
    if here is None or not frame.x[0] <= here <= frame.x[1]:
        return
    x = frame.across(here)
    yield rule(x, TOP, x, frame.bottom, "here")
    text = along.at(here)
    yield label(text, _inside(x, text, frame), TOP - 5, "middle", "strong")
    for number, line in enumerate(picture.lines):
        value = float(np.interp(here, picture.x, line.y))
        if np.isfinite(value) and frame.y[0] <= value <= frame.y[1]:
            yield element(
                "circle", class_="ring", cx=f"{x:.1f}", cy=f"{frame.up(value):.1f}", r=3.4,
                stroke=_colour(number, line),
            )  # fmt: skip


def _names(picture: Picture, names: Sequence[Name], frame: Frame) -> Iterator[Markup]:
    """The names of the curves, each over a place of its own."""
    for name in names:
        x, colour = frame.across(name.x), _colour(name.line, picture.lines[name.line])
        at = _inside(x, name.text, frame)
        yield label(name.text, at, frame.up(name.y) - 4, "middle", "said strong", fill=colour)


def _end_labels(picture: Picture, frame: Frame) -> Iterator[Markup]:
    """The names of the curves at their right ends, moved apart where they would meet."""
    ends = []
    for number, line in [*enumerate(picture.lines), *enumerate(picture.others)]:
        known = np.flatnonzero(np.isfinite(line.y))
        if line.name and known.size:
            end = float(np.clip(frame.up(line.y[known[-1]]), TOP, frame.bottom))
            ends.append((end, _colour(number, line), line.name))
    ends.sort()
    places = [end for end, *_ in ends]
    for index in range(1, len(places)):
        places[index] = max(places[index], places[index - 1] + LINE)
    for index in reversed(range(len(places))):
        limit = frame.bottom - 2 if index == len(places) - 1 else places[index + 1] - LINE
        places[index] = min(places[index], limit)
    for place, (end, colour, name) in zip(places, ends, strict=True):
        if abs(place - end) > 2:
            yield element(
                "line", x1=f"{frame.right:.1f}", y1=f"{end:.1f}", x2=f"{frame.right + 4:.1f}",
                y2=f"{place:.1f}", stroke=colour, stroke_width="0.7",
            )  # fmt: skip
        yield label(name, frame.right + 6, place + 3.5, "start", "strong", fill=colour)
