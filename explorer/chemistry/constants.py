"""Equilibrium constants: published reactions, their temperature dependence and their pedigree.

The two tables beside this module, ``equilibria.tsv`` (dissolved species) and ``solids.tsv``, hold one row
a reaction *as published*, with source, confidence and the reason of every inclusion or exclusion. This
module reads them and evaluates log K; :mod:`explorer.chemistry.network` brings the reactions into one basis.

Conventions: infinite dilution, molal scale (molal and molar differ by less than 0.5 % in the range used
here), 1 atm, temperature in °C at the boundary and kelvin inside.
"""

import csv
import re
from collections.abc import Iterable
from dataclasses import dataclass, field
from functools import cache
from importlib.resources import files

import numpy as np
from numpy.typing import ArrayLike, NDArray

ZERO_CELSIUS = 273.15
"""K, exact."""
REFERENCE_KELVIN = 298.15
GAS_CONSTANT = 8.314462618e-3
"""kJ/(mol K), CODATA 2018."""
LN10 = float(np.log(10.0))

_CHARGE = re.compile(r"([+-])(\d*)$")
_TERM = re.compile(r"^(\d*)(.+)$")


def charge_of(species: str) -> int:
    """Charge number read from the end of a species name: ``"SO4-2"`` is −2, ``"CaCO3(aq)"`` is 0."""
    match = _CHARGE.search(species)
    return 0 if match is None else int(match[1] + (match[2] or "1"))


def parse_reaction(text: str) -> dict[str, int]:
    """``"A + 2B = C"`` as ``{"A": -1, "B": -2, "C": 1}``."""
    stoichiometry: dict[str, int] = {}
    for side, sign in zip(text.split(" = "), (-1, 1), strict=True):
        for term in side.split(" + "):
            count, name = _TERM.match(term.strip()).groups()
            stoichiometry[name] = stoichiometry.get(name, 0) + sign * int(count or 1)
    return stoichiometry


@dataclass(frozen=True)
class Constant:
    """One reaction with log K = a0 + a1·T + a2/T + a3·log10 T + a4/T² (T in kelvin).

    ``basis`` holds a0…a4, made from enthalpy and heat capacity (van 't Hoff) where no analytic form is
    published. ``hold`` says that the form must not be extrapolated: outside ``low_c``…``high_c`` [°C] the
    value at the nearer end is used.
    """

    name: str
    reaction: dict[str, int] = field(hash=False)
    basis: tuple[float, float, float, float, float]
    low_c: float
    high_c: float
    hold: bool
    used: bool
    source: str
    confidence: str
    confidence_of_temperature: str
    note: str
    text: str

    @property
    def log_k25(self) -> float:
        """log10 K at 25 °C."""
        return float(log_k([self], 25.0)[0])


def van_t_hoff(log_k25: float, enthalpy_kj: float, heat_capacity_j: float = 0.0) -> tuple[float, ...]:
    """Coefficients a0…a4 of a constant known by log K at 25 °C, ΔH [kJ/mol] and ΔCp [J/(mol K)]."""
    rln10 = GAS_CONSTANT * LN10
    slope, curve = enthalpy_kj / rln10, heat_capacity_j * 1e-3 / rln10
    t0 = REFERENCE_KELVIN
    a0 = log_k25 + slope / t0 - curve * (1.0 + np.log(t0))
    return (a0, 0.0, -slope + curve * t0, curve * LN10, 0.0)


def basis_functions(temperature: ArrayLike) -> NDArray:
    """Rows 1, T, 1/T, log10 T, 1/T² for temperatures in °C; shape (5, *temperature.shape)."""
    kelvin = np.asarray(temperature, dtype=float) + ZERO_CELSIUS
    return np.stack([np.ones_like(kelvin), kelvin, 1.0 / kelvin, np.log10(kelvin), kelvin**-2.0])


def log_k(constants: Iterable[Constant], temperature: ArrayLike) -> NDArray:
    """log10 K of each constant; shape (len(constants), *temperature.shape). Temperature in °C."""
    temperature = np.asarray(temperature, dtype=float)
    return np.stack(
        [
            np.tensordot(c.basis, basis_functions(np.clip(temperature, *held_range(c))), axes=1)
            for c in constants
        ]
    )


def held_range(constant: Constant) -> tuple[float, float]:
    """Temperatures [°C] outside which the constant keeps its end value."""
    return (constant.low_c, constant.high_c) if constant.hold else (-np.inf, np.inf)


def _read(file_name: str) -> tuple[Constant, ...]:
    text = files("explorer.chemistry").joinpath(file_name).read_text(encoding="utf-8")
    return tuple(_constant(row) for row in csv.DictReader(text.splitlines(), delimiter="\t"))


def _constant(row: dict[str, str]) -> Constant:
    if row["a0"]:
        basis = tuple(float(row[f"a{i}"]) for i in range(5))
    else:
        basis = van_t_hoff(float(row["log_k25"]), float(row["enthalpy_kj"]), float(row["heat_capacity_j"]))
    return Constant(
        name=row["name"],
        reaction=parse_reaction(row["reaction"]),
        basis=basis,
        low_c=float(row["low_c"]),
        high_c=float(row["high_c"]),
        hold=row["beyond"] == "hold",
        used=row["use"] == "yes",
        source=row["source"],
        confidence=row["confidence"],
        confidence_of_temperature=row["confidence_t"],
        note=row["note"],
        text=row["reaction"],
    )


@cache
def dissolved() -> tuple[Constant, ...]:
    """All rows of the dissolved-species table, those left out (``used`` false) included."""
    return _read("equilibria.tsv")


@cache
def solids() -> dict[str, Constant]:
    """Dissolution constants by solid name."""
    return {constant.name: constant for constant in _read("solids.tsv")}


def log_henry_co2(temperature: ArrayLike) -> NDArray:
    """log10 of CO2 solubility [mol/(kg atm)] at 1 atm total pressure; 0–100 °C.

    Source: Plummer & Busenberg 1982, Geochim. Cosmochim. Acta 46:1011 (abstract seen).
    """
    return np.tensordot(
        (108.3865, 0.01985076, -6919.53, -40.45154, 669365.0), basis_functions(temperature), axes=1
    )
