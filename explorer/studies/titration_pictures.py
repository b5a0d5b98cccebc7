"""Pictures of a titration and of a logarithmic diagram, in the words of page and report."""

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from explorer.chemistry.components import FAMILIES
from explorer.scenario.evaluate import Outcome
from explorer.scenario.model import MeasuredPoints, Target
from explorer.scenario.outcome import FINISHED
from explorer.scenario.readouts import READOUTS
from explorer.scenario.words import in_sentence, number_text, unit_text
from explorer.studies.axes import Limits
from explorer.studies.pictures import (
    Axis,
    Dots,
    Line,
    Missing,
    Picture,
    axis,
    readout_picture,
    rising,
    species_picture,
)
from explorer.studies.sweep_pictures import quantity_of
from explorer.studies.titration import Diagram, Family, Titration
from explorer.treatment.chemicals import Chemical, titrant_moles

LOWEST = -9.0
"""log10 of mol/L below which a species is of no account in a diagram."""

PH_AXIS = Axis("pH", "", 2)

_PLACES, _EDGE = 61, 0.04
"""Places along a curve that are tried for its name, and the margin at both ends, in parts of the width."""

_RISE, _HALF_WIDTH = 0.04, 0.05
"""Of a name, in parts of the plot: its middle over the curve, and half its width."""

_CLEAR, _APART = 0.07, 0.2
"""Distances, in parts of the plot, at which a name is far enough from curves and from other names."""


def titration_axis(found: Titration, chemical: str, opposite: str = "") -> Axis:
    """The dose; names of the chemicals as printed, the second one for negative doses."""
    name = f"Dose of {in_sentence(chemical)}" + (f", below 0 of {in_sentence(opposite)}" if opposite else "")
    return axis(name, unit_text(found.unit), rising(found.x, found.x))


def doses_of(
    points: MeasuredPoints, found: Titration, outcome: Outcome, chemicals: Mapping[str, Chemical]
) -> np.ndarray | None:
    """Doses of a set of measured points in the unit of a titration; None for points of another one."""
    axis, x = points.titration, np.array([pair[0] for pair in points.points], float)
    places = {stage.id for stage in outcome.stages} | {FINISHED}
    if axis is None or points.stage not in places or outcome.stage(points.stage).id != found.stage:
        return None
    same = (axis.chemical == found.chemical or not (x > 0).any()) and (
        (axis.opposite or "") == found.opposite or not (x < 0).any()
    )
    if not same:
        return None
    above, below = (
        titrant_moles(chemicals[key], 1.0, axis.unit) / titrant_moles(chemicals[key], 1.0, found.unit)
        for key in (found.chemical, found.opposite or found.chemical)
    )
    return np.where(x >= 0, x * above, x * below)


def titration_picture(
    found: Titration,
    key: str,
    along: Axis,
    targets: Sequence[Target] = (),
    dots: Sequence[Dots] = (),
    previous: Limits | None = None,
) -> Picture:
    """pH or buffer intensity against the dose, with those of the ``targets`` that are of it."""
    readout = READOUTS[key]
    values = {"ph": found.ph, "buffer_intensity": found.buffer_intensity}[key]
    return readout_picture(
        quantity_of(readout),
        rising(found.x, found.x),
        rising(found.x, values),
        along,
        [(target.low, target.high) for target in targets if target.readout == key],
        _missing(found),
        previous,
        readout.slack,
        dots,
    )


def _missing(found: Titration) -> Missing:
    """Stretches without an answer, half a step beyond their points."""
    low, high = sorted((float(found.x[0]), float(found.x[-1])))
    half = abs(float(found.x[1] - found.x[0])) / 2
    stretches: list[tuple[float, float, str]] = []
    for x, reason in sorted(zip(found.x.tolist(), found.reasons.tolist(), strict=True)):
        if not reason:
            continue
        start, stop = max(x - half, low), min(x + half, high)
        if stretches and stretches[-1][2] == reason and np.isclose(stretches[-1][1], start):
            stretches[-1] = (stretches[-1][0], stop, reason)
        else:
            stretches.append((start, stop, reason))
    return tuple(stretches)


# ---- logarithmic diagram -----------------------------------------------------------------------------------


def diagram_picture(found: Diagram, families: Collection[str]) -> Picture:
    """Species of some families of a diagram; a family has one colour, its species have different dashes."""
    shown = [family for family in found.families if family.key in families]
    lines = _told_apart([_lines(found, family, place) for place, family in enumerate(shown)])
    names = ", ".join(line.name for line in lines)
    own = number_text(found.own_ph, 2)
    return Picture(
        title="Species against pH",
        note=f"own pH {own} · log mol/L",
        x=found.ph,
        lines=lines,
        limits=(LOWEST, _top(lines)),
        digits=2,
        words=f"log₁₀ of the concentration in mol/L of {names} against pH; the own pH of the water is {own}.",
        empty="" if lines else "No family is chosen.",
    )


def _lines(found: Diagram, family: Family, colour: int) -> tuple[str, list[Line]]:
    """The species of a family, and what it is called where one of them has no name of its own."""
    members = {
        species: np.nan_to_num(10.0**logs, nan=0.0, posinf=0.0) for species, logs in family.logs.items()
    }
    picture = species_picture(family.label, members, found.ph, PH_AXIS, logarithmic=True)
    lines = [
        Line(line.name, np.where(line.y >= LOWEST, line.y, np.nan), colour, dash)
        for dash, line in enumerate(picture.lines)
    ]
    return (family.key if family.key in FAMILIES else family.label), lines


def _told_apart(families: Sequence[tuple[str, list[Line]]]) -> tuple[Line, ...]:
    """All lines; sums that several families have get the name of theirs."""
    names = [line.name for _, lines in families for line in lines]
    return tuple(
        replace(line, name=f"{line.name}, {family}") if names.count(line.name) > 1 else line
        for family, lines in families
        for line in lines
    )


def _top(lines: Sequence[Line]) -> float:
    highest = max((float(np.nanmax(line.y, initial=LOWEST)) for line in lines), default=-1.0)
    return float(np.ceil(highest + 0.2))


@dataclass(frozen=True)
class Name:
    """Where the name of a curve stands: just above the curve at ``x``, ``y``. ``line``: its position."""

    line: int
    text: str
    x: float
    y: float


def names_along(picture: Picture, mark: float = np.nan) -> list[Name]:
    """A place for the name of every curve: high on it, away from other curves, from other names, and from an
    upright line at ``mark``."""
    low, high = picture.limits
    x = np.linspace(0.0, 1.0, len(picture.x))
    curves = np.array([(line.y - low) / (high - low) for line in picture.lines])
    tried = np.unique(np.round(np.linspace(_EDGE, 1 - _EDGE, _PLACES) * (len(x) - 1)).astype(int))
    at_mark = (mark - picture.x[0]) / (picture.x[-1] - picture.x[0])
    placed: list[Name] = []
    spots = np.empty((0, 2))
    for place in sorted(range(len(curves)), key=lambda place: -np.nanmax(curves[place], initial=0.0)):
        heights = curves[place][tried]
        score = _clearance(curves, place, tried, x) / _CLEAR + 0.8 * heights
        score -= np.abs(x[tried] - at_mark) < _HALF_WIDTH
        apart = np.hypot(x[tried][:, None] - spots[:, 0], 2.5 * (heights[:, None] - spots[:, 1]))
        score += 2 * np.minimum(np.min(apart, axis=1, initial=1.0), _APART) / _APART
        score = np.where(np.isfinite(heights) & (heights < 0.95), score, -np.inf)
        best = int(np.argmax(score))
        if np.isfinite(score[best]):
            at = int(tried[best])
            spots = np.vstack([spots, (x[at], heights[best])])
            y = float(picture.lines[place].y[at])
            placed.append(Name(place, picture.lines[place].name, float(picture.x[at]), y))
    return sorted(placed, key=lambda name: name.line)


def _clearance(curves: np.ndarray, place: int, tried: np.ndarray, x: np.ndarray) -> np.ndarray:
    """Distance of a name at the places ``tried`` of its curve from every curve over its width, up to what
    counts as clear."""
    middle = curves[place][tried] + _RISE
    reach = int(_HALF_WIDTH * (len(x) - 1))
    clear = np.full(len(tried), _CLEAR)
    for shift in range(-reach, reach + 1, max(1, reach // 3)):
        beside = np.clip(tried + shift, 0, len(x) - 1)
        for other, curve in enumerate(curves):
            distance = np.abs(curve[beside] - middle)
            if other == place:
                # Its own curve runs below the name by as much as that is raised.
                distance = distance + (_CLEAR - _RISE)
            clear = np.minimum(clear, np.where(np.isfinite(distance), distance, _CLEAR))
    return clear
