"""Random waters through the engine: ``python -m tests.trust.states [WITHIN] [OUTSIDE] [--digits N]``.

Within the range of validity every state must be solved; outside it must be solved or say why not. What is
solved must balance, by a bookkeeping that is derived here from the published reactions and shares no code
with the engine's; what is not solved must have no number. Any warning of NumPy is an error. Some states are
compared with the same water at fifty digits (:mod:`tests.trust.many_digits`).
"""

import argparse
import sys
import time
import warnings
from collections.abc import Iterator
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from explorer.chemistry import Solution, System
from explorer.chemistry.components import COMPONENT, MASTER_OF
from explorer.chemistry.constants import charge_of, dissolved
from explorer.chemistry.equilibrium import REASONS

from ..chemistry.states import HIGHEST, random_states
from .many_digits import alkalinity_of_a_neutral_water, equilibrium

BATCH = 20_000
VALID_STRENGTH = 0.5
"""mol/L: to where the Davies equation holds."""

BALANCE, SAME_PH, SAME_STRENGTH = 1e-10, 1e-9, 1e-9
"""Allowed: of each balance relative to its size, of pH, of ionic strength and concentrations relative to
themselves."""


@dataclass
class Tally:
    """Findings over many states: how many of which kind, and the largest errors by what they are of."""

    counts: dict[str, int] = field(default_factory=dict)
    worst: dict[str, float] = field(default_factory=dict)

    def count(self, what: str, number: int) -> None:
        self.counts[what] = self.counts.get(what, 0) + int(number)

    def error(self, what: str, errors: NDArray) -> None:
        """Keep the largest; nan, which no error may be, counts as infinite."""
        largest = float(np.nan_to_num(errors, nan=np.inf).max(initial=0.0))
        self.worst[what] = max(self.worst.get(what, 0.0), largest)

    @property
    def faults(self) -> list[str]:
        """What is not as it must be."""
        allowed = {
            "pH": SAME_PH,
            "ionic strength": SAME_STRENGTH,
            "pH at fifty digits": SAME_PH,
            "concentrations at fifty digits": SAME_STRENGTH,
        }
        wrong = [f"{what}: {off:.2g}" for what, off in self.worst.items() if off > allowed.get(what, BALANCE)]
        return wrong + [f"{what}: {n}" for what, n in self.counts.items() if n and what in UNWANTED]


ACID_GROUPS = 10e-6 * 12.011e3
"""eq per mol C: 10 µeq per mg (Oliver, Thurman & Malcolm 1983)."""
END_POINT = 4.5
"""pH at which the alkalinity titration ends: the zero level of the natural organic acids."""

UNWANTED = ("within, not solved", "without a number or a reason", "a number where nothing is solved")


def holdings(species: tuple[str, ...]) -> dict[str, NDArray]:
    """Of each component, how much a mole of each species holds, from the published reactions alone.

    A reaction keeps every component: its stoichiometry times the holdings is zero. The zero-level forms hold
    one of their own; with these given the rest is a system of linear equations.
    """
    reactions = [constant.reaction for constant in dissolved() if constant.used]
    masters = list(MASTER_OF.values())
    others = [name for name in species if name not in masters]
    over = {
        key: np.array([[reaction.get(name, 0) for name in names] for reaction in reactions], dtype=float)
        for key, names in (("others", others), ("masters", masters))
    }
    solved = np.linalg.solve(over["others"], -over["masters"])
    held = np.vstack([np.eye(len(masters)), np.round(solved)])
    assert np.allclose(solved, np.round(solved))
    order = [[*masters, *others].index(name) for name in species]
    return {key: held[order, column] for column, key in enumerate(MASTER_OF)}


def dissociated_at(ph: float) -> float:
    """Charged part of the natural organic acids at a pH, by the published mean acid."""
    return 1 / (1 + 10 ** (0.96 + 0.90 * ph - 0.039 * ph**2 - ph))


class Books:
    """The balances of a system, kept by the holdings above."""

    def __init__(self, system: System) -> None:
        self.system = system
        self.species = system.network.species
        self.held = holdings(self.species)
        self.charges = np.array([charge_of(name) for name in self.species], dtype=float)
        self.inert = {c.key: c.charge for c in COMPONENT.values() if c.master is None and c.charge}

    def audit(self, water: Solution, tally: Tally) -> None:
        """Balances, charge and ionic strength of the solved points."""
        if not water.solved.any():
            return
        at = np.flatnonzero(water.solved)
        amounts = np.stack([water.concentration(name)[at] for name in self.species])
        totals, organic = water.totals[:, at], water.organic_ions[at]
        row = self.system.index
        ends = totals[row["organic_carbon"]] * ACID_GROUPS * dissociated_at(END_POINT)
        for key, counts in self.held.items():
            if key == "alkalinity":
                found, total = organic - ends - counts @ amounts, totals[row[key]]
                size = np.abs(counts) @ amounts + np.abs(organic)
            else:
                found, total = counts @ amounts, totals[row[key]]
                size = np.maximum(total, 1e-300)
            tally.error(f"balance of {key}", np.abs(found - total) / size)
        inert = sum(charge * totals[row[key]] for key, charge in self.inert.items())
        squares = sum(charge**2 * totals[row[key]] for key, charge in self.inert.items())
        sizes = np.abs(self.charges) @ amounts + np.abs(inert) + np.abs(organic)
        charge = self.charges @ amounts + inert - organic
        tally.error("charge", np.abs(charge - water.charge[at]) / sizes)
        # what the totals stand for: the zero-level forms and the inert ions, less the alkalinity
        stands = sum(COMPONENT[key].charge * totals[row[key]] for key in COMPONENT)
        tally.error(
            "charge of the totals", np.abs(charge - stands + totals[row["alkalinity"]] + ends) / sizes
        )
        strength = 0.5 * (self.charges**2 @ amounts + squares + organic)
        tally.error(
            "ionic strength", np.abs(strength - water.ionic_strength[at]) / np.maximum(strength, 1e-300)
        )


def within(system: System, number: int, seed: int, tally: Tally) -> None:
    """States of pH 1–13, 0–60 °C and ionic strength to 0.5 mol/L: each is solved at its pH, and from its
    totals comes back to it."""
    books = Books(system)
    for batch, size in _batches(number):
        totals, temperature, ph = random_states(system, size, seed + batch)
        at_ph = system.solve(totals, temperature, ph=ph)
        valid = ~(at_ph.ionic_strength > VALID_STRENGTH)
        tally.count("within", valid.sum())
        tally.count("beyond 0.5 mol/L", (~valid).sum())
        again = system.solve(at_ph.totals[:, valid], temperature[valid])
        tally.count("within, not solved", (~at_ph.solved).sum() + (~again.solved).sum())
        tally.error("pH", np.abs(again.ph - ph[valid]))
        books.audit(again, tally)


def strange_states(system: System, number: int, seed: int) -> tuple[NDArray, NDArray, NDArray]:
    """Totals, temperatures and pH that no water has: to 5 mol/L, -20 to 100 °C, pH -3 to 17; a tenth of
    them with something negative, infinite, not a number, or nothing at all."""
    rng = np.random.default_rng(seed)
    totals = system.zeros(number)
    for key, highest in HIGHEST.items():
        amount = highest * 10.0 ** rng.uniform(-9.0, 1.6, number)
        amount[rng.random(number) < 1 / 3] = 0.0
        totals[system.index[key]] = np.minimum(amount, 2.5)
    totals[system.index["alkalinity"]] = rng.standard_normal(number) * 10.0 ** rng.uniform(-9.0, 0.3, number)
    temperature, ph = rng.uniform(-20.0, 100.0, number), rng.uniform(-3.0, 17.0, number)
    temperature = np.where(rng.random(number) < 0.6, rng.uniform(0.0, 60.0, number), temperature)
    rows = rng.integers(0, len(totals), number)
    odd = np.array([np.nan, np.inf, -np.inf, -1e-3, -1e-300, 1e300, 5e-324, 1e30])
    hit = np.flatnonzero(rng.random(number) < 0.1)
    totals[rows[hit], hit] = rng.choice(odd, len(hit))
    temperature[rng.random(number) < 0.01] = np.nan
    totals[:, rng.random(number) < 0.01] = 0.0
    totals[:, rng.random(number) < 0.005] = np.nan
    return totals, temperature, ph


def outside(system: System, number: int, seed: int, tally: Tally) -> None:
    """States outside the range: each is solved and balances, or has no number and says why."""
    books = Books(system)
    for batch, size in _batches(number):
        totals, temperature, ph = strange_states(system, size, seed + batch)
        for water in (system.solve(totals, temperature), system.solve(totals, temperature, ph=ph)):
            solved = water.solved
            tally.count("outside, solved", solved.sum())
            for code, words in enumerate(REASONS[1:], start=1):
                tally.count(f"outside, {words}", (water.reason == code).sum())
            numbers = np.isfinite(water.ph) & np.isfinite(water.ionic_strength)
            tally.count("without a number or a reason", (~numbers & (solved | (water.reason == 0))).sum())
            tally.count("a number where nothing is solved", (~solved & ~np.isnan(water.ph)).sum())
            books.audit(water, tally)


def neutral_states(system: System, number: int, seed: int) -> Iterator[tuple[dict[str, float], float]]:
    """Totals (without alkalinity) and temperatures of waters whose charges balance, over all pH."""
    totals, temperature, ph = random_states(system, 4 * number, seed)
    made = system.solve(totals, temperature, ph=ph)
    chosen = np.flatnonzero(made.ionic_strength < VALID_STRENGTH / 2)[:number]
    for point in chosen:
        amounts = {key: float(made.totals[row, point]) for key, row in system.index.items()}
        lacking = float(alkalinity_of_a_neutral_water(amounts)) - amounts.pop("alkalinity")
        amounts["chloride" if lacking > 0 else "sodium"] += abs(lacking)
        yield amounts, float(temperature[point])


def many_digits(system: System, number: int, seed: int, tally: Tally) -> None:
    """Some neutral waters beside the same at fifty digits: pH and every concentration."""
    for amounts, temperature in neutral_states(system, number, seed):
        told = system.totals(alkalinity=float(alkalinity_of_a_neutral_water(amounts)), **amounts)
        water = system.solve(told, temperature)
        # begun with what anybody may know of the water: pH to one place, ionic strength to one figure
        near = round(float(water.ph), 1), float(f"{float(water.ionic_strength):.0e}")
        exact = equilibrium(amounts, temperature, near)
        parts = exact.concentrations.items()
        off = [abs(float(water.concentration(name)) / float(amount) - 1) for name, amount in parts]
        tally.count("at fifty digits", 1)
        tally.error("equations at fifty digits", np.array(float(exact.left) / 1e-40 * BALANCE))
        tally.error("pH at fifty digits", np.array(abs(float(water.ph - exact.ph))))
        tally.error("concentrations at fifty digits", np.array(off))


def _batches(number: int) -> Iterator[tuple[int, int]]:
    """Number of each batch and its size."""
    return ((n, min(BATCH, number - n * BATCH)) for n in range(-(-number // BATCH)))


def tried(inner: int, outer: int, digits: int, seed: int = 0) -> Tally:
    """So many states within and outside the range and at fifty digits, with warnings as errors."""
    tally, system = Tally(), System()
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        within(system, inner, seed, tally)
        outside(system, outer, seed + 1_000_000, tally)
        many_digits(system, digits, seed + 2_000_000, tally)
    return tally


if __name__ == "__main__":
    parser = argparse.ArgumentParser(prog="python -m tests.trust.states", description=__doc__)
    parser.add_argument("within", type=int, nargs="?", default=1_000_000)
    parser.add_argument("outside", type=int, nargs="?", default=100_000)
    parser.add_argument("--digits", type=int, default=40, help="states to compare at fifty digits")
    parser.add_argument("--seed", type=int, default=0)
    options = parser.parse_args()
    began = time.perf_counter()
    found = tried(options.within, options.outside, options.digits, options.seed)
    for what, number in found.counts.items():
        print(f"{what:<60}{number:>12,}")
    for what, off in found.worst.items():
        print(f"largest error, {what:<45}{off:>12.1e}")
    print(f"{time.perf_counter() - began:.0f} s")
    print("\n".join(found.faults) or "nothing is wrong")
    sys.exit(bool(found.faults))
