"""Pictures as inline SVG: every curve with a dash and a label of its own, so that it reads in grey print."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np

from explorer.report.markup import Markup, element, joined
from explorer.scenario.words import number_text, plain
from explorer.studies.axes import Limits, nice_step, outward
from explorer.studies.pictures import Axis, Layer, Line, Mark, Picture

WIDTH, HEIGHT = 372.0, 236.0
TOP, BOTTOM, EDGE = 16.0, 36.0, 14.0
"""Room above and below the axes, and beside them where no labels stand."""

LETTER, LINE = 5.7, 11.5
"""Usual width of a letter and height of a line of the 10.5 px type."""

LONGEST = 44
"""Letters of the name of the dial below the axis."""

COLOURS = ("#0b6e69", "#b84f00", "#6a3f95", "#0062a0", "#a8497d", "#7a5900", "#3a3f44", "#6b5d4f")
"""Apart for colour-blind readers in this order; each line has a dash and a label of its own as well."""

DASHES = (None, "7 3", "2 2.5", "9 3 2 3", "12 3", "5 2 1 2 1 2", "3.5 2", "1 4")


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


def plot(picture: Picture, along: Axis, here: float | None, name: str) -> Markup:
    """A picture as an ``svg`` element. ``here``: the dial at the operating point. ``name``: its own on the
    page, for what its parts refer to."""
    picture = _with_room(picture)
    frame = _frame(picture)
    if not picture.lines:
        middle = (frame.left + frame.right) / 2
        content = joined(_text(picture.empty or "no solution", middle, (TOP + frame.bottom) / 2, "middle"))
    else:
        content = joined(
            _curves(picture, frame, name),
            _bounds(picture, frame),
            _marks(picture.marks, frame),
            _here(picture, along, frame, here),
            _end_labels(picture, frame),
        )
    return element(
        "svg",
        _definitions(frame, name),
        _target(picture, frame),
        _axes(picture, along, frame),
        _gaps(picture, frame, name),
        content,
        viewBox=f"0 0 {WIDTH:g} {HEIGHT:g}", role="img", aria_label=picture.words or picture.title,
    )  # fmt: skip


def _with_room(picture: Picture) -> Picture:
    """The picture with an axis that holds the fan and the measured points as well."""
    extra = [end for layer in picture.fan for end in (layer.low, layer.high)]
    values = np.concatenate([np.array(picture.limits), *extra, *(dots.y for dots in picture.dots)])
    low, high = float(np.nanmin(values)), float(np.nanmax(values))
    return picture if (low, high) == picture.limits else replace(picture, limits=outward(low, high))


def _frame(picture: Picture) -> Frame:
    labels = [text for _, text in _ticks(picture.limits, 4)]
    left = 10 + LETTER * max(map(len, labels))
    names = [len(line.name) for line in (*picture.lines, *picture.others)]
    right = WIDTH - EDGE - LETTER * max(names, default=0)
    return Frame((float(picture.x[0]), float(picture.x[-1])), picture.limits, left, right)


def _ticks(limits: Limits, intervals: int) -> list[tuple[float, str]]:
    """Round values within the limits, as printed."""
    low, high = limits
    step = nice_step(high - low, intervals)
    digits = max(0, -int(np.floor(np.log10(step) + 1e-9)))
    digits += not np.isclose(step * 10**digits, round(step * 10**digits))
    first, last = int(np.ceil(low / step - 1e-9)), int(np.floor(high / step + 1e-9))
    return [(count * step, number_text(count * step, digits)) for count in range(first, last + 1)]


def _definitions(frame: Frame, name: str) -> Markup:
    stroke = element("path", d="M0 6L6 0", stroke="#8d999c", stroke_width="0.8")
    hatch = element("pattern", stroke, id=f"{name}-gap", width=6, height=6, patternUnits="userSpaceOnUse")
    area = element("rect", **_box(frame.left, TOP, frame.right, frame.bottom))
    return element("defs", hatch, element("clipPath", area, id=f"{name}-area"))


def _box(left: float, top: float, right: float, bottom: float) -> dict[str, str]:
    parts = {"x": left, "y": top, "width": right - left, "height": bottom - top}
    return {key: f"{value:.1f}" for key, value in parts.items()}


def _target(picture: Picture, frame: Frame) -> Iterator[Markup]:
    if picture.band is None:
        return
    low, high = frame.y
    ends = [end if bound is None else bound for bound, end in zip(picture.band, frame.y, strict=True)]
    top, bottom = frame.up(min(ends[1], high)), frame.up(max(ends[0], low))
    if top < bottom:
        yield element("rect", class_="target", **_box(frame.left, top, frame.right, bottom))


def _bounds(picture: Picture, frame: Frame) -> Iterator[Markup]:
    """Edges of the target, above the fan so that they stay visible."""
    low, high = frame.y
    for bound in picture.band or ():
        if bound is not None and low <= bound <= high:
            yield _rule(frame.left, frame.up(bound), frame.right, frame.up(bound), "bound")


def _axes(picture: Picture, along: Axis, frame: Frame) -> Iterator[Markup]:
    for value, text in _ticks(frame.y, 4):
        y = frame.up(value)
        yield _rule(frame.left, y, frame.right, y, "grid")
        yield _text(text, frame.left - 5, y + 3.5, "end")
    for value, text in _ticks(frame.x, 5):
        yield _rule(frame.across(value), frame.bottom, frame.across(value), frame.bottom + 3, "axis")
        yield _text(text, frame.across(value), frame.bottom + 14, "middle")
    yield _rule(frame.left, frame.bottom, frame.right, frame.bottom, "axis")
    label = plain(along.name, LONGEST) + (f", {along.unit}" if along.unit else "")
    yield _text(label, (frame.left + frame.right) / 2, HEIGHT - 7, "middle")


def _gaps(picture: Picture, frame: Frame, name: str) -> Iterator[Markup]:
    for start, stop, reason in picture.gaps:
        left, right = frame.across(start), max(frame.across(stop), frame.across(start) + 1)
        title = element("title", f"No result: {reason}")
        yield element(
            "g", title,
            element("rect", fill=f"url(#{name}-gap)", **_box(left, TOP, right, frame.bottom)),
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
        yield _text(
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
    yield _rule(x, TOP, x, frame.bottom, "here")
    text = along.at(here)
    yield _text(text, _inside(x, text, frame), TOP - 5, "middle", "strong")
    for number, line in enumerate(picture.lines):
        value = float(np.interp(here, picture.x, line.y))
        if np.isfinite(value) and frame.y[0] <= value <= frame.y[1]:
            yield element(
                "circle", class_="ring", cx=f"{x:.1f}", cy=f"{frame.up(value):.1f}", r=3.4,
                stroke=_colour(number, line),
            )  # fmt: skip


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
        yield _text(name, frame.right + 6, place + 3.5, "start", "strong", fill=colour)


def _rule(x1: float, y1: float, x2: float, y2: float, look: str) -> Markup:
    ends = {"x1": x1, "y1": y1, "x2": x2, "y2": y2}
    return element("line", class_=look, **{key: f"{value:.1f}" for key, value in ends.items()})


def _text(
    words: str, x: float, y: float, anchor: str, look: str | None = None, fill: str | None = None
) -> Markup:
    return element(
        "text", words, class_=look, x=f"{x:.1f}", y=f"{y:.1f}", text_anchor=anchor,
        style=f"fill:{fill}" if fill else None,
    )  # fmt: skip
