"""Treatment chemicals: what a dose adds to the totals, and how doses and products are written.

A chemical is a vector on the totals. Everything else here is bookkeeping: the units a dose may be given in,
the strength and density of the product, what to beware of, and where each figure comes from. The chemicals
of the catalogue and those a user defines are read by the same function.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from explorer.chemistry import System
from explorer.chemistry.components import COMPONENT
from explorer.chemistry.elements import molar_mass
from explorer.treatment.catalogue import COMMON_PRACTICE, ENTRIES, MEMORY, SETTINGS
from explorer.treatment.units import UnitError

PRODUCT = "mg/L as product"
EQUIVALENTS = "meq/L"

_FIELDS = {
    "name", "formula", "molar_mass", "adds", "plain", "counted_as", "default_unit", "strength", "density",
    "density_source", "hazards", "note", "source", "like",
}  # fmt: skip
_CHARGE_TOLERANCE = 1e-6
_BEYOND = 1.1

WATER_DENSITY = 0.9982
"""kg/L at 20 °C, the density at no strength (IAPWS-95)."""


class ChemicalError(ValueError):
    """A definition of a chemical that cannot be used: ``field`` and ``message`` in one sentence."""

    def __init__(self, field: str, message: str) -> None:
        self.field, self.message = field, message
        super().__init__(f"{field}: {message}")


@dataclass(frozen=True)
class Chemical:
    """One treatment chemical.

    molar_mass: g/mol of ``formula``. totals: mol (alkalinity: eq) added per mol. usual_strength: percent by
    mass, of the substance that a plain mg/L means. usual_density: kg/L at that strength. densities: kg/L by
    strength. units: mol of chemical per litre in one unit of dose ("mg/L as product" at usual strength).
    """

    key: str
    name: str
    formula: str
    molar_mass: float
    totals: Mapping[str, float]
    usual_strength: float | None
    usual_density: float | None
    default_unit: str
    units: Mapping[str, float]
    hazards: tuple[str, ...] = ()
    sources: Mapping[str, str] = field(default_factory=dict)
    note: str = ""
    plain: str = ""
    densities: tuple[tuple[float, float], ...] = ()


def chemical_from_dict(
    key: str, data: Mapping[str, Any], extra_components: Mapping[str, float] = MappingProxyType({})
) -> Chemical:
    """A chemical from its definition; the fields are those of :mod:`explorer.treatment.catalogue`.

    ``formula`` or ``molar_mass`` [g/mol], and ``adds``, are required; the alkalinity follows from the charge
    of what is added and is checked when given. ``like`` starts from a catalogue chemical, whose setting
    (basicity, ratio) and other fields may then be overridden. extra_components: charge of the zero level of
    the user's acids, by id.

    Raises ChemicalError naming the field.
    """
    data = _inherit(dict(data))
    name = _text(data, "name", key.replace("_", " ").capitalize())
    formula = _text(data, "formula", "")
    mass = _molar_mass(data, formula)
    totals = _additions(data, extra_components)
    counted = _amounts(data.get("counted_as", {}), "counted_as")
    plain = _text(data, "plain", formula)
    masses = {f"mg/L as {basis}": 1000 * n * _mass_of(basis, "counted_as") for basis, n in counted.items()}
    plain_mass = masses.get(f"mg/L as {plain}", 1000 * mass)
    units = {"mg/L": 1 / plain_mass} | {unit: 1 / mass for unit, mass in masses.items()}
    units |= {"mmol/L": 1e-3, "mol/L": 1.0}
    if "CaCO3" in counted:
        units[EQUIVALENTS] = 1e-3 / (2 * counted["CaCO3"])
    strength = data.get("strength")
    if strength is not None:
        strength = _number(strength, "strength", 0, 100)
        if strength == 0:
            raise ChemicalError("strength", "0 is no product; allowed above 0 to 100 percent")
        units[PRODUCT] = units["mg/L"] * strength / 100
    default_unit = _text(data, "default_unit", "mg/L")
    if default_unit not in units:
        allowed = ", ".join(units)
        raise ChemicalError("default_unit", f"'{default_unit}' is no unit of this dose; allowed: {allowed}")
    densities = _densities(data.get("density"), strength)
    usual_density = float(_interpolate(densities, strength)) if densities and strength else np.nan
    return Chemical(
        key=key,
        name=name,
        formula=formula,
        molar_mass=mass,
        totals=MappingProxyType(totals),
        usual_strength=strength,
        usual_density=None if np.isnan(usual_density) else usual_density,
        default_unit=default_unit,
        units=MappingProxyType(units),
        hazards=tuple(data.get("hazards", ())),
        sources=MappingProxyType(_sources(data)),
        note=_text(data, "note", ""),
        plain=plain,
        densities=densities,
    )


def with_setting(key: str, value: float) -> Chemical:
    """A catalogue chemical with its setting changed: basicity [%] of polyaluminium chloride, ratio of
    sodium silicate.

    Raises ChemicalError where the chemical has no setting or the value is out of range.
    """
    if key not in SETTINGS:
        raise ChemicalError("like", f"{key} has no setting; allowed: {', '.join(SETTINGS)}")
    setting = SETTINGS[key]
    return chemical_from_dict(key, {"like": key, setting.name: value})


def dose_moles(
    chemical: Chemical, value: ArrayLike, unit: str, strength: ArrayLike | None = None
) -> np.ndarray:
    """Dose in mol/L from a dose in a trade unit; any shape.

    strength: percent by mass of the product, where it is not the usual one; it matters to "mg/L as product"
    only. Raises UnitError naming the allowed units.
    """
    return np.asarray(value, float) * _moles_per_unit(chemical, unit, strength)


def dose_in(chemical: Chemical, moles: ArrayLike, unit: str, strength: ArrayLike | None = None) -> np.ndarray:
    """Exact inverse of :func:`dose_moles`: a dose of mol/L in a trade unit."""
    return np.asarray(moles, float) / _moles_per_unit(chemical, unit, strength)


def _moles_per_unit(chemical: Chemical, unit: str, strength: ArrayLike | None) -> ArrayLike:
    if unit == PRODUCT and strength is not None:
        return chemical.units["mg/L"] * (np.asarray(strength, float) / 100)
    try:
        return chemical.units[unit]
    except KeyError:
        raise UnitError(unit, f"a dose of {chemical.name.lower()}", tuple(chemical.units)) from None


def titration_units(chemical: Chemical) -> tuple[str, ...]:
    """Units in which a chemical may be titrated: those of a dose, and meq/L of its alkalinity."""
    units = tuple(chemical.units)
    return units if EQUIVALENTS in units or not chemical.totals.get("alkalinity") else (*units, EQUIVALENTS)


def titrant_moles(chemical: Chemical, value: ArrayLike, unit: str) -> np.ndarray:
    """Dose in mol/L from one in a unit of :func:`titration_units`; any shape. Raises UnitError."""
    if unit not in titration_units(chemical):
        raise UnitError(unit, f"a titration with {chemical.name.lower()}", titration_units(chemical))
    if unit in chemical.units:
        return dose_moles(chemical, value, unit)
    return np.asarray(value, float) * 1e-3 / abs(chemical.totals["alkalinity"])


def density(chemical: Chemical, strength: ArrayLike | None = None) -> np.ndarray:
    """Density [kg/L] at 20 °C of the product at a strength [% by mass], the usual one if left out.

    Linear between tabulated strengths and a tenth beyond the strongest; nan further out and for products
    that are dry.
    """
    if strength is None:
        return np.asarray(np.nan if chemical.usual_density is None else chemical.usual_density)
    if not chemical.densities:
        return np.full(np.shape(strength), np.nan)
    return _interpolate(chemical.densities, strength)


def totals_vector(chemical: Chemical, system: System) -> np.ndarray:
    """What one mole adds to the totals of a system: (n,), mol per mol, alkalinity eq per mol."""
    vector = system.zeros()
    for key, moles in chemical.totals.items():
        vector[system.index[key]] += moles
    return vector


def product_dose(chemical: Chemical, moles: ArrayLike, strength: ArrayLike | None = None) -> np.ndarray:
    """mg/L of product that a dose of mol/L takes; nan if its strength is not known."""
    if strength is None and chemical.usual_strength is None:
        return np.full(np.shape(moles), np.nan)
    return dose_in(chemical, moles, PRODUCT, strength)


def pump_rate(
    chemical: Chemical, moles: ArrayLike, flow: ArrayLike, strength: ArrayLike | None = None
) -> np.ndarray:
    """Volume of product [L/h] for a dose [mol/L] into a flow [m³/h]; nan for products that are dry.

    dose (mg/L) × flow (m³/h) / (mass fraction × density (kg/L) × 1000), the check everyone does by hand.
    """
    return product_dose(chemical, moles, strength) * flow / (density(chemical, strength) * 1000)


def _inherit(data: dict[str, Any]) -> dict[str, Any]:
    """The definition with the fields of the catalogue chemical that it is ``like``."""
    like = data.get("like")
    allowed = set(_FIELDS)
    base: Mapping[str, Any] = {}
    if like is not None:
        if like not in ENTRIES:
            raise ChemicalError("like", f"there is no chemical '{like}' in the catalogue")
        base = ENTRIES[like]
        setting = SETTINGS.get(like)
        if setting is not None:
            allowed.add(setting.name)
            if setting.name in data:
                value = _number(data.pop(setting.name), setting.name, setting.low, setting.high)
                base = setting.build(value)
    for given in data:
        if given not in allowed:
            raise ChemicalError(given, f"is not a field of a chemical; allowed: {', '.join(sorted(allowed))}")
    return {**base, **data}


def _text(data: Mapping[str, Any], field: str, default: str) -> str:
    value = data.get(field, default)
    if not isinstance(value, str):
        raise ChemicalError(field, "must be text")
    return value


def _number(value: Any, field: str, low: float, high: float) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float) or not low <= value <= high:
        raise ChemicalError(field, f"{value!r} is not allowed; allowed: a number from {low:g} to {high:g}")
    return float(value)


def _amounts(value: Any, field: str) -> dict[str, float]:
    if not isinstance(value, Mapping):
        raise ChemicalError(field, "must list amounts by name")
    amounts = {name: _number(amount, f"{field}.{name}", -100, 100) for name, amount in value.items()}
    if field == "counted_as":
        for name, amount in amounts.items():
            if amount <= 0:
                raise ChemicalError(f"{field}.{name}", "must be above 0")
    return amounts


def _mass_of(formula: str, field: str) -> float:
    try:
        return molar_mass(formula)
    except ValueError as error:
        raise ChemicalError(field, str(error)) from None


def _molar_mass(data: Mapping[str, Any], formula: str) -> float:
    if "molar_mass" in data:
        return _number(data["molar_mass"], "molar_mass", 1, 10_000)
    if not formula:
        raise ChemicalError("formula", "is missing; give it or a molar mass")
    return _mass_of(formula, "formula")


def _additions(data: Mapping[str, Any], extra_components: Mapping[str, float]) -> dict[str, float]:
    """What a mole adds, electrically neutral: the alkalinity is the charge of everything else."""
    totals = _amounts(data.get("adds"), "adds") if data.get("adds") else {}
    if not totals:
        raise ChemicalError("adds", "is missing; say what one mole adds to the water")
    charge = 0.0
    for key, moles in totals.items():
        if key in COMPONENT:
            charge += moles * COMPONENT[key].charge
        elif key in extra_components:
            charge += moles * extra_components[key]
        else:
            some = ", ".join(list(COMPONENT)[:6])
            allowed = f"{some} and the other components of a water, own acids by their id"
            raise ChemicalError(f"adds.{key}", f"is nothing a water can hold; allowed: {allowed}")
    if abs(totals.get("alkalinity", charge) - charge) > _CHARGE_TOLERANCE:
        raise ChemicalError("adds.alkalinity", f"does not fit the charge of the rest; allowed: {charge:g}")
    if charge:
        totals["alkalinity"] = charge
    return totals


def _densities(value: Any, strength: float | None) -> tuple[tuple[float, float], ...]:
    """Density table from a table, or from one density at the usual strength."""
    if value is None:
        return ()
    if isinstance(value, Mapping):
        points = {float(at): _number(kg, f"density.{at}", 0.5, 3) for at, kg in value.items()}
        return tuple(sorted({0.0: WATER_DENSITY, **points}.items()))
    if strength is None:
        raise ChemicalError("strength", "is missing; a density needs the strength it belongs to")
    return ((0.0, WATER_DENSITY), (strength, _number(value, "density", 0.5, 3)))


def _interpolate(densities: tuple[tuple[float, float], ...], strength: ArrayLike) -> np.ndarray:
    (before, lighter), (last, heaviest) = densities[-2:]
    beyond = last * _BEYOND
    heavier = heaviest + (beyond - last) * (heaviest - lighter) / (last - before)
    tabulated, values = zip(*densities, (beyond, heavier), strict=True)
    return np.interp(strength, tabulated, values, left=np.nan, right=np.nan)


def _sources(data: Mapping[str, Any]) -> dict[str, str]:
    sources = {"molar mass": "IUPAC 2021 abridged atomic weights", "composition": "stoichiometry"}
    if data.get("strength") is not None:
        sources["strength"] = data.get("source", COMMON_PRACTICE)
    if data.get("density") is not None:
        sources["density"] = data.get("density_source", data.get("source", MEMORY))
    return sources


CATALOGUE: dict[str, Chemical] = {key: chemical_from_dict(key, entry) for key, entry in ENTRIES.items()}
"""Every chemical the tool knows, by key."""
