"""What the plots need of arithmetic: calm axis limits. Pure functions."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

_NICE = (1.0, 2.0, 2.5, 5.0, 10.0)
_KEEP_ABOVE = 0.4  # limits stay while the data fill at least this part of them

_BEYOND = 0.04  # part of the span that stays in view beyond a target bound

Limits = tuple[float, float]


def nice_step(span: float, intervals: int = 4) -> float:
    """Smallest step of the form 1, 2, 2.5 or 5 × 10ⁿ that covers ``span`` in ``intervals`` steps."""
    raw = span / intervals
    power = 10.0 ** math.floor(math.log10(raw))
    return next(factor * power for factor in _NICE if factor * power >= raw * (1 - 1e-9))


def outward(low: float, high: float) -> Limits:
    """Limits snapped outwards to multiples of a nice step; ``low < high``."""
    step = nice_step(high - low)
    return math.floor(low / step + 1e-9) * step, math.ceil(high / step - 1e-9) * step


def steady_limits(
    values: Sequence[float] | np.ndarray,
    previous: Limits | None = None,
    least_span: float = 1.0,
    marks: Sequence[float] = (),
) -> Limits:
    """Axis limits that do not dance while the data move a little.

    Parameters
    ----------
    values
        Everything drawn along the axis, any shape, nan ignored.
    previous
        Limits in use; kept while the data stay inside and fill at least 40 % of them.
    least_span
        The axis never spans less, so that rounding noise does not look like a curve.
    marks
        Target bounds worth seeing; taken in unless they would squeeze the data to under a third of the axis.

    Returns
    -------
    tuple
        (low, high) with low < high; ``previous`` or (0, least_span) when there are no data.
    """
    array = np.asarray(values, float)
    finite = array[np.isfinite(array)]
    if finite.size == 0:
        return previous or (0.0, least_span)
    low, high = float(finite.min()), float(finite.max())
    span = max(high - low, least_span)
    for mark in sorted(marks, key=lambda mark: max(low - mark, mark - high)):
        around = _BEYOND * max(span, abs(mark - low), abs(mark - high))
        if max(high, mark) - min(low, mark) <= 3 * span:
            low, high = min(low, mark - around), max(high, mark + around)
    if high - low < least_span:
        middle, floor_at_zero = (low + high) / 2, low >= 0
        low, high = middle - least_span / 2, middle + least_span / 2
        if floor_at_zero and low < 0:
            low, high = 0.0, least_span
    if previous is not None:
        width = previous[1] - previous[0]
        slack = 1e-9 * width
        if previous[0] - slack <= low and high <= previous[1] + slack and high - low >= _KEEP_ABOVE * width:
            return previous
    return outward(low, high)
