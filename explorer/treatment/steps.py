"""Treatment steps in which a solid or a gas enters or leaves. One function a kind of step.

Each takes a stream and arrays in base units (mol/L, °C; approaches in percent) and returns the stream behind
the step. Steps in which nothing leaves (dose, blend, split, temperature) are in
:mod:`explorer.treatment.stream`. A new kind of step is a new function here.
"""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import ArrayLike

from explorer.chemistry import System
from explorer.chemistry.calcium_carbonate import precipitation_potential
from explorer.chemistry.constants import log_henry_co2
from explorer.chemistry.solids import precipitate
from explorer.treatment.stream import Problem, Stream, lifted

CARBONATES: tuple[str, ...] = ("calcite", "aragonite", "vaterite")
"""Forms of calcium carbonate."""

BRUCITE = "brucite"

_FORMULA = dict.fromkeys(CARBONATES, "CaCO3") | {BRUCITE: "Mg(OH)2"}
_DISSOLVED = {
    "CaCO3": {"calcium": 1.0, "dic": 1.0, "alkalinity": 2.0},
    "Mg(OH)2": {"magnesium": 1.0, "alkalinity": 2.0},
}
"""What a mole of each solid adds to the totals when it dissolves."""

SEARCH_PASSES = 30
SEARCH_TOLERANCE = 1e-10
"""mol/L of Mg(OH)2; 0.006 µg/L."""


def limestone(stream: Stream, approach: ArrayLike, solid: str = "calcite") -> Stream:
    """A bed of calcium carbonate dissolves ``approach`` [%] of what saturation would take.

    A supersaturated water passes unchanged: the bed is there to dissolve, not to precipitate.
    """
    potential = _potential(stream, solid)
    dissolved = np.asarray(approach, float) / 100 * np.maximum(-potential, 0.0)
    return _without(stream, "CaCO3", -dissolved).flagged(np.isnan(potential), Problem.NOT_SOLVED)


def settle(stream: Stream, residual: ArrayLike | None = None, solids: Sequence[str] = ("calcite",)) -> Stream:
    """Solids form and leave; suspended floc leaves too.

    residual: precipitation potential of calcium carbonate [mol/L] that stays in the water, 0 for all the way
    to saturation, None where nothing precipitates. Mg(OH)2, where it is among ``solids``, forms together with
    the carbonate until the water that leaves is just saturated with it.
    """
    if residual is None or not solids:
        return replace(stream, floc={})
    residual = np.asarray(residual, float)
    totals = lifted(stream.totals, max(residual.ndim, np.ndim(stream.temperature)))
    water, formed = precipitate(stream.system, totals, stream.temperature, solids)
    formed = {solid: np.asarray(amount) for solid, amount in formed.items()}
    carbonate = next((solid for solid in solids if solid in CARBONATES), None)
    if carbonate is not None:
        if BRUCITE in formed and np.any(residual > 0):
            formed = _with_residual(stream, residual, carbonate, formed)
        else:
            formed[carbonate] = np.maximum(formed[carbonate] - residual, 0.0)
    result = stream
    for solid, amount in formed.items():
        result = _without(result, _FORMULA[solid], amount).with_solid(solid, amount, _FORMULA[solid])
    failed = ~water.solved | np.isnan(sum(formed.values()))
    return replace(result, floc={}).flagged(failed, Problem.NOT_SOLVED)


def _with_residual(
    stream: Stream, residual: np.ndarray, carbonate: str, formed: dict[str, np.ndarray]
) -> dict[str, np.ndarray]:
    """Amounts formed when brucite ends at saturation and the carbonate at ``residual`` above it.

    The supersaturation left keeps the pH up, so a little more brucite forms than at joint saturation. How
    much is sought by secant steps, from the joint saturation on.
    """
    system, temperature = stream.system, stream.temperature
    magnesium = stream.total("magnesium")

    def carbonate_at(brucite: np.ndarray) -> tuple[Stream, np.ndarray]:
        left = _without(stream, _FORMULA[BRUCITE], brucite)
        amount = np.maximum(_potential(left, carbonate) - residual, 0.0)
        return _without(left, "CaCO3", amount), amount

    def lacking(brucite: np.ndarray) -> np.ndarray:
        """Brucite that would still form, negative where too much has."""
        water, _ = carbonate_at(brucite)
        return system.equilibrate(water.totals, temperature, (BRUCITE,))[1][BRUCITE]

    before = np.broadcast_to(formed[BRUCITE], np.broadcast_shapes(formed[BRUCITE].shape, residual.shape))
    error_before = lacking(before)
    now = np.clip(before + error_before, 0.0, magnesium)
    for _ in range(SEARCH_PASSES):
        error = lacking(now)
        if not np.any((np.abs(error) > SEARCH_TOLERANCE) & ((now > 0) | (error > 0))):
            break
        slope = (error - error_before) / np.where(now == before, np.nan, now - before)
        step = np.where(slope < 0, -error / np.where(slope < 0, slope, -1.0), error)
        before, error_before = now, error
        now = np.clip(now + step, 0.0, magnesium)
    return {carbonate: carbonate_at(now)[1], BRUCITE: now}


def air(
    stream: Stream,
    *,
    approach: ArrayLike | None = None,
    co2: ArrayLike | None = None,
    co2_ppm: ArrayLike = 420.0,
    altitude: ArrayLike = 0.0,
) -> Stream:
    """CO2 exchanged with air; the alkalinity stays.

    Either to a stated ``co2`` [mol/L], or ``approach`` [%] of the way from the CO2 of the water to that in
    equilibrium with air of ``co2_ppm`` (dry, by volume) at ``altitude`` [m].
    """
    system, temperature = stream.system, stream.temperature
    after = system.solve(stream.totals, temperature)
    present = after.concentration("CO2(aq)")
    # The second pass carries the small change of the activity coefficient.
    for _ in range(2):
        coefficient = after.activity_coefficient(0)
        if co2 is None:
            saturated = co2_in_air(temperature, co2_ppm, altitude) / coefficient
            wanted = present + np.asarray(approach, float) / 100 * (saturated - present)
        else:
            wanted = np.asarray(co2, float)
        after, _ = system.equilibrate(stream.totals, temperature, carbon_dioxide=wanted * coefficient)
    return replace(stream, totals=after.totals).flagged(~after.solved, Problem.NOT_SOLVED)


def co2_in_air(temperature: ArrayLike, co2_ppm: ArrayLike = 420.0, altitude: ArrayLike = 0.0) -> np.ndarray:
    """Activity of CO2(aq) [mol/kg] in equilibrium with moist air.

    temperature: of the water, °C; the air at the surface is saturated with moisture. Pressure: standard
    atmosphere (ICAO, from memory). Vapour pressure: 0.61094 exp(17.625 t/(t + 243.04)) kPa (from memory;
    within 0.25 % of IAPWS-97 from 0 to 50 °C).
    """
    temperature = np.asarray(temperature, float)
    pressure = 101.325 * (1 - 2.25577e-5 * np.asarray(altitude, float)) ** 5.25588
    vapour = 0.61094 * np.exp(17.625 * temperature / (temperature + 243.04))
    share = np.asarray(co2_ppm, float) * 1e-6 * (pressure - vapour) / 101.325
    return share * 10.0 ** log_henry_co2(temperature)


def concentrate(stream: Stream, cycles: ArrayLike) -> Stream:
    """Pure water leaves as vapour: everything else stays in ``cycles`` times less water.

    CO2 and chlorine stay too; an air step behind this one lets the CO2 out.
    """
    cycles = np.asarray(cycles, float)
    return replace(
        stream,
        totals=lifted(stream.totals, cycles.ndim) * cycles,
        flow=np.asarray(stream.flow, float) / cycles,
        solids={name: amount * cycles for name, amount in stream.solids.items()},
        floc={name: amount * cycles for name, amount in stream.floc.items()},
    )


def _potential(stream: Stream, solid: str) -> np.ndarray:
    """Calcium carbonate [mol/L] above saturation; negative below."""
    return precipitation_potential(stream.system.solve(stream.totals, stream.temperature), solid)


def _without(stream: Stream, formula: str, moles: ArrayLike) -> Stream:
    """The stream after ``moles`` [mol/L] of a solid have left it; negative: have dissolved."""
    moles = np.asarray(moles, float)
    totals = lifted(stream.totals, moles.ndim)
    vector = _vector(stream.system, formula, totals.ndim)
    return replace(stream, totals=totals - vector * moles)


def _vector(system: System, formula: str, dimensions: int) -> np.ndarray:
    vector = system.zeros((1,) * (dimensions - 1))
    for key, amount in _DISSOLVED[formula].items():
        vector[system.index[key]] = amount
    return vector
