"""Equilibrium of one water at fifty digits, written down again from the published equations: a reference.

It shares the tables of published reactions with the engine and nothing else: the species are composed here,
log K, the Davies equation and the organic acids are evaluated here with mpmath, and the pH follows from
electroneutrality, of which the engine knows nothing (it keeps an alkalinity). The root is found by mpmath's
general solver.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from mpmath import exp, findroot, log, log10, mp, mpf, sqrt

from explorer.chemistry.constants import Constant, charge_of, dissolved

DIGITS = 50

ZERO_LEVEL = {
    "dic": "CO2(aq)", "calcium": "Ca+2", "magnesium": "Mg+2", "sodium": "Na+", "potassium": "K+",
    "sulfate": "SO4-2", "fluoride": "F-", "phosphate": "H2PO4-", "silica": "H4SiO4", "boron": "B(OH)3",
    "ammonia": "NH4+", "free_chlorine": "HOCl", "sulfite": "HSO3-", "acetate": "CH3COOH", "citrate": "H3Cit",
    "aluminium": "Al+3", "iron": "Fe+3",
}  # fmt: skip
"""The form of each component at the zero level of the alkalinity."""

INERT = {"chloride": -1, "nitrate": -1, "thiosulfate": -2}
"""Charge of the components that form no other species."""

ACID_GROUPS = mpf("10e-6") * mpf("12.011e3")
"""eq of natural organic acids per mol of organic carbon (Oliver, Thurman & Malcolm 1983)."""


@dataclass(frozen=True)
class Reference:
    """pH (activity), ionic strength [mol/L], concentrations [mol/L] by species, and what is ``left`` of the
    equations, relative, at the root."""

    ph: mpf
    strength: mpf
    concentrations: dict[str, mpf]
    left: mpf


def dissociated(ph: mpf) -> mpf:
    """Charged part of the natural organic acids: pK = 0.96 + 0.90 pH − 0.039 pH²."""
    return 1 / (1 + mpf(10) ** (mpf("0.96") + mpf("0.90") * ph - mpf("0.039") * ph**2 - ph))


def alkalinity_of_a_neutral_water(totals: Mapping[str, float]) -> mpf:
    """eq/L that the engine is to be told for a water whose charges balance: that of all zero-level forms and
    inert ions, less that of the organic acids at the end of the titration, pH 4.5."""
    charge = sum(charge_of(name) * mpf(totals.get(key, 0)) for key, name in ZERO_LEVEL.items())
    charge += sum(number * mpf(totals.get(key, 0)) for key, number in INERT.items())
    return charge - ACID_GROUPS * mpf(totals.get("organic_carbon", 0)) * dissociated(mpf("4.5"))


def log_k(constant: Constant, celsius: mpf) -> mpf:
    """log10 K = a0 + a1 T + a2/T + a3 log10 T + a4/T², T in kelvin, held at the ends where the table says."""
    if constant.hold:
        celsius = min(max(celsius, mpf(constant.low_c)), mpf(constant.high_c))
    kelvin = celsius + mpf("273.15")
    a0, a1, a2, a3, a4 = map(mpf, constant.basis)
    return a0 + a1 * kelvin + a2 / kelvin + a3 * log10(kelvin) + a4 / kelvin**2


def composed(celsius: mpf) -> dict[str, tuple[dict[str, int], mpf]]:
    """By species: how many of H+ and of the zero-level forms it is made of, and ln of its constant."""
    known: dict[str, tuple[dict[str, int], mpf]] = {"H2O": ({}, mpf(0)), "H+": ({"H+": 1}, mpf(0))}
    known |= {name: ({name: 1}, mpf(0)) for name in ZERO_LEVEL.values()}
    for constant in (one for one in dissolved() if one.used):
        sign = constant.reaction[constant.name]
        counts, ln_k = {}, sign * log_k(constant, celsius) * log(10)
        for name, number in constant.reaction.items():
            if name != constant.name:
                parts, part = known[name]
                ln_k -= sign * number * part
                for one, count in parts.items():
                    counts[one] = counts.get(one, 0) - sign * number * count
        known[constant.name] = ({one: count for one, count in counts.items() if count}, ln_k)
    del known["H2O"]
    return known


def equilibrium(totals: Mapping[str, float], temperature: float, near: tuple[float, float]) -> Reference:
    """The electroneutral water with these totals [mol/L, no alkalinity] at °C.

    near: pH and ionic strength to begin with; a tenth of a pH and a tenth of the strength are near enough.
    """
    with mp.workdps(DIGITS):
        celsius = mpf(temperature)
        total = {form: mpf(totals[key]) for key, form in ZERO_LEVEL.items() if totals.get(key)}
        there = {"H+", *total}
        species = {name: made for name, made in composed(celsius).items() if made[0].keys() <= there}
        names = list(total)
        inert = [(number, mpf(totals.get(key, 0))) for key, number in INERT.items()]
        organic = ACID_GROUPS * mpf(totals.get("organic_carbon", 0))
        slope = mpf("0.49054") + mpf("0.0006663") * celsius + mpf("4.1e-6") * celsius**2

        def amounts(ph: mpf, strength: mpf, free: Mapping[str, mpf]) -> dict[str, mpf]:
            """Concentrations from ln activities of the zero-level forms: Davies, 0.1 I where neutral."""
            root = sqrt(strength)
            factor = slope * (root / (1 + root) - mpf("0.3") * strength)
            at = {"H+": -ph * log(10), **free}
            found = {}
            for name, (counts, ln_k) in species.items():
                charge = charge_of(name)
                log_gamma = -factor * charge**2 if charge else strength / 10
                ln_activity = ln_k + sum(count * at[one] for one, count in counts.items())
                found[name] = exp(ln_activity - log_gamma * log(10))
            return found

        def equations(ph: mpf, ln_strength: mpf, *free: mpf) -> list[mpf]:
            """Electroneutrality, ionic strength, and the balance of every component; all relative."""
            strength = exp(ln_strength)
            found = amounts(ph, strength, dict(zip(names, free, strict=True)))
            ions = [(charge_of(name), amount) for name, amount in found.items()] + inert
            ions.append((-1, organic * dissociated(ph)))
            neutral = sum(charge * amount for charge, amount in ions) / sum(abs(c) * a for c, a in ions)
            ionic = log(sum(charge**2 * amount for charge, amount in ions) / 2) - ln_strength
            balances = [
                log(sum(species[name][0].get(one, 0) * amount for name, amount in found.items()) / total[one])
                for one in names
            ]
            return [neutral, ionic, *balances]

        start = _start(names, total, species, mpf(near[0]), mpf(near[1]), amounts)
        root = findroot(equations, (mpf(near[0]), log(mpf(near[1])), *start), tol=mpf(10) ** -70, maxsteps=60)
        ph, strength = root[0], exp(root[1])
        left = max(map(abs, equations(*root)))
        return Reference(ph, strength, amounts(ph, strength, dict(zip(names, root[2:], strict=True))), left)


def _start(
    names: list[str],
    total: Mapping[str, mpf],
    species: Mapping[str, tuple[dict[str, int], mpf]],
    ph: mpf,
    strength: mpf,
    amounts: Callable[[mpf, mpf, Mapping[str, mpf]], dict[str, mpf]],
) -> list[mpf]:
    """ln activities to begin with: one component after the other is brought to its balance, repeatedly."""
    free = {name: log(total[name]) for name in names}
    for _ in range(400):
        found = amounts(ph, strength, free)
        off = 0
        for one in names:
            held = [(species[name][0].get(one, 0), amount) for name, amount in found.items()]
            highest = max(count for count, amount in held if amount)
            change = log(sum(count * amount for count, amount in held) / total[one]) / (2 * highest)
            free[one] -= change
            off = max(off, abs(change))
        if off < mpf("1e-2"):
            break
    return [free[name] for name in names]
