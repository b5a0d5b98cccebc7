"""Trade units and bases: the one place where field units become mol/L, and back.

Inside, every amount is in mol/L (alkalinity eq/L, TOC mol C/L), flow in m³/h, temperature in °C,
conductivity in µS/cm, dissolved and suspended solids in mg/L. What a unit means depends on the quantity:
"mg/L as CaCO3" of calcium is not that of alkalinity. Each row of the table below therefore says, for one
quantity, which units are allowed, the default first, and how many of that unit make one base unit.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np
from numpy.typing import ArrayLike

from explorer.chemistry.elements import molar_mass

LITRES_PER_US_GALLON = 3.785411784
"""By definition (231 cubic inches)."""


class UnitError(ValueError):
    """A unit that the quantity does not have. ``unit``, ``quantity`` and ``allowed`` are attributes."""

    def __init__(self, unit: str, quantity: str, allowed: tuple[str, ...]) -> None:
        self.unit, self.quantity, self.allowed = unit, quantity, allowed
        name = quantity.replace("_", " ")
        what = f"'{unit}' is not a unit for {name}" if unit else f"the unit of {name} is missing"
        super().__init__(f"{what}; allowed: {', '.join(allowed) or 'none'}")


@dataclass(frozen=True)
class Unit:
    """A linear scale: ``value = base * per_base + zero``."""

    per_base: float
    zero: float = 0.0

    def to_base(self, value: ArrayLike) -> np.ndarray:
        """Base units of a value in this unit; any shape."""
        return (np.asarray(value, float) - self.zero) / self.per_base

    def from_base(self, base: ArrayLike) -> np.ndarray:
        """Value in this unit of an amount in base units; any shape."""
        return np.asarray(base, float) * self.per_base + self.zero


Units = Mapping[str, Unit]
"""The units of one quantity, by name; the first is the default."""


def amount_units(
    default: str, plain: str | None, *bases: str, charge: int = 0, hardness: bool = False, acid: bool = False
) -> Units:
    """Units of a dissolved amount.

    default: the unit offered first. plain: the formula meant by a bare mg/L, or None where a bare mg/L
    would be ambiguous and is refused. bases: formulas allowed in "mg/L as …". charge: equivalents per mole,
    0 where the trade has no meq/L. hardness: counted on the hardness scales. acid: the amount is in
    equivalents of acid (alkalinity), of which calcium carbonate and lime take two.

    Sources: °dH = 10 mg/L CaO, °fH = 10 mg/L CaCO3 (by definition); for alkalinity mmol/L is the acid
    capacity to pH 4.3, 1 mmol of strong acid to the litre.
    """
    per_mole = {"CaCO3": 2, "CaO": 2} if acid else {}
    formulas = {*bases, plain, "CaO", "CaCO3"} - {None}
    mass = {formula: 1000 * molar_mass(formula) / per_mole.get(formula, 1) for formula in formulas}
    units: dict[str, Unit] = {}
    if plain:
        units["mg/L"] = Unit(mass[plain])
        units["µg/L"] = Unit(1000 * mass[plain])
    units |= {f"mg/L as {basis}": Unit(mass[basis]) for basis in bases}
    units["mmol/L"] = Unit(1000.0)
    units["mol/L"] = Unit(1.0)
    if charge:
        units["meq/L"] = Unit(1000.0 * charge)
        units["eq/L"] = Unit(1.0 * charge)
    if hardness:
        units["°dH"] = Unit(mass["CaO"] / 10)
        units["°fH"] = Unit(mass["CaCO3"] / 10)
    return MappingProxyType({default: units[default]} | units)


def substance_units(molar_mass: float) -> Units:
    """Units of a substance known by its molar mass [g/mol] only, such as a weak acid of the user."""
    mass = 1000 * molar_mass
    return MappingProxyType(
        {"mg/L": Unit(mass), "µg/L": Unit(1000 * mass), "mmol/L": Unit(1000.0), "mol/L": Unit(1.0)}
    )


def _plain_units(**per_base: float) -> Units:
    return MappingProxyType({unit: Unit(factor) for unit, factor in per_base.items()})


_MG_PER_L = _plain_units(**{"mg/L": 1.0})
_PERCENT = _plain_units(**{"%": 1.0})
_ALKALINITY = amount_units("mg/L as CaCO3", None, "CaCO3", "HCO3", charge=1, hardness=True, acid=True)
_HARDNESS = amount_units("mg/L as CaCO3", None, "CaCO3", charge=2, hardness=True)
_AMMONIA = amount_units("mg/L as N", "NH4", "N", "NH4", charge=1)
_ALUMINIUM = amount_units("mg/L", "Al", "Al")
_IRON = amount_units("mg/L", "Fe", "Fe")

_QUANTITIES: dict[str, Units] = {
    "ph": _plain_units(**{"": 1.0}),
    "temperature": MappingProxyType({"°C": Unit(1.0), "°F": Unit(1.8, zero=32.0)}),
    "alkalinity": _ALKALINITY,
    "carbonate_alkalinity": _ALKALINITY,
    "dic": amount_units("mg/L as C", "C", "C"),
    "co2": amount_units("mg/L", "CO2", "C"),
    "calcium": amount_units("mg/L", "Ca", "CaCO3", charge=2, hardness=True),
    "magnesium": amount_units("mg/L", "Mg", "CaCO3", charge=2, hardness=True),
    "total_hardness": _HARDNESS,
    "hardness": _HARDNESS,
    "ccpp": _HARDNESS,
    "sodium": amount_units("mg/L", "Na", charge=1),
    "potassium": amount_units("mg/L", "K", charge=1),
    "chloride": amount_units("mg/L", "Cl", charge=1),
    "sulfate": amount_units("mg/L", "SO4", "SO4", "S", charge=2),
    "nitrate": amount_units("mg/L", "NO3", "NO3", "N", charge=1),
    "fluoride": amount_units("mg/L", "F", "F", charge=1),
    "phosphate": amount_units("mg/L as P", "PO4", "P", "PO4"),
    "silica": amount_units("mg/L as SiO2", "SiO2", "SiO2", "Si"),
    "boron": amount_units("mg/L", "B"),
    "ammonia": _AMMONIA,
    "unionised_ammonia": _AMMONIA,
    "free_chlorine": amount_units("mg/L as Cl2", "Cl2", "Cl2"),
    "monochloramine": amount_units("mg/L as Cl2", "Cl2", "Cl2", "N"),
    "sulfite": amount_units("mg/L", "SO3", "S"),
    "thiosulfate": amount_units("mg/L", "S2O3", "S"),
    "acetate": amount_units("mg/L", "C2H4O2"),
    "citrate": amount_units("mg/L", "C6H8O7"),
    "aluminium": _ALUMINIUM,
    "dissolved_aluminium": _ALUMINIUM,
    "iron": _IRON,
    "dissolved_iron": _IRON,
    "organic_carbon": amount_units("mg/L", "C", "C"),
    "toc": amount_units("mg/L", "C", "C"),
    "tds": _MG_PER_L,
    "solids": _MG_PER_L,
    "conductivity": _plain_units(**{"µS/cm": 1.0, "mS/m": 0.1}),
    "buffer_intensity": _plain_units(**{"mmol/L per pH": 1000.0}),
    "flow": _plain_units(
        **{
            "ML/d": 0.024,
            "m³/h": 1.0,
            "m³/d": 24.0,
            "L/s": 1 / 3.6,
            "MGD": 24e-3 / LITRES_PER_US_GALLON,
            "gpm": 1000 / 60 / LITRES_PER_US_GALLON,
        }
    ),
    "share": _PERCENT,
    "fraction": _PERCENT,
    "approach": _PERCENT,
    "strength": _PERCENT,
}


def quantity_units(quantity: str | Units) -> Units:
    """The table of units of a quantity; a table (of a user's weak acid, say) stands for itself.

    Raises KeyError when there is no such quantity.
    """
    return _QUANTITIES[quantity] if isinstance(quantity, str) else quantity


def units_for(quantity: str | Units) -> tuple[str, ...]:
    """Names of the units that the quantity allows, the default first."""
    return tuple(quantity_units(quantity))


def default_unit(quantity: str | Units) -> str:
    """The unit the quantity is shown in unless the user says otherwise."""
    return units_for(quantity)[0]


def find_unit(unit: str, quantity: str | Units) -> Unit:
    """The scale of a named unit. Raises UnitError, naming the allowed ones."""
    units = quantity_units(quantity)
    try:
        return units[unit.replace("\N{GREEK SMALL LETTER MU}", "\N{MICRO SIGN}")]
    except KeyError:
        name = quantity if isinstance(quantity, str) else "this quantity"
        raise UnitError(unit, name, tuple(units)) from None


def to_base(value: ArrayLike, unit: str, quantity: str | Units) -> np.ndarray:
    """Value in base units (mol/L, alkalinity eq/L; m³/h; °C; µS/cm; mg/L of solids), any shape.

    Raises UnitError for a unit that the quantity does not allow.
    """
    return find_unit(unit, quantity).to_base(value)


def from_base(value: ArrayLike, unit: str, quantity: str | Units) -> np.ndarray:
    """Exact inverse of :func:`to_base`."""
    return find_unit(unit, quantity).from_base(value)
