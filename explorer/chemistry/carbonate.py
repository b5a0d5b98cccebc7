"""The carbonate system of an analysis from any two of pH, alkalinity, DIC and CO2.

The two that are missing are found at the temperature at which the pH was read; after that only totals matter.
"""

from collections.abc import Callable

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .system import System

TOLERANCE = 1e-12
"""Relative agreement of the entered quantity; far below any analysis."""
MAX_ITERATIONS = 40


def complete(
    system: System,
    totals: NDArray,
    temperature: ArrayLike,
    *,
    ph: ArrayLike | None = None,
    alkalinity: ArrayLike | None = None,
    dic: ArrayLike | None = None,
    co2: ArrayLike | None = None,
) -> tuple[NDArray, NDArray]:
    """Totals with alkalinity and DIC filled in, and which points are possible.

    ``totals`` (components, *shape) mol/L with every other row set; ``temperature`` °C at which pH and CO2
    hold; exactly two of ``ph``, ``alkalinity`` [eq/L], ``dic`` [mol/L] and ``co2`` [mol/L of CO2(aq)]. All
    broadcast. A point is impossible where the two contradict each other, for example an alkalinity smaller
    than what OH-, silicate and the like make up at that pH; its rows are nan.

    Raises ValueError unless exactly two are given.
    """
    given = {"ph": ph, "alkalinity": alkalinity, "dic": dic, "co2": co2}
    given = {name: np.asarray(value, dtype=float) for name, value in given.items() if value is not None}
    if len(given) != 2:
        raise ValueError(f"two of pH, alkalinity, DIC and CO2 are needed; got {', '.join(given) or 'none'}")
    temperature = np.asarray(temperature, dtype=float)
    shape = np.broadcast_shapes(totals.shape[1:], temperature.shape, *(v.shape for v in given.values()))
    extra = (1,) * (len(shape) - totals.ndim + 1)
    totals = np.broadcast_to(
        totals.reshape(totals.shape[:1] + extra + totals.shape[1:]), (len(system.keys), *shape)
    ).reshape(len(system.keys), -1).copy()  # fmt: skip
    temperature = np.broadcast_to(temperature, shape).ravel()
    given = {name: np.broadcast_to(value, shape).ravel() for name, value in given.items()}
    possible = _FILL[frozenset(given)](system, totals, temperature, **given)
    rows = [system.index["alkalinity"], system.index["dic"]]
    possible &= np.isfinite(totals[rows]).all(axis=0)
    totals[:, ~possible] = np.where(
        np.isin(np.arange(len(totals)), rows)[:, None], np.nan, totals[:, ~possible]
    )
    return totals.reshape(len(system.keys), *shape), possible.reshape(shape)


def _alkalinity_and_dic(
    system: System, totals: NDArray, temperature: NDArray, alkalinity: NDArray, dic: NDArray
) -> NDArray:
    totals[system.index["alkalinity"]], totals[system.index["dic"]] = alkalinity, dic
    return dic >= 0.0


def _ph_and_dic(system: System, totals: NDArray, temperature: NDArray, ph: NDArray, dic: NDArray) -> NDArray:
    totals[system.index["dic"]] = dic
    solution = system.solve(totals, temperature, ph=ph)
    totals[system.index["alkalinity"]] = solution.totals[system.index["alkalinity"]]
    return solution.solved


def _ph_and_alkalinity(
    system: System, totals: NDArray, temperature: NDArray, ph: NDArray, alkalinity: NDArray
) -> NDArray:
    row = system.index["alkalinity"]

    def found(dic: NDArray, points: NDArray) -> NDArray:
        part = totals[:, points].copy()
        part[system.index["dic"]] = dic
        return system.solve(part, temperature[points], ph=ph[points]).totals[row] - alkalinity[points]

    dic, possible = _increasing_root(found, np.maximum(alkalinity, 1e-5), len(ph))
    totals[row], totals[system.index["dic"]] = alkalinity, dic
    return possible


def _ph_and_co2(system: System, totals: NDArray, temperature: NDArray, ph: NDArray, co2: NDArray) -> NDArray:
    def found(dic: NDArray, points: NDArray) -> NDArray:
        part = totals[:, points].copy()
        part[system.index["dic"]] = dic
        return system.solve(part, temperature[points], ph=ph[points]).concentration("CO2(aq)") - co2[points]

    dic, possible = _increasing_root(found, np.maximum(co2, 1e-9), len(ph))
    return possible & _ph_and_dic(system, totals, temperature, ph, dic)


def _alkalinity_and_co2(
    system: System, totals: NDArray, temperature: NDArray, alkalinity: NDArray, co2: NDArray
) -> NDArray:
    totals[system.index["alkalinity"]] = alkalinity

    def found(dic: NDArray, points: NDArray) -> NDArray:
        part = totals[:, points].copy()
        part[system.index["dic"]] = dic
        return system.solve(part, temperature[points]).concentration("CO2(aq)") - co2[points]

    start = np.maximum(alkalinity, 0.0) + np.maximum(co2, 1e-9)
    totals[system.index["dic"]], possible = _increasing_root(found, start, len(co2))
    return possible


def _dic_and_co2(
    system: System, totals: NDArray, temperature: NDArray, dic: NDArray, co2: NDArray
) -> NDArray:
    """CO2 fixes the pH at a known DIC: the root is sought as 14 − pH, in the logarithm of CO2."""
    totals[system.index["dic"]] = dic

    def found(acidity: NDArray, points: NDArray) -> NDArray:
        part = system.solve(totals[:, points], temperature[points], ph=14.0 - acidity)
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.log(part.concentration("CO2(aq)") / co2[points])

    acidity, possible = _increasing_root(found, np.full(len(co2), 7.0), len(co2), highest=14.0)
    return possible & (co2 < dic) & _ph_and_dic(system, totals, temperature, 14.0 - acidity, dic)


def _increasing_root(
    function: Callable[[NDArray, NDArray], NDArray], start: NDArray, number: int, highest: float = np.inf
) -> tuple[NDArray, NDArray]:
    """Root between 0 and ``highest`` of an increasing function of one value a point.

    ``function(values, points)`` gives the residuals of some points. Secant steps inside a bracket that only
    shrinks; where they leave it, the middle is taken. Returns the roots and which points have one: none where
    the function is positive at 0.
    """
    points = np.arange(number)
    low, high = np.zeros(number), np.full(number, highest)
    at_zero = function(low, points)
    root = np.where(np.abs(at_zero) < 1e-15, 0.0, np.nan)
    points = points[(at_zero < -1e-15) & np.isfinite(start)]
    x0, f0 = low.copy(), at_zero.copy()
    x1 = start.astype(float).copy()
    scale = np.abs(at_zero)
    for _ in range(MAX_ITERATIONS):
        if not points.size:
            break
        f1 = function(x1[points], points)
        done = np.abs(f1) <= TOLERANCE * scale[points]
        root[points[done]] = x1[points[done]]
        points, f1 = points[~done & np.isfinite(f1)], f1[~done & np.isfinite(f1)]
        x = x1[points]
        low[points] = np.where(f1 < 0.0, np.maximum(low[points], x), low[points])
        high[points] = np.where(f1 > 0.0, np.minimum(high[points], x), high[points])
        slope = (f1 - f0[points]) / np.where(x == x0[points], np.inf, x - x0[points])
        step = x - f1 / np.where(slope > 0.0, slope, np.nan)
        bottom, top = low[points], high[points]
        inside = (step > bottom) & (step < top)
        middle = np.where(np.isfinite(top), 0.5 * (bottom + top), 10.0 * np.maximum(x, 1e-9))
        step = np.where(inside, np.minimum(step, 100.0 * np.maximum(x, 1e-9)), middle)
        stuck = np.isfinite(top) & (top - bottom <= 4e-16 * top)
        root[points[stuck]] = x[stuck]
        x0[points], f0[points], x1[points] = x, f1, step
        points = points[~stuck]
    return root, np.isfinite(root)


_FILL = {
    frozenset({"alkalinity", "dic"}): _alkalinity_and_dic,
    frozenset({"ph", "dic"}): _ph_and_dic,
    frozenset({"ph", "alkalinity"}): _ph_and_alkalinity,
    frozenset({"ph", "co2"}): _ph_and_co2,
    frozenset({"alkalinity", "co2"}): _alkalinity_and_co2,
    frozenset({"dic", "co2"}): _dic_and_co2,
}
