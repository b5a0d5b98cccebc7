"""What the sweep plots show, as plain data: no Bokeh here. ``plots`` draws it."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np

from explorer.scenario.words import formula_text, in_sentence, number_text, range_text, short_number
from explorer.studies.axes import Limits, steady_limits

MOST_LINES = 6
"""Species drawn one by one at most; the rest of a family is drawn as their sum."""

PAIRS, OTHERS = "ion pairs", "others"

METALS = ("aluminium", "iron")
_METAL = re.compile(r"(Ca|Mg|Na|K|Al|Fe)(?![a-z])")


Band = tuple[float | None, float | None]
"""Lower and upper bound of a target; None where there is none."""


Missing = tuple[tuple[float, float, str], ...]
"""Stretches without a result: from, to, reason."""


@dataclass(frozen=True)
class Line:
    """One curve: ``name`` labels its end ("" in a plot with one curve); ``y`` is nan where not solved.

    ``colour``, ``dash``: which of those there are, the one of its place among the lines where None.
    """

    name: str
    y: np.ndarray
    colour: int | None = None
    dash: int | None = None


@dataclass(frozen=True)
class Dots:
    """Measured points laid over a plot: a set with its ``name``, and in words how far the model is off."""

    name: str
    x: np.ndarray
    y: np.ndarray
    words: str = ""


@dataclass(frozen=True)
class Mark:
    """Where the curve crosses a bound of a target: rising or falling, the upper or the lower bound."""

    x: float
    y: float
    text: str
    rising: bool
    upper: bool


@dataclass(frozen=True)
class Layer:
    """Part of a fan: between ``low`` and ``high`` lie ``percent`` of all outcomes, nan where none are."""

    percent: float
    low: np.ndarray
    high: np.ndarray


@dataclass(frozen=True)
class Picture:
    """Everything one plot shows."""

    title: str
    note: str
    x: np.ndarray
    lines: tuple[Line, ...]
    limits: Limits
    digits: int
    unit: str = ""
    significant: int | None = None
    signed: bool = False
    band: Band | None = None
    marks: tuple[Mark, ...] = ()
    gaps: Missing = ()
    words: str = ""
    empty: str = ""
    fan: tuple[Layer, ...] = ()
    dots: tuple[Dots, ...] = ()
    others: tuple[Line, ...] = ()
    """The same quantity of kept options, drawn thinner."""


@dataclass(frozen=True)
class Axis:
    """The dial along x: name, unit, and decimals worth printing."""

    name: str
    unit: str
    digits: int

    def at(self, x: float) -> str:
        return number_text(x, self.digits) + (f" {self.unit}" if self.unit else "")


def axis(name: str, unit: str, x: np.ndarray) -> Axis:
    """Axis of a sweep; decimals follow from the range so that two neighbouring points differ."""
    span = abs(float(x[-1] - x[0])) or 1.0
    return Axis(name, unit, int(min(6, max(0, 2 - np.floor(np.log10(span) + 1e-9)))) if span < 100 else 0)


def band_of(targets: Sequence[Band]) -> Band | None:
    """The band that meets all of ``targets``; None without targets or when they exclude each other."""
    lows = [low for low, _ in targets if low is not None]
    highs = [high for _, high in targets if high is not None]
    low, high = max(lows, default=None), min(highs, default=None)
    if (low is None and high is None) or (low is not None and high is not None and low > high):
        return None
    return low, high


def crossing_marks(
    x: np.ndarray, y: np.ndarray, targets: Sequence[Band], along: Axis, slack: float = 0.0
) -> tuple[Mark, ...]:
    """Where the curve passes a bound, by linear interpolation between neighbouring solved points.

    A value within ``slack`` beyond a bound still counts as on its inner side.
    """
    edges = {(low - slack, low, False) for low, _ in targets if low is not None}
    edges |= {(high + slack, high, True) for _, high in targets if high is not None}
    marks = []
    for edge, bound, upper in sorted(edges):
        away = y - edge
        with np.errstate(invalid="ignore"):
            passing = np.nonzero(((away[:-1] < 0) & (away[1:] >= 0)) | ((away[:-1] >= 0) & (away[1:] < 0)))[0]
        for index in passing:
            part = away[index] / (away[index] - away[index + 1])
            place = float(x[index] + part * (x[index + 1] - x[index]))
            marks.append(Mark(place, bound, along.at(place), bool(away[index + 1] > away[index]), upper))
    return tuple(marks)


def rising(x: np.ndarray, y: np.ndarray) -> np.ndarray:
    """``y`` in the order of rising ``x``: a sweep may run downwards, an axis does not."""
    y = np.broadcast_to(np.asarray(y, float), np.shape(x))
    return y[::-1] if x[-1] < x[0] else y


def least_span(digits: int, limit: float) -> float:
    """Smallest span an axis may show: rounding noise stays flat, small numbers still fill the plot."""
    return max(20 * 10.0**-digits, 1e-6 * abs(limit), 1e-12)


@dataclass(frozen=True)
class Quantity:
    """A readout as the plots name it."""

    label: str
    unit: str
    digits: int
    significant: int | None = None
    signed: bool = False


def readout_picture(
    quantity: Quantity,
    x: np.ndarray,
    y: np.ndarray,
    along: Axis,
    targets: Sequence[Band] = (),
    missing: Missing = (),
    previous: Limits | None = None,
    slack: float = 0.0,
    dots: Sequence[Dots] = (),
) -> Picture:
    """One readout against the swept dial, with its target band, the places where it crosses a bound, and what
    was measured of it."""
    y = np.asarray(y, float)
    bounds = [bound for target in targets for bound in target if bound is not None]
    finite = y[np.isfinite(y)]
    largest = float(np.abs(finite).max()) if finite.size else 1.0
    everything = np.concatenate([y, *(part.y for part in dots)])
    limits = steady_limits(everything, previous, least_span(quantity.digits, largest), bounds)
    marks = crossing_marks(x, y, targets, along, slack)
    notes = [quantity.unit.replace(" as ", " ")] if quantity.unit else []
    if targets:
        band = band_of(targets)
        notes.append("target " + range_text(*band) if band else "targets exclude each other")
    notes += [part.words for part in dots if part.words]
    return Picture(
        title=quantity.label,
        note=" · ".join(notes),
        x=x,
        lines=(Line("", y),),
        limits=limits,
        digits=quantity.digits,
        unit=quantity.unit,
        significant=quantity.significant,
        signed=quantity.signed,
        band=band_of(targets),
        marks=marks,
        gaps=missing,
        words=" ".join([_words(quantity, x, y, along, marks, missing), *(_told(part) for part in dots)]),
        empty="" if finite.size else _first_reason(missing),
        dots=tuple(dots),
    )


def _told(dots: Dots) -> str:
    """A set of measured points in a sentence."""
    count = f"{len(dots.x)} measured point{'s' if len(dots.x) > 1 else ''}"
    return f"{count}: {dots.name}{f', {dots.words}' if dots.words else ''}."


def species_picture(
    family: str,
    members: Mapping[str, np.ndarray],
    x: np.ndarray,
    along: Axis,
    logarithmic: bool = False,
    missing: Missing = (),
    previous: Limits | None = None,
) -> Picture:
    """A family of species against the swept dial: percent of the family's sum, or log₁₀ of mol/L.

    ``members`` maps species names to concentrations, mol/L, of the shape of ``x``.
    """
    amounts = _named(family, members)
    total = sum(amounts.values(), np.zeros(len(x)))
    present = bool(np.any(total[np.isfinite(total)] > 0)) if amounts else False
    label = f"{family[:1].upper()}{family[1:]} species"
    note, scale = ("log mol/L", "log₁₀ of mol/L") if logarithmic else ("mol %", "mole percent")
    if not present:
        return Picture(
            label,
            note,
            x,
            (),
            previous or (0.0, 1.0),
            0,
            gaps=missing,
            words=f"{label}: none in this water.",
            empty=f"No {family} in this water.",
        )
    lines: list[Line] = []
    with np.errstate(divide="ignore", invalid="ignore"):
        for name, amount in _foremost(amounts).items():
            y = np.log10(amount) if logarithmic else 100.0 * amount / total
            lines.append(Line(name, np.where(np.isfinite(y), y, np.nan)))
    if logarithmic:
        ys = np.array([line.y for line in lines])
        top = np.nanmax(ys)
        # A species of no account must not stretch the axis over tens of decades.
        limits = steady_limits(ys[np.isfinite(ys) & (ys > top - 8)], previous, 1.0)
    else:
        limits = (0.0, 100.0)
    ends = ", ".join(f"{line.name} {_span_words(line.y, 1 if logarithmic else 0)}" for line in lines)
    return Picture(
        label,
        note,
        x,
        tuple(lines),
        limits,
        2 if logarithmic else 1,
        unit="" if logarithmic else "%",
        gaps=missing,
        words=f"{label}, {scale}, against {in_sentence(along.name)}: {ends}.",
    )


def _named(family: str, members: Mapping[str, np.ndarray]) -> dict[str, np.ndarray]:
    """Amounts by printed name; pairs with metal ions as their sum, except in the families of those metals."""
    amounts: dict[str, np.ndarray] = {}
    for name, amount in members.items():
        paired = family not in METALS and _METAL.search(name) is not None
        printed = PAIRS if paired else formula_text(name.removesuffix("(aq)"))
        amounts[printed] = amounts.get(printed, 0.0) + np.asarray(amount, float)
    return amounts


def _foremost(amounts: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    """The species worth a line of their own, by their greatest amount; the others summed.

    Their order is that of the family, so that a species keeps its colour and dash in every water.
    """

    def greatest(name: str) -> float:
        finite = amounts[name][np.isfinite(amounts[name])]
        return float(finite.max()) if finite.size else 0.0

    ranked = sorted((name for name in amounts if name != PAIRS), key=greatest, reverse=True)
    kept = [name for name in ranked[:MOST_LINES] if greatest(name) > 0]
    chosen = {name: amounts[name] for name in amounts if name in kept}
    rest = [amounts[name] for name in ranked if name not in kept and greatest(name) > 0]
    if PAIRS in amounts and greatest(PAIRS) > 0:
        chosen[PAIRS] = amounts[PAIRS]
    return chosen | ({OTHERS: np.sum(rest, axis=0)} if rest else {})


def _first_reason(missing: Missing) -> str:
    return missing[0][2] if missing else "no solution"


def _span_words(y: np.ndarray, digits: int) -> str:
    finite = y[np.isfinite(y)]
    if not finite.size:
        return "not solved"
    return f"from {number_text(float(finite[0]), digits)} to {number_text(float(finite[-1]), digits)}"


def _words(
    quantity: Quantity,
    x: np.ndarray,
    y: np.ndarray,
    along: Axis,
    marks: tuple[Mark, ...],
    missing: Missing,
) -> str:
    """The plot in one or two sentences, for screen readers."""
    unit = f" {quantity.unit}" if quantity.unit else ""
    solved = np.isfinite(y)
    if not solved.any():
        return f"{quantity.label} could not be calculated along this sweep: {_first_reason(missing)}."
    first, last = np.nonzero(solved)[0][[0, -1]]
    low, high = int(np.nanargmin(y)), int(np.nanargmax(y))

    def at(index: int) -> str:
        return f"{number_text(float(y[index]), quantity.digits)} at {along.at(float(x[index]))}"

    name = f"{quantity.label},{unit}" if unit else quantity.label
    text = f"{name} against {in_sentence(along.name)}: {at(first)}, {at(last)}"
    if low not in (first, last):
        text += f", lowest {at(low)}"
    if high not in (first, last):
        text += f", highest {at(high)}"
    for mark in marks:
        text += f", crosses {short_number(mark.y)} at {mark.text}"
    for start, stop, reason in missing:
        text += f"; no result from {along.at(start)} to {along.at(stop)}: {reason}"
    return text + "."


@dataclass
class Memory:
    """Axis limits in use, by what the plot shows; so that limits stay while a slider moves."""

    limits: dict[str, Limits] = field(default_factory=dict)

    def keep(self, name: str, picture: Picture) -> Picture:
        self.limits[name] = picture.limits
        return picture
