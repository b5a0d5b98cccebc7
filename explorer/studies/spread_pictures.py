"""What the spread of a tolerance study looks like, as plain data: fan along the sweep, distribution here."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from explorer.scenario.readouts import READOUTS, Readout, format_value
from explorer.scenario.words import number_text, unit_text
from explorer.studies.axes import Limits, steady_limits
from explorer.studies.pictures import Band, Layer, Picture, band_of, least_span, rising
from explorer.studies.sweep import headed
from explorer.studies.tolerance import ToleranceStudy

MOST_PERCENT, HALF_PERCENT = 95.0, 50.0
"""Parts of all outcomes that the layers of a fan hold."""

BINS = 36

REACH = (0.1, 99.9)
"""Percentiles between which a distribution is drawn: a single far outcome must not squeeze it."""


def fan_layers(
    study: ToleranceStudy, key: str, percents: Sequence[float] = (MOST_PERCENT, HALF_PERCENT)
) -> tuple[Layer, ...]:
    """Layers of the fan of a readout along the sweep, in the order of rising x; the widest first."""
    layers = []
    for percent in percents:
        low, high = study.fan.percentiles(key, (50 - percent / 2, 50 + percent / 2))
        layers.append(Layer(percent, rising(study.x, low), rising(study.x, high)))
    return tuple(layers)


def resampled(layers: Sequence[Layer], x: np.ndarray, at: np.ndarray) -> tuple[Layer, ...]:
    """Layers known at ``x`` (rising), at other places between."""
    if len(x) == len(at) and np.array_equal(x, at):
        return tuple(layers)
    return tuple(
        Layer(layer.percent, np.interp(at, x, layer.low), np.interp(at, x, layer.high)) for layer in layers
    )


def with_fan(picture: Picture, layers: Sequence[Layer], previous: Limits | None = None) -> Picture:
    """A picture of a readout with a fan, all of it inside its limits. ``previous``: limits in use."""
    if not layers:
        return picture
    ends = [end for layer in layers for end in (layer.low, layer.high)]
    everything = np.concatenate([np.array(picture.limits), *ends])
    limits = steady_limits(everything, previous, picture.limits[1] - picture.limits[0])
    widest = layers[0]
    words = f"{picture.words} {widest.percent:g} % of the outcomes lie within a band around it."
    return replace(picture, fan=tuple(layers), limits=limits, words=words)


@dataclass(frozen=True)
class Distribution:
    """Outcomes of a readout at the operating point.

    ``edges`` (bins + 1,) and ``parts`` (bins,), the part of the outcomes in each bin. ``nominal``: the value
    with nothing off. ``marks``: percentiles 2.5, 50 and 97.5, nan without an answer. ``answered``: part of
    the outcomes that have one.
    """

    readout: Readout
    edges: np.ndarray
    parts: np.ndarray
    nominal: float
    marks: tuple[float, float, float]
    band: Band | None
    limits: Limits
    answered: float
    words: str

    @property
    def most(self) -> str:
        """Between which values 95 % of the outcomes lie, in words; "" without an answer."""
        low, _, high = self.marks
        if not np.isfinite(low):
            return ""
        return f"95 % within {format_value(low, self.readout)} to {format_value(high, self.readout)}"

    def table(self) -> list[list[Any]]:
        """Rows for a spreadsheet, the heading first: the ends of every bin and its part of the outcomes."""
        ends = [
            headed(f"{self.readout.label}, {end}", unit_text(self.readout.unit)) for end in ("from", "to")
        ]
        columns = self.edges[:-1].tolist(), self.edges[1:].tolist(), (100 * self.parts).tolist()
        return [[*ends, "Part of the outcomes [%]"], *(list(row) for row in zip(*columns, strict=True))]


def distribution(study: ToleranceStudy, key: str, previous: Limits | None = None) -> Distribution:
    """The distribution of a readout at the operating point. ``previous``: limits in use."""
    readout, here = READOUTS[key], study.here
    values = here.values[key][:, 0]
    finite = values[np.isfinite(values)]
    band = band_of([(target.low, target.high) for target in study.targets if target.readout == key])
    nominal = float(here.nominal[key][0])
    low, middle, high = (float(row[0]) for row in here.percentiles(key, (2.5, 50.0, 97.5)))
    drawn = finite
    if finite.size:
        ends = np.percentile(finite, REACH)
        drawn = finite[(finite >= ends[0]) & (finite <= ends[1])]
    largest = float(np.abs(drawn).max()) if drawn.size else 1.0
    bounds = [bound for bound in band or () if bound is not None]
    least = least_span(readout.digits, largest)
    limits = steady_limits(np.append(drawn, nominal), previous, least, bounds)
    span = (float(drawn.min()), float(drawn.max())) if drawn.size else (0.0, 1.0)
    if span[1] - span[0] < least / 10:
        span = (sum(span) / 2 - least / 20, sum(span) / 2 + least / 20)
    counts, edges = np.histogram(drawn, min(BINS, max(8, drawn.size // 8)), span)
    count = max(values.size, 1)
    marks, answered = (low, middle, high), finite.size / count
    found = Distribution(readout, edges, counts / count, nominal, marks, band, limits, answered, "")
    return replace(found, words=_words(found))


def _words(found: Distribution) -> str:
    """The distribution in a sentence, for screen readers."""
    if not found.most:
        return f"{found.readout.label} has no answer at the operating point."
    middle, unit = format_value(found.marks[1], found.readout), unit_text(found.readout.unit)
    name = f"{found.readout.label}, {unit}," if unit else found.readout.label
    return f"{name} at the operating point: {found.most}, median {middle}."


def chance_text(part: float) -> str:
    """A chance in percent, without the certainty that samples cannot give."""
    if part > 0.995:
        return "over 99 %"
    return "under 1 %" if part < 0.005 else f"{number_text(100 * part, 0)} %"
