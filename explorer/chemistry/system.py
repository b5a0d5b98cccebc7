"""A chemical system: its components, and the one question asked of it.

``System.solve`` answers, for many waters at once: given the conserved totals and a temperature, what is the
equilibrium?
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cached_property, lru_cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from . import equilibrium
from .activity import debye_hueckel_slope
from .components import COMPONENT, COMPONENTS, WeakAcid
from .network import LogK, Network
from .newton import Newton, Problem
from .organics import equivalents_per_mole
from .phases import CARBON_DIOXIDE, Phases
from .solution import Solution
from .start import FirstGuess

USUAL_ORGANIC_CHARGE_DENSITY = 10.0
"""µeq per mg C."""


@dataclass(frozen=True)
class Kernel:
    """The part of a system that matters where some masters are absent and some phases are held.

    ``species`` and ``masters``: rows in the network of the species, with their ``log_k``, and of the
    unknowns; ``whole``: the masters with those that the phases fix, for the first guess; ``phases``: what
    is held, with ``carried`` (species, phases) of :meth:`Phases.reduced_counts`.
    """

    species: NDArray
    log_k: LogK
    whole: NDArray
    masters: NDArray
    newton: Newton
    guess: FirstGuess
    phases: Phases
    carried: NDArray


class System:
    """Components and reactions; hold one for a scenario.

    ``acids``: user-defined weak acids, each a further row of the totals. ``organic_charge_density``: acid
    groups of natural organic carbon [µeq/mg C]. ``pairs`` False drops all metal–ligand pairs, to show what
    they do.
    """

    def __init__(
        self,
        acids: Sequence[WeakAcid] = (),
        organic_charge_density: float = USUAL_ORGANIC_CHARGE_DENSITY,
        *,
        pairs: bool = True,
    ) -> None:
        self.acids = tuple(acids)
        self.keys: tuple[str, ...] = COMPONENTS + tuple(acid.id for acid in self.acids)
        self.index: dict[str, int] = {key: row for row, key in enumerate(self.keys)}
        self.network = Network(self.acids, pairs=pairs)
        self.organic_equivalents = equivalents_per_mole(organic_charge_density)
        self._rows = np.array([self.index[key] for key in self.network.master_of])
        self._balance_signs = np.where(self._rows == self.index["alkalinity"], -1.0, 1.0)
        inert = [c for c in COMPONENT.values() if c.master is None and c.charge]
        self._inert_rows = np.array([self.index[c.key] for c in inert])
        self._inert_charges = np.array([c.charge for c in inert], dtype=float)

    def zeros(self, shape: int | tuple[int, ...] = ()) -> NDArray:
        """Totals of pure water: (components, *shape), mol/L."""
        shape = (shape,) if isinstance(shape, int) else shape
        return np.zeros((len(self.keys), *shape))

    def totals(self, **amounts: ArrayLike) -> NDArray:
        """Totals from keyword amounts in mol/L (alkalinity eq/L); the arrays broadcast."""
        arrays = np.broadcast_arrays(*amounts.values()) if amounts else []
        result = self.zeros(arrays[0].shape if arrays else ())
        for key, value in zip(amounts, arrays, strict=True):
            result[self.index[key]] = value
        return result

    def solve(self, totals: ArrayLike, temperature: ArrayLike, *, ph: ArrayLike | None = None) -> Solution:
        """Equilibrium of closed waters.

        ``totals`` (components, *shape) in mol/L, ``temperature`` in °C, broadcastable to ``shape``. With
        ``ph`` given (activity scale) the alkalinity row is ignored and filled in from the answer.

        Points that have no solution (not finite, a negative total, no convergence) are not ``solved``: their
        values are nan and they carry a reason. Never raises for a number; ValueError for a wrong first axis.
        """
        totals, temperature, ph, shape = self._broadcast(totals, temperature, ph)
        return Solution(self, equilibrium.solve(self, totals, temperature, ph), shape)

    def equilibrate(
        self,
        totals: ArrayLike,
        temperature: ArrayLike,
        solids: Sequence[str] = (),
        *,
        carbon_dioxide: ArrayLike | None = None,
    ) -> tuple[Solution, dict[str, NDArray]]:
        """Equilibrium with phases: waters brought to saturation with solids, with a CO2 activity, or both.

        ``solids``: names in :data:`explorer.chemistry.phases.PIVOTS`; each forms or dissolves without limit
        until its saturation index is 0. ``carbon_dioxide``: activity of CO2(aq) to hold, mol/kg. Arrays
        broadcast. Returns the water that is left, and by phase the amount formed [mol/L], negative where it
        dissolved (for the gas: mol/L CO2 lost). For solids that only form, see
        :func:`explorer.chemistry.solids.precipitate`.

        Raises ValueError for solids that cannot be held.
        """
        totals, temperature, gas, shape = self._broadcast(totals, temperature, carbon_dioxide)
        held = tuple(solids) + (() if gas is None else (CARBON_DIOXIDE,))
        answer = equilibrium.solve(self, totals, temperature, held=held, carbon_dioxide=gas)
        formed = {name: answer.formed[name].reshape(shape) for name in held}
        return Solution(self, answer, shape), formed

    def _broadcast(
        self, totals: ArrayLike, temperature: ArrayLike, ph: ArrayLike | None
    ) -> tuple[NDArray, NDArray, NDArray | None, tuple[int, ...]]:
        totals = np.asarray(totals, dtype=float)
        if totals.ndim == 0 or totals.shape[0] != len(self.keys):
            raise ValueError(f"totals need {len(self.keys)} rows, one a component; got shape {totals.shape}")
        others = [np.asarray(temperature, dtype=float)] + (
            [] if ph is None else [np.asarray(ph, dtype=float)]
        )
        shape = np.broadcast_shapes(totals.shape[1:], *(a.shape for a in others))
        flat = [np.broadcast_to(a, shape).ravel() for a in others]
        extra = len(shape) - (totals.ndim - 1)
        totals = totals.reshape(totals.shape[:1] + (1,) * extra + totals.shape[1:])
        totals = np.broadcast_to(totals, (len(self.keys), *shape)).reshape(len(self.keys), -1).copy()
        return totals, flat[0], flat[1] if ph is not None else None, shape

    def masters_in(self, totals: NDArray) -> NDArray:
        """Totals (components, N) as balances of the masters (masters, N): the proton row is −alkalinity."""
        return totals[self._rows] * self._balance_signs[:, None]

    def inert_charge(self, totals: NDArray) -> NDArray:
        """Charge [eq/L] of the ions that form no species, for totals (components, N)."""
        return self._inert_charges @ totals[self._inert_rows]

    def removed(self, totals: NDArray, counts: NDArray, amount: NDArray) -> NDArray:
        """Totals (components, N) less ``amount`` (N,) mol/L of something with ``counts`` (masters,)."""
        totals = totals.copy()
        totals[self._rows] -= np.outer(counts * self._balance_signs, amount)
        return totals

    def problem(
        self, kernel: Kernel, totals: NDArray, temperature: NDArray, ph: NDArray | None = None
    ) -> Problem:
        """The flat batch as the iteration wants it, over the masters of a kernel that holds no phases."""
        return Problem(
            log_k=kernel.log_k(temperature),
            totals=self.masters_in(totals)[kernel.masters],
            slope=debye_hueckel_slope(temperature),
            inert=0.5 * self._inert_charges**2 @ totals[self._inert_rows],
            organic=self.organic_equivalents * totals[self.index["organic_carbon"]],
            ph=ph,
        )

    @cached_property
    def kernel(self) -> Callable[[tuple[bool, ...], tuple[str, ...]], Kernel]:
        """``kernel(present, held)`` for the masters present and the phases held."""
        return lru_cache(maxsize=64)(self._kernel)

    def _kernel(self, present: tuple[bool, ...], held: tuple[str, ...]) -> Kernel:
        phases = Phases.of(self.network, held)
        there = np.array(present) | (phases.counts != 0.0).any(axis=0)
        species = np.flatnonzero(~(self.network.counts[:, ~there] != 0.0).any(axis=1))
        counts, carried = phases.reduced_counts(self.network.counts[species])
        whole = np.flatnonzero(there)
        guess = FirstGuess(self.network, [self.network.masters[m] for m in whole])
        there[phases.pivots] = False
        masters = np.flatnonzero(there)
        newton = Newton(counts[:, masters], self.network.charges[species])
        return Kernel(
            species, self.network.log_k.rows(species), whole, masters, newton, guess, phases, carried
        )
