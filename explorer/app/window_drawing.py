"""The map of two dials as outlines, lines and places of labels: what takes time, before it is drawn."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from bokeh.plotting.contour import contour_data

from explorer.scenario.words import number_text
from explorer.studies.window import Window
from explorer.studies.window_picture import (
    LINE,
    USUAL_HEIGHT,
    USUAL_WIDTH,
    Place,
    Region,
    WindowPicture,
    text_size,
    window_picture,
)

_TRIED = (0.5, 0.35, 0.65, 0.22, 0.78, 0.1, 0.9)
"""Parts of the way along a contour where its label is put, the first that is free."""


@dataclass(frozen=True)
class Drawing:
    """A map ready to be drawn: everything that takes time has been done.

    ``outlines``: polygons of each region, that without an answer last. ``contours``: lines by value, and
    ``labels``: their texts and places.
    """

    found: Window
    picture: WindowPicture
    outlines: tuple[tuple[Region, list[Any], list[Any]], ...]
    contours: tuple[list[np.ndarray], list[np.ndarray]]
    labels: tuple[tuple[str, Place], ...]


def drawing(found: Window, readout: str) -> Drawing:
    """Everything of a map with the contours of a readout; for a thread that may take its time."""
    picture = window_picture(found, readout)
    regions = [*picture.regions, *([picture.unknown] if picture.unknown else [])]
    outlines = tuple((region, *_outline(picture, region)) for region in regions)
    xs, ys, labels = _contours(picture)
    return Drawing(found, picture, outlines, (xs, ys), labels)


def _outline(picture: WindowPicture, region: Region) -> tuple[list[Any], list[Any]]:
    """Polygons with holes around where the field of a region is positive."""
    # Where there is no answer, the neighbours of such a point belong to it as well.
    low = -0.999 if region is picture.unknown else 0.0
    levels = [low, float(np.nanmax(region.field)) + 1.0]
    drawn = contour_data(
        picture.x, picture.y, np.ma.masked_invalid(region.field), levels, want_line=False
    ).fill_data
    return drawn.xs[0], drawn.ys[0]


def _contours(
    picture: WindowPicture,
) -> tuple[list[np.ndarray], list[np.ndarray], tuple[tuple[str, Place], ...]]:
    if not picture.contours.size:
        return [], [], ()
    values = np.ma.masked_invalid(picture.values)
    lines = contour_data(picture.x, picture.y, values, picture.contours, want_fill=False).line_data
    step = np.diff(picture.contours).min() if picture.contours.size > 1 else abs(picture.contours[0]) or 1.0
    digits = max(0, int(np.ceil(-np.log10(step) - 1e-9)))
    taken = [
        _box(picture, region.place, region.text)
        for region in (*picture.regions, picture.met, picture.unknown)
        if region is not None and region.place is not None
    ]
    labels = []
    for level, xs, ys in zip(picture.contours, lines.xs, lines.ys, strict=True):
        text = number_text(float(level), digits, picture.quantity.signed)
        for place in _along(picture, xs, ys):
            box = _box(picture, place, text)
            if not any(_overlap(box, other) for other in taken):
                labels.append((text, place))
                taken.append(box)
                break
    return lines.xs, lines.ys, tuple(labels)


def _pixels(picture: WindowPicture, x: np.ndarray, y: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    across, up = picture.x[-1] - picture.x[0], picture.y[-1] - picture.y[0]
    return (x - picture.x[0]) / across * USUAL_WIDTH, (y - picture.y[0]) / up * USUAL_HEIGHT


def _along(picture: WindowPicture, xs: np.ndarray, ys: np.ndarray) -> Sequence[Place]:
    """Places for the label of a contour, on its longest piece and off the edges of the map."""
    ends = np.flatnonzero(np.isnan(xs))
    pieces = [piece[np.isfinite(xs[piece])] for piece in np.split(np.arange(xs.size), ends)]
    longest, best = None, 0.0
    for piece in pieces:
        if piece.size > 1:
            steps = np.hypot(*(np.diff(side) for side in _pixels(picture, xs[piece], ys[piece])))
            if steps.sum() > best:
                best, longest = float(steps.sum()), (piece, np.append(0.0, np.cumsum(steps)) / steps.sum())
    if longest is None or best < 40:
        return []
    piece, way = longest
    places = [
        (float(np.interp(part, way, xs[piece])), float(np.interp(part, way, ys[piece]))) for part in _TRIED
    ]
    return [place for place in places if _inside(_pixels(picture, *place))]


def _inside(pixels: tuple[Any, Any]) -> bool:
    return 20 < pixels[0] < USUAL_WIDTH - 20 and LINE / 2 < pixels[1] < USUAL_HEIGHT - LINE / 2


def _box(picture: WindowPicture, place: Place, text: str) -> tuple[float, float, float, float]:
    x, y = _pixels(picture, *place)
    width, height = text_size(text)
    return float(x) - width / 2, float(x) + width / 2, float(y) - height / 2, float(y) + height / 2


def _overlap(one: tuple[float, ...], other: tuple[float, ...]) -> bool:
    return one[0] < other[1] and other[0] < one[1] and one[2] < other[3] and other[2] < one[3]
