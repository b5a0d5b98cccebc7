"""Atomic weights and molar masses.

Source: IUPAC 2021 standard atomic weights, abridged values.
"""

import re
from functools import lru_cache

ATOMIC_WEIGHT: dict[str, float] = {
    "H": 1.008,
    "B": 10.81,
    "C": 12.011,
    "N": 14.007,
    "O": 15.999,
    "F": 18.998403162,
    "Na": 22.98976928,
    "Mg": 24.305,
    "Al": 26.9815384,
    "Si": 28.085,
    "P": 30.973761998,
    "S": 32.06,
    "Cl": 35.45,
    "K": 39.0983,
    "Ca": 40.078,
    "Mn": 54.938043,
    "Fe": 55.845,
    "Cu": 63.546,
    "Zn": 65.38,
    "Br": 79.904,
    "Sr": 87.62,
    "Ba": 137.327,
    "Pb": 207.2,
}
"""g/mol by element symbol."""

_TOKEN = re.compile(r"([A-Z][a-z]?)(\d*)|(\()|(\))(\d*)")


@lru_cache(maxsize=512)
def molar_mass(formula: str) -> float:
    """Molar mass [g/mol] of a formula such as ``"Al2(SO4)3·14H2O"``.

    Charges are not written (the electron's mass is neglected): sulfate is ``"SO4"``.

    Raises ValueError for an unknown element or a formula that cannot be read.
    """
    if not formula:
        raise ValueError("an empty formula has no molar mass")
    return sum(_part(part, formula) for part in formula.split("·"))


def _part(part: str, formula: str) -> float:
    """Mass of one part of a formula between raised dots, leading multiplier included."""
    number = re.match(r"\d*", part).group()
    sums, position = [0.0], len(number)
    while position < len(part):
        token = _TOKEN.match(part, position)
        if token is None or (token[1] and token[1] not in ATOMIC_WEIGHT) or (token[4] and len(sums) == 1):
            raise ValueError(f"{formula} cannot be read as a formula near '{part[position:]}'")
        if token[1]:
            sums[-1] += ATOMIC_WEIGHT[token[1]] * int(token[2] or 1)
        elif token[3]:
            sums.append(0.0)
        else:
            group = sums.pop()
            sums[-1] += group * int(token[5] or 1)
        position = token.end()
    if len(sums) != 1 or sums[0] == 0.0:
        raise ValueError(f"{formula} cannot be read as a formula")
    return int(number or 1) * sums[0]
