"""The reactions of one system in one basis: every species from the master species.

Each published reaction defines one new species. Substituting the reactions into one another gives, for every
species, its proton and component counts relative to the masters and one log K with its temperature form.
"""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property, lru_cache

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


class LogK:
    """ln K of several species as a function of temperature.

    ``tables``: by held temperature range, the coefficients (species, 5) of the basis functions.
    """

    def __init__(self, tables: Mapping[tuple[float, float], NDArray]) -> None:
        filled = [(key, np.flatnonzero(table.any(axis=1)), table) for key, table in tables.items()]
        self._tables = sorted(filled, key=lambda entry: -len(entry[1]))
        self._size = max((len(table) for table in tables.values()), default=0)
        self._at_one = lru_cache(maxsize=64)(self._evaluate_one)

    @classmethod
    def of(cls, definitions: Sequence[_Definition]) -> "LogK":
        """For species in the order of their definitions."""
        ranges = {key: None for definition in definitions for key in definition.basis}
        return cls({
            key: LN10 * np.array([d.basis.get(key, np.zeros(5)) for d in definitions]) for key in ranges
        })  # fmt: skip

    def rows(self, chosen: NDArray) -> "LogK":
        """The same for some of the species, by their rows."""
        return LogK({key: table[chosen] for key, _, table in self._tables})

    def __call__(self, temperature: NDArray) -> NDArray:
        """(species, *temperature.shape); °C. A batch at one temperature is worked out once."""
        if _is_one(temperature):
            column = self._at_one(float(temperature.flat[0]))
            column = column.reshape(column.shape + (1,) * temperature.ndim)
            return np.broadcast_to(column, (self._size, *temperature.shape))
        return self._evaluate(temperature)

    def row(self, row: int, temperature: NDArray) -> NDArray:
        """Of one species; the shape of ``temperature`` [°C]."""
        if _is_one(temperature):
            return np.broadcast_to(self._at_one(float(temperature.flat[0]))[row], temperature.shape)
        return self.rows(np.array([row]))._evaluate(temperature)[0]

    def _evaluate_one(self, temperature: float) -> NDArray:
        return self._evaluate(np.array(temperature))

    def _evaluate(self, temperature: NDArray) -> NDArray:
        result = None
        for key, used, table in self._tables:
            basis = constants.basis_functions(np.clip(temperature, *key))
            if result is None:
                result = np.tensordot(table, basis, axes=1)
            else:
                result[used] += np.tensordot(table[used], basis, axes=1)
        return np.zeros((self._size, *temperature.shape)) if result is None else result


def _is_one(temperature: NDArray) -> bool:
    return temperature.size > 0 and bool((temperature == temperature.flat[0]).all())


@dataclass(frozen=True)
class Solid:
    """A solid over the masters: ``counts`` (masters,) of one mole; ``saturation(temperature)`` gives ln of
    its ion activity product, written over the masters, at saturation."""

    counts: NDArray
    saturation: Callable[[NDArray], NDArray]


class Network:
    """Species of a system: names, charges, counts over the masters, ln K.

    ``log_k``: formation constants. ``solids``: by name.

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
        self.log_k = LogK.of(list(defined.values()))
        self.solids: dict[str, Solid] = {
            name: self._solid(constant, defined) for name, constant in constants.solids().items()
        }

    def _solid(self, constant: Constant, defined: Mapping[str, _Definition]) -> "Solid":
        (name,) = constant.reaction.keys() - defined.keys() - {"H2O"}
        sign = constant.reaction[name]
        parts = [(-sign * n, defined[s]) for s, n in constant.reaction.items() if s in defined]
        definition = _combine(parts, constant, sign)
        formation = LogK.of([definition])
        counts = np.array([definition.counts.get(master, 0) for master in self.masters], dtype=float)
        return Solid(counts, lambda temperature: -formation(temperature)[0])

    @cached_property
    def composition(self) -> dict[str, dict[str, int]]:
        """Master counts of each species, by name."""
        return {name: dict(d.counts) for name, d in self._definitions.items()}
