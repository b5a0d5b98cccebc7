"""The answer of a system for a batch of waters: pH, species, activities, buffer intensity, saturation.

Everything is worked out when asked for; a solution itself holds only the activities of the masters and the
ionic strength.
"""

from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from . import equilibrium
from .activity import davies, debye_hueckel_slope, neutral
from .components import FAMILIES, PROTON
from .constants import LN10
from .newton import ABSENT
from .organics import END_POINT_FRACTION, dissociated

HIGHEST_CHARGE = 4
BLOCK = 4096
"""Points for which a quantity of all species is held in memory at once."""

if TYPE_CHECKING:
    from .system import System


class Solution:
    """Equilibrium of waters of any shape. Arrays have ``shape``; points without a solution are nan.

    ``totals`` (components, *shape), in mol/L, alkalinity in eq/L: as given, or with the alkalinity found
    where the pH was given."""

    def __init__(self, system: "System", answer: equilibrium.Equilibrium, shape: tuple[int, ...]) -> None:
        self.system, self.shape = system, shape
        self._answer = answer
        self._index = system.network.index

    def _shaped(self, flat: NDArray) -> NDArray:
        return flat.reshape(flat.shape[:-1] + self.shape)

    @property
    def solved(self) -> NDArray:
        """Which points have a solution; bool."""
        return self._shaped(self._answer.reason == equilibrium.SOLVED)

    @property
    def reason(self) -> NDArray:
        """Codes into :data:`explorer.chemistry.equilibrium.REASONS`; 0 where solved."""
        return self._shaped(self._answer.reason)

    @property
    def temperature(self) -> NDArray:
        """°C."""
        return self._shaped(self._answer.temperature)

    @cached_property
    def ph(self) -> NDArray:
        """−log10 of the activity of H+."""
        return -self.log_activity(PROTON)

    @property
    def ionic_strength(self) -> NDArray:
        """mol/L."""
        return self._shaped(self._answer.strength)

    @cached_property
    def totals(self) -> NDArray:
        """mol/L, by component."""
        totals = self._answer.totals
        if self._answer.fixed_ph:
            totals = totals.copy()
            totals[self.system.index["alkalinity"]] = self._alkalinity
        return self._shaped(totals)

    @property
    def species(self) -> tuple[str, ...]:
        """Names of all dissolved species."""
        return self.system.network.species

    @cached_property
    def _log_gamma(self) -> NDArray:
        """ln activity coefficient; (charge magnitude, N)."""
        factor, _ = davies(debye_hueckel_slope(self._answer.temperature), self._answer.strength)
        uncharged, _ = neutral(self._answer.strength)
        return np.stack([uncharged, *(-float(z * z) * factor for z in range(1, HIGHEST_CHARGE + 1))])

    @cached_property
    def _log_k(self) -> NDArray:
        """ln K of all species; (species, N). Only for small batches, as it is large."""
        return self.system.network.log_k(self._answer.temperature)

    def _log_activity(self, species: str) -> NDArray:
        network, row = self.system.network, self._index[species]
        counts = network.counts[row]
        used = np.flatnonzero(counts)
        small = len(self._answer.strength) <= BLOCK
        log_k = self._log_k[row] if small else network.log_k.row(row, self._answer.temperature)
        return log_k + counts[used] @ self._answer.x[used]

    def _concentration(self, species: str) -> NDArray:
        charge = abs(int(self.system.network.charges[self._index[species]]))
        return np.exp(self._log_activity(species) - self._log_gamma[charge])

    def _weighted(self, weights: NDArray) -> NDArray:
        """Σ weight × concentration over all species, flat; ``weights`` (species,)."""
        network, answer = self.system.network, self._answer
        rows = np.flatnonzero(weights)
        log_k = network.log_k.rows(rows)
        charges = np.abs(network.charges[rows]).astype(int)
        total = np.empty(len(answer.strength))
        for first in range(0, len(total), BLOCK):
            some = slice(first, first + BLOCK)
            log_c = network.counts[rows] @ answer.x[:, some] - self._log_gamma[charges, some]
            log_c += log_k(answer.temperature[some])
            total[some] = weights[rows] @ np.exp(log_c)
        return total

    def log_activity(self, species: str) -> NDArray:
        """log10 activity of a species; below −1000 where a component is absent. KeyError if unknown."""
        return self._shaped(self._log_activity(species) / LN10)

    def activity(self, species: str) -> NDArray:
        """Activity of a species, molal scale. KeyError if unknown."""
        return self._shaped(np.exp(self._log_activity(species)))

    def concentration(self, species: str) -> NDArray:
        """mol/L of a species. KeyError if unknown."""
        return self._shaped(self._concentration(species))

    def activity_coefficient(self, charge: int) -> NDArray:
        """γ of a species with this charge number."""
        return self._shaped(np.exp(self._log_gamma[abs(charge)]))

    def family(self, name: str) -> dict[str, NDArray]:
        """Concentrations [mol/L] of all species that hold a component, most protonated first.

        ``name``: a key of :data:`explorer.chemistry.components.FAMILIES` or the id of a user-defined acid.
        A species that holds n of it counts n-fold in shares; KeyError if unknown.
        """
        return {species: self.concentration(species) for species in self.family_species(name)}

    def family_species(self, name: str) -> tuple[str, ...]:
        """Names of the species of a family, free forms by falling proton count, then pairs."""
        composition = self.system.network.composition
        master = self.system.network.master_of[FAMILIES.get(name, name)]
        names = [species for species in self.species if master in composition[species]]
        free = {s for s in names if composition[s].keys() <= {PROTON, master}}
        return tuple(sorted(names, key=lambda s: (s not in free, -composition[s].get(PROTON, 0))))

    @cached_property
    def _organic_ions(self) -> NDArray:
        groups = self.system.organic_equivalents * self._answer.totals[self.system.index["organic_carbon"]]
        return groups * dissociated(-self._answer.x[0] / LN10)[0]

    @property
    def organic_ions(self) -> NDArray:
        """Charge of natural organic acids, eq/L."""
        return self._shaped(self._organic_ions)

    @cached_property
    def _alkalinity(self) -> NDArray:
        total = self._weighted(-self.system.network.counts[:, 0])
        groups = self.system.organic_equivalents * self._answer.totals[self.system.index["organic_carbon"]]
        return total + self._organic_ions - END_POINT_FRACTION * groups

    @property
    def carbonate_alkalinity(self) -> NDArray:
        """HCO3- + 2 CO3-2 with their pairs, eq/L."""
        composition = self.system.network.composition
        return sum(
            -composition[species].get(PROTON, 0) * amount
            for species, amount in self.family("carbonate").items()
            if composition[species].get(PROTON, 0)
        )

    @cached_property
    def charge(self) -> NDArray:
        """Residual charge of the water as analysed, eq/L: dissolved ions, inert ions and organic acids."""
        total = self._weighted(self.system.network.charges)
        total = total + self.system.inert_charge(self._answer.totals) - self._organic_ions
        return self._shaped(total)

    @cached_property
    def buffer_intensity(self) -> NDArray:
        """d(alkalinity)/d(pH) at constant totals and temperature, eq/L per pH, from the balance matrix."""
        return self._shaped(equilibrium.buffer_intensity(self.system, self._answer))

    def saturation_index(self, solid: str) -> NDArray:
        """log10(ion activity product / solubility product); nan where a component is absent.

        ``solid``: a key of :func:`explorer.chemistry.constants.solids`; KeyError if unknown.
        """
        definition = self.system.network.solids[solid]
        present = (self._answer.x[definition.counts != 0.0] > ABSENT / 2).all(axis=0)
        index = (definition.counts @ self._answer.x - definition.saturation(self._answer.temperature)) / LN10
        return self._shaped(np.where(present, index, np.nan))
