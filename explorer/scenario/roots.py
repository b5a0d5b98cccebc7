"""Roots of many independent functions at once, each safe between two ends.

Method: Chandrupatla 1997, Advances in Engineering Software 28:145-149 (inverse quadratic interpolation where
it can be trusted, else bisection), from a first secant step; points that are done drop out.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

MOST_STEPS = 100

MOST_HALVINGS = 50
"""To 1e-15 of the range."""

Function = Callable[[np.ndarray, np.ndarray], np.ndarray]
"""Values at ``x`` of the functions whose numbers are ``point``."""


@dataclass(frozen=True)
class Roots:
    """``x``: the roots; ``found``: where there is one; ``low`` and ``high``: the ends searched between, with
    the values ``at_low`` and ``at_high``."""

    x: np.ndarray
    found: np.ndarray
    low: np.ndarray
    high: np.ndarray
    at_low: np.ndarray
    at_high: np.ndarray


def find_roots(
    function: Function, low: np.ndarray, high: np.ndarray, *, relative: float, enough: float = 0.0
) -> Roots:
    """Where ``function(x, point)`` is zero between ``low`` and ``high``, (N,) each.

    ``point`` (int) says which of the N functions the values of x belong to. A search ends where the root is
    known to a part ``relative`` of the range, or the function is no more than ``enough``. No root is found
    where the function has the same sign at both ends; where it is nan at one end, that end is drawn in until
    it has a value.
    """
    points = np.arange(low.size)
    low, high = low.astype(float), high.astype(float)
    at_low, at_high = function(low, points), function(high, points)
    lost = np.flatnonzero(np.isnan(at_low) != np.isnan(at_high))
    if lost.size:
        _draw_in(function, lost, low, high, at_low, at_high)
    x, found = np.full(low.size, np.nan), np.zeros(low.size, bool)
    for end, value in ((low, at_low), (high, at_high)):
        done = np.abs(value) <= enough
        x[done], found[done] = end[done], True
    with np.errstate(invalid="ignore", divide="ignore"):
        start = np.flatnonzero(~found & (at_low * at_high < 0))
        _search(function, start, (low, high, at_low, at_high), x, found, relative, enough)
    return Roots(x, found, low, high, at_low, at_high)


def _search(
    function: Function,
    points: np.ndarray,
    ends: tuple[np.ndarray, ...],
    x: np.ndarray,
    found: np.ndarray,
    relative: float,
    enough: float,
) -> None:
    """Roots of ``points`` into ``x`` and ``found``. x1 is the newest end, x2 the other, x3 the one before."""
    x1, x2, f1, f2 = (end[points] for end in ends)
    width = relative * np.abs(x2 - x1)
    part = f1 / (f1 - f2)
    for _ in range(MOST_STEPS):
        if not points.size:
            return
        newest = x1 + part * (x2 - x1)
        value = function(newest, points)
        same = np.sign(value) == np.sign(f1)
        x3, f3 = np.where(same, x1, x2), np.where(same, f1, f2)
        x2, f2 = np.where(same, x2, x1), np.where(same, f2, f1)
        x1, f1 = newest, value
        best = np.abs(f1) <= np.abs(f2)
        least = width / np.abs(x2 - x1)
        done = (np.abs(f1) <= enough) | (least > 0.5)
        x[points[done]] = np.where(best, x1, x2)[done]
        found[points[done]] = True
        xi, phi = (x1 - x2) / (x3 - x2), (f1 - f2) / (f3 - f2)
        trusted = (phi**2 < xi) & ((1 - phi) ** 2 < 1 - xi)
        curved = f1 / (f2 - f1) * f3 / (f2 - f3) + (x3 - x1) / (x2 - x1) * f1 / (f3 - f1) * f2 / (f3 - f2)
        part = np.clip(np.where(trusted, curved, 0.5), least, 1 - least)
        going = ~done & np.isfinite(f1)
        points, part, width = points[going], part[going], width[going]
        x1, x2, f1, f2 = x1[going], x2[going], f1[going], f2[going]


def _draw_in(
    function: Function,
    points: np.ndarray,
    low: np.ndarray,
    high: np.ndarray,
    at_low: np.ndarray,
    at_high: np.ndarray,
) -> None:
    """Move ends of ``points`` that have no value inwards, just past the root if there is one; in place."""
    upper = np.isnan(at_high[points])
    near, far = np.where(upper, low[points], high[points]), np.where(upper, high[points], low[points])
    at_near, at_far = np.where(upper, at_low[points], at_high[points]), np.full(points.size, np.nan)
    sign = np.sign(at_near)
    for _ in range(MOST_HALVINGS):
        moving = np.isnan(at_far)
        if not moving.any():
            break
        middle = (near + far) / 2
        value = function(middle, points)
        same = np.sign(value) == sign
        near, at_near = np.where(moving & same, (middle, value), (near, at_near))
        far, at_far = np.where(moving & ~same, (middle, value), (far, at_far))
    end, at_end = np.where(np.isfinite(at_far), (far, at_far), (near, at_near))
    low[points], at_low[points] = np.where(upper, (low[points], at_low[points]), (end, at_end))
    high[points], at_high[points] = np.where(upper, (end, at_end), (high[points], at_high[points]))
