"""The reactions of one system in one basis: every species from the master species.

Each published reaction defines one new species. Substituting the reactions into one another gives, for every
species, its proton and component counts relative to the masters and one log K with its temperature form.
"""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from . import constants
from .components import MASTER_OF, PROTON, WeakAcid
from .constants import LN10, Constant


@dataclass(frozen=True)
class _Definition:
    """A species as masters and, per held temperature range, the coefficients of its log K."""

    counts: dict[str, int]
    basis: dict[tuple[float, float], NDArray]


def _master(name: str) -> _Definition:
    return _Definition({name: 1}, {})


def _combine(parts: Sequence[tuple[int, _Definition]], constant: Constant, sign: int) -> _Definition:
    counts: dict[str, int] = {}
    basis: dict[tuple[float, float], NDArray] = {
        constants.held_range(constant): sign * np.array(constant.basis, dtype=float)
    }
    for factor, part in parts:
        for name, count in part.counts.items():
            counts[name] = counts.get(name, 0) + factor * count
        for key, value in part.basis.items():
            basis[key] = basis.get(key, 0.0) + factor * value
    return _Definition({name: count for name, count in counts.items() if count}, basis)


def _acid_constants(acid: WeakAcid) -> list[Constant]:
    enthalpies = acid.enthalpy_kj or (0.0,) * len(acid.pka)
    return [
        Constant(
            name=acid.form(lost + 1),
            reaction={acid.form(lost): -1, PROTON: 1, acid.form(lost + 1): 1},
            basis=constants.van_t_hoff(-pka, enthalpy),
            low_c=0.0, high_c=60.0, hold=False, used=True,
            source="entered", confidence="entered", confidence_of_temperature="entered", note="", text="",
        )
        for lost, (pka, enthalpy) in enumerate(zip(acid.pka, enthalpies, strict=True))
    ]  # fmt: skip


def _evaluator(definitions: Sequence[Mapping[tuple[float, float], NDArray]]) -> Callable[[NDArray], NDArray]:
    """Function of temperature [°C] giving ln K of several definitions, one row each."""
    ranges = sorted({key for basis in definitions for key in basis})
    tables = [LN10 * np.array([basis.get(key, np.zeros(5)) for basis in definitions]) for key in ranges]

    def evaluate(temperature: NDArray) -> NDArray:
        return sum(
            np.tensordot(table, constants.basis_functions(np.clip(temperature, *key)), axes=1)
            for key, table in zip(ranges, tables, strict=True)
        )

    return evaluate


@dataclass(frozen=True)
class Solid:
    """A solid over the masters: ``counts`` (masters,) of one mole; ``saturation(temperature)`` gives ln of
    its ion activity product, written over the masters, at saturation."""

    counts: NDArray
    saturation: Callable[[NDArray], NDArray]


class Network:
    """Species of a system: names, charges, counts over the masters, ln K.

    ``log_k(temperature)``: natural log of the formation constant of every species, (species,
    *temperature.shape), °C. ``solids``: by name.

    ``species``: names, masters first. ``masters``: names, H+ first. ``counts``: (species, masters).
    ``charges``: (species,). ``pairs`` False leaves every metal–ligand pair out; it exists to show what the
    pairs do and is never used for results.
    """

    def __init__(self, acids: Sequence[WeakAcid] = (), *, pairs: bool = True) -> None:
        self.master_of = MASTER_OF | {acid.id: acid.form(0) for acid in acids}
        self.masters: tuple[str, ...] = tuple(self.master_of.values())
        defined = {"H2O": _Definition({}, {})} | {name: _master(name) for name in self.masters}
        rows = [c for c in constants.dissolved() if c.used]
        rows += [constant for acid in acids for constant in _acid_constants(acid)]
        for constant in rows:
            sign = constant.reaction[constant.name]
            parts = [(-sign * n, defined[s]) for s, n in constant.reaction.items() if s != constant.name]
            defined[constant.name] = _combine(parts, constant, sign)
        del defined["H2O"]
        if not pairs:
            metals = {"Ca+2", "Mg+2", "Na+", "K+"}
            defined = {n: d for n, d in defined.items() if n in metals or not metals & d.counts.keys()}
        self._definitions = defined
        self.species: tuple[str, ...] = tuple(defined)
        self.index: dict[str, int] = {name: i for i, name in enumerate(self.species)}
        self.counts: NDArray = np.array(
            [[d.counts.get(m, 0) for m in self.masters] for d in defined.values()], dtype=float
        )
        self.charges: NDArray = np.array([constants.charge_of(name) for name in self.species], dtype=float)
        master_charge = np.array([constants.charge_of(name) for name in self.masters])
        unbalanced = np.flatnonzero(self.charges != self.counts @ master_charge)
        if unbalanced.size:
            raise ValueError(f"{self.species[unbalanced[0]]}: the charge of its reaction does not balance")
        self.log_k: Callable[[NDArray], NDArray] = _evaluator([d.basis for d in defined.values()])
        self.solids: dict[str, Solid] = {
            name: self._solid(constant, defined) for name, constant in constants.solids().items()
        }

    def _solid(self, constant: Constant, defined: Mapping[str, _Definition]) -> "Solid":
        (name,) = constant.reaction.keys() - defined.keys() - {"H2O"}
        sign = constant.reaction[name]
        parts = [(-sign * n, defined[s]) for s, n in constant.reaction.items() if s in defined]
        definition = _combine(parts, constant, sign)
        formation = _evaluator([definition.basis])
        counts = np.array([definition.counts.get(master, 0) for master in self.masters], dtype=float)
        return Solid(counts, lambda temperature: -formation(temperature)[0])

    @cached_property
    def composition(self) -> dict[str, dict[str, int]]:
        """Master counts of each species, by name."""
        return {name: dict(d.counts) for name, d in self._definitions.items()}
