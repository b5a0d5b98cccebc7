"""What the map of two dials shows, as plain data: regions by the target they miss first, contours, words."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from explorer.scenario.model import Target
from explorer.scenario.readouts import READOUTS
from explorer.scenario.words import brief_label, in_sentence, plain, short_number, unit_text
from explorer.studies.axes import nice_step
from explorer.studies.pictures import Axis, Quantity, axis
from explorer.studies.sweep_pictures import quantity_of
from explorer.studies.window import MET, NO_ANSWER, Window

CONTOURS = 7
"""Intervals between contours, about."""

USUAL_WIDTH, USUAL_HEIGHT = 570, 270
"""Pixels for which labels are placed; on a larger map they have room to spare."""

LETTER, LINE, AROUND = 7.0, 16.0, 8.0
"""Pixels of a letter, of a line, and of what is around a text, on the average."""

ALL_MET, NO_RESULT = "all targets met", "no result"

Place = tuple[float, float]


@dataclass(frozen=True)
class Region:
    """Part of the map where ``target`` (its position) is the first that is missed, ``above`` its band or
    below; where all targets are met it has none.

    ``part``: its part of the map, 0 to 1. ``place``: where there is room for its label, None for nowhere;
    ``text`` is the label there, in two lines where that fits better.
    ``field``: (rows, columns), positive inside and falling to zero at the edge, nan where there is no answer;
    None where all targets are met, which is what the other regions leave.
    """

    label: str
    part: float
    place: Place | None
    text: str
    field: np.ndarray | None = None
    target: int | None = None
    above: bool = False


@dataclass(frozen=True)
class WindowPicture:
    """Everything the map shows.

    ``regions``: missed targets in their order, below before above. ``met``: where all targets are met.
    ``unknown``: where there is no answer, None for nowhere; ``reasons`` says why. ``contours``: values of the
    readout ``quantity`` (``values``, rows of y) at which its contours run.
    """

    across: Axis
    up: Axis
    x: np.ndarray
    y: np.ndarray
    regions: tuple[Region, ...]
    met: Region
    unknown: Region | None
    reasons: tuple[str, ...]
    quantity: Quantity
    values: np.ndarray
    contours: np.ndarray
    border: np.ndarray
    words: str
    final: bool


def window_picture(found: Window, readout: str) -> WindowPicture:
    """The map with the contours of a readout, which has to be among those of the window."""
    x, y = found.x.values, found.y.values
    across, up = (
        axis(plain(side.dial.label, 60), unit_text(side.dial.unit), side.values)
        for side in (found.x, found.y)
    )
    values = found.readouts[readout]
    regions = tuple(_regions(found))
    met = Region(ALL_MET, found.part_met, *_place(found.missed == MET, ALL_MET, x, y))
    lost = found.missed == NO_ANSWER
    unknown = None
    if lost.any():
        field = np.where(lost, 1.0, -1.0)
        unknown = Region(NO_RESULT, float(lost.mean()), *_place(lost, NO_RESULT, x, y), field)
    quantity = quantity_of(READOUTS[readout])
    words = _words(found, across, up, quantity, regions, met, unknown)
    reasons = tuple(dict.fromkeys(found.reasons[lost].tolist()))
    return WindowPicture(
        across, up, x, y, regions, met, unknown, reasons, quantity, values, contour_values(values),
        found.border, words, found.final,
    )  # fmt: skip


def contour_values(values: np.ndarray) -> np.ndarray:
    """Round values within those of a map at which contours run; none where it is flat."""
    finite = values[np.isfinite(values)]
    if not finite.size:
        return np.array([])
    low, high = float(finite.min()), float(finite.max())
    if high - low <= 1e-9 * max(abs(low), abs(high), 1e-9):
        return np.array([])
    step = nice_step(high - low, CONTOURS)
    levels = step * np.arange(np.ceil(low / step), np.floor(high / step) + 1)
    return levels[(levels > low) & (levels < high)]


def miss_text(target: Target, above: bool) -> str:
    """How a target is missed: "pH above 8.5"."""
    limit = target.high if above else target.low
    return f"{brief_label(READOUTS[target.readout])} {'above' if above else 'below'} {short_number(limit)}"


def _regions(found: Window) -> list[Region]:
    """The regions there are on this map."""
    regions = []
    for position, target in enumerate(found.targets):
        scale, below, above = _beyond(found, position)
        earlier = [_room(found, other) for other in range(position)]
        for excess, up in ((below, False), (above, True)):
            if excess is None:
                continue
            first = (found.missed == position) & (excess > 0)
            if not first.any():
                continue
            label = miss_text(target, up)
            field = np.minimum.reduce([excess / scale, *earlier])
            field = np.where(found.missed == NO_ANSWER, np.nan, field)
            place, text = _place(first, label, found.x.values, found.y.values)
            regions.append(Region(label, float(first.mean()), place, text, field, position, up))
    return regions


def _beyond(found: Window, position: int) -> tuple[float, np.ndarray | None, np.ndarray | None]:
    """A measure of how much the readout of a target varies, and how far it is below and above the band."""
    target = found.targets[position]
    values, slack = found.readouts[target.readout], READOUTS[target.readout].slack
    finite = values[np.isfinite(values)]
    scale = float(np.ptp(finite)) if finite.size else 0.0
    below = None if target.low is None else target.low - slack - values
    above = None if target.high is None else values - target.high - slack
    return scale or 1.0, below, above


def _room(found: Window, position: int) -> np.ndarray:
    """How far a target is from being missed, as part of how much its readout varies; negative if it is."""
    scale, *excesses = _beyond(found, position)
    return np.minimum.reduce([-excess / scale for excess in excesses if excess is not None])


def text_size(text: str) -> tuple[float, float]:
    """Width and height of a text on the map, pixels."""
    lines = text.split("\n")
    return LETTER * max(map(len, lines)) + AROUND, LINE * len(lines) + AROUND


def _place(mask: np.ndarray, label: str, x: np.ndarray, y: np.ndarray) -> tuple[Place | None, str]:
    """The roomiest place in a region for its label, and the label broken so that it fits."""
    from scipy import ndimage

    rows, columns = mask.shape
    cell = USUAL_WIDTH / columns, USUAL_HEIGHT / rows
    for text in (label, _broken(label)):
        size = [int(np.ceil(side / part)) | 1 for side, part in zip(text_size(text), cell, strict=True)]
        fits = ndimage.minimum_filter(mask.astype(np.uint8), size[::-1], mode="constant") > 0
        if fits.any():
            depth = ndimage.distance_transform_edt(np.pad(mask, 1), sampling=cell[::-1])[1:-1, 1:-1]
            # Of places with as much room, the one nearest to the middle of the region.
            middle = np.argwhere(mask).mean(axis=0)
            away = np.hypot(*(np.indices(mask.shape) - middle[:, None, None]))
            best = int(np.argmax(np.where(fits, depth - 1e-3 * away, -np.inf)))
            row, column = np.unravel_index(best, mask.shape)
            return (float(x[column]), float(y[row])), text
    return None, label


def _broken(label: str) -> str:
    """A label in two lines of about the same length."""
    blanks = [place for place, letter in enumerate(label) if letter == " "]
    if not blanks:
        return label
    middle = min(blanks, key=lambda place: abs(2 * place - len(label)))
    return f"{label[:middle]}\n{label[middle + 1 :]}"


def _words(
    found: Window,
    across: Axis,
    up: Axis,
    quantity: Quantity,
    regions: Sequence[Region],
    met: Region,
    unknown: Region | None,
) -> str:
    """The map in a few sentences, for screen readers."""
    text = (
        f"Map of {in_sentence(across.name)} from {across.at(found.x.values[0])} to"
        f" {across.at(found.x.values[-1])} and {in_sentence(up.name)} from {up.at(found.y.values[0])} to"
        f" {up.at(found.y.values[-1])}, with contours of {in_sentence(quantity.label)}."
    )
    if not found.targets:
        return f"{text} There are no targets."
    text += f" All targets are met on {percent_text(met.part)} of it."
    if regions:
        missed = "; ".join(f"{region.label} on {percent_text(region.part)}" for region in regions)
        text += f" Missed first: {missed}."
    return text + (f" No result on {percent_text(unknown.part)}." if unknown else "")


def percent_text(part: float) -> str:
    """A part (0 to 1) in whole percent; what is not nothing and not all does not say so."""
    if 0 < part < 0.005:
        return "under 1 %"
    if 0.995 <= part < 1:
        return "over 99 %"
    return f"{100 * part:.0f} %"
