"""Conserved totals: what a water is made of, as rows of one array.

A *totals* array has one row a component and any shape behind it, in mol/L; ``alkalinity`` is in eq/L and
``organic_carbon`` in mol C/L. Mixing, dosing and splitting are linear in these rows; only the question
"what is the pH?" is not.

Alkalinity is minus the proton total over the zero level: H2O, CO2(aq), H2PO4-, NH4+, HOCl, HSO3-, B(OH)3,
H4SiO4, SO4-2, F-, Al+3, Fe+3 and the fully protonated form of every other acid. The *master* species of a
component is its zero-level form, so that the proton count of a species relative to its masters is exactly
its share in the proton balance.
"""

from dataclasses import dataclass

from .elements import molar_mass


@dataclass(frozen=True)
class Component:
    """One conserved total. ``master`` is None for a component that forms no species but itself."""

    key: str
    label: str
    formula: str
    master: str | None
    charge: int

    @property
    def molar_mass(self) -> float:
        """g/mol of ``formula``, the form the total is usually reported in."""
        return molar_mass(self.formula)


PROTON = "H+"

_TABLE = (
    Component("alkalinity", "Alkalinity", "CaCO3", PROTON, 0),
    Component("dic", "Dissolved inorganic carbon", "C", "CO2(aq)", 0),
    Component("calcium", "Calcium", "Ca", "Ca+2", 2),
    Component("magnesium", "Magnesium", "Mg", "Mg+2", 2),
    Component("sodium", "Sodium", "Na", "Na+", 1),
    Component("potassium", "Potassium", "K", "K+", 1),
    Component("chloride", "Chloride", "Cl", None, -1),
    Component("sulfate", "Sulfate", "SO4", "SO4-2", -2),
    Component("nitrate", "Nitrate", "NO3", None, -1),
    Component("fluoride", "Fluoride", "F", "F-", -1),
    Component("phosphate", "Phosphate", "PO4", "H2PO4-", -1),
    Component("silica", "Silica", "SiO2", "H4SiO4", 0),
    Component("boron", "Boron", "B", "B(OH)3", 0),
    Component("ammonia", "Ammonia", "NH4", "NH4+", 1),
    Component("free_chlorine", "Free chlorine", "Cl2", "HOCl", 0),
    Component("monochloramine", "Monochloramine", "Cl2", None, 0),
    Component("sulfite", "Sulfite", "SO3", "HSO3-", -1),
    Component("thiosulfate", "Thiosulfate", "S2O3", None, -2),
    Component("acetate", "Acetate", "C2H4O2", "CH3COOH", 0),
    Component("citrate", "Citrate", "C6H8O7", "H3Cit", 0),
    Component("aluminium", "Aluminium", "Al", "Al+3", 3),
    Component("iron", "Iron(III)", "Fe", "Fe+3", 3),
    Component("organic_carbon", "Organic carbon", "C", None, 0),
)

COMPONENT: dict[str, Component] = {component.key: component for component in _TABLE}
"""Component by key, in row order."""

COMPONENTS: tuple[str, ...] = tuple(COMPONENT)
"""Row order of a totals array; user-defined acids follow."""

MASTER_OF: dict[str, str] = {c.key: c.master for c in _TABLE if c.master is not None}

FAMILIES: dict[str, str] = {
    "carbonate": "dic",
    "chlorine": "free_chlorine",
    "ammonia": "ammonia",
    "phosphate": "phosphate",
    "silicate": "silica",
    "borate": "boron",
    "sulfite": "sulfite",
    "acetate": "acetate",
    "citrate": "citrate",
    "fluoride": "fluoride",
    "sulfate": "sulfate",
    "calcium": "calcium",
    "magnesium": "magnesium",
    "aluminium": "aluminium",
    "iron": "iron",
}
"""Name of a species family -> the component all its species hold."""


@dataclass(frozen=True)
class WeakAcid:
    """A weak acid defined by the user; its row of the totals is its ``id``, in mol/L.

    ``pka``: one to four values at 25 °C and zero ionic strength, in order. ``enthalpy_kj``: ΔH of each
    dissociation [kJ/mol], 0 if not given. ``charge``: of the fully protonated form, which is the zero level.
    """

    id: str
    name: str
    molar_mass: float
    pka: tuple[float, ...]
    enthalpy_kj: tuple[float, ...] | None = None
    charge: int = 0

    def __post_init__(self) -> None:
        if not 1 <= len(self.pka) <= 4:
            raise ValueError(f"{self.id}: {len(self.pka)} pKa values; allowed 1 to 4")
        if self.enthalpy_kj is not None and len(self.enthalpy_kj) != len(self.pka):
            raise ValueError(f"{self.id}: {len(self.enthalpy_kj)} enthalpies for {len(self.pka)} pKa values")
        if self.id in COMPONENT:
            raise ValueError(f"{self.id}: this id belongs to a built-in component")

    def form(self, lost: int) -> str:
        """Species name after losing ``lost`` protons."""
        charge = self.charge - lost
        sign = "" if charge == 0 else f"{charge:+d}".replace("+1", "+").replace("-1", "-")
        return f"{self.id}.{lost}{sign}"
