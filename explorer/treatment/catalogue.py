"""The treatment chemicals the tool knows: pure data, read by :mod:`explorer.treatment.chemicals`.

Each entry says what one mole adds to the totals (``adds``: mol, alkalinity in eq, against the zero levels of
the proton balance), which formula a plain mg/L means (``plain``, the formula itself if left out), how many
moles of other formulas the trade counts it by (``counted_as``), the usual product (``strength``: percent by
mass of the plain substance) and density against strength (``density``: kg/L at 20 °C).

Sources. Molar masses: IUPAC 2021 abridged. What a mole adds: stoichiometry. Usual strengths: common
practice. Densities: named in each entry; "from memory" marks a figure that was not looked up again.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

Entry = Mapping[str, Any]

LALIBERTE = "Laliberté 2009, J. Chem. Eng. Data 54:1725"
COMMON_PRACTICE = "common practice"
MEMORY = "trade figure, from memory"

ACID_AND_HYPOCHLORITE = "never let it meet hypochlorite: chlorine gas forms"
HYPOCHLORITE_AND_ACID = "never let it meet acid or coagulant: chlorine gas forms"
HYPOCHLORITE_AND_AMMONIA = "never mix it with ammonia products in store or at one injection point"
AMMONIA_AND_HYPOCHLORITE = "never mix it with hypochlorite in store or at one injection point"
ACID_INTO_WATER = "add acid to water, never water to acid"
BURNS = "burns skin and eyes"
SCALES_INJECTOR = "softens or scales the carrier water at the injector"
DISPLACES_AIR = "displaces air in pits and contactor galleries: gas monitor and entry permit"

ACID = (ACID_AND_HYPOCHLORITE, ACID_INTO_WATER)
COAGULANT = (ACID_AND_HYPOCHLORITE,)
ALKALI = (SCALES_INJECTOR,)

_ALUM_PER_ANHYDROUS = 594.341 / 342.147
"""g of the 14-hydrate per g of Al2(SO4)3, to turn the density table of the salt into that of the hydrate."""


@dataclass(frozen=True)
class Setting:
    """A property of a product that changes what it adds; ``build`` makes the entry for a value."""

    name: str
    meaning: str
    low: float
    high: float
    usual: float
    build: Callable[[float], Entry]


def _polyaluminium_chloride(basicity: float) -> Entry:
    hydroxide = 3 * basicity / 100
    return {
        "name": "Polyaluminium chloride",
        "formula": f"Al(OH){hydroxide:.3g}Cl{3 - hydroxide:.3g}",
        "molar_mass": 26.9815384,
        "adds": {"aluminium": 1, "chloride": 3 - hydroxide, "alkalinity": hydroxide},
        "plain": "Al",
        "counted_as": {"Al": 1},
        "default_unit": "mg/L as Al",
        "strength": 5.29,
        "density": {5.29: 1.21, 9.00: 1.37},
        "density_source": MEMORY,
        "hazards": COAGULANT,
        "note": "per mol Al; basicity = 100 × OH : 3 Al; 5.29 % Al is 10 % Al2O3",
    }


def _sodium_silicate(ratio: float) -> Entry:
    soda = 60.083 / (ratio * 61.979)  # mol Na2O per mol SiO2
    return {
        "name": "Sodium silicate",
        "formula": f"Na2O·{1 / soda:.3g}SiO2",
        "molar_mass": 60.083,
        "adds": {"silica": 1, "sodium": 2 * soda, "alkalinity": 2 * soda},
        "plain": "SiO2",
        "counted_as": {"SiO2": 1},
        "default_unit": "mg/L as SiO2",
        "strength": 28.7,
        "density": {28.7: 1.39},
        "density_source": MEMORY,
        "hazards": ALKALI,
        "note": "per mol SiO2; ratio = SiO2 : Na2O by mass",
    }


SETTINGS: dict[str, Setting] = {
    "polyaluminium_chloride": Setting(
        "basicity", "percent of the chloride replaced by hydroxide", 0, 85, 50, _polyaluminium_chloride
    ),
    "sodium_silicate": Setting("ratio", "SiO2 : Na2O by mass", 1, 4, 3.22, _sodium_silicate),
}
"""Chemicals whose composition the user may set."""

ENTRIES: dict[str, Entry] = {
    "sodium_hydroxide": {
        "name": "Sodium hydroxide",
        "formula": "NaOH",
        "adds": {"sodium": 1, "alkalinity": 1},
        "counted_as": {"CaCO3": 0.5},
        "strength": 50,
        "density": {10: 1.1089, 20: 1.2192, 25: 1.274, 30: 1.3277, 40: 1.4299, 50: 1.5253},
        "density_source": "CRC Handbook and International Critical Tables, 20 °C, from memory",
        "hazards": (BURNS, "50 % solution freezes near 12 °C", SCALES_INJECTOR),
    },
    "calcium_hydroxide": {
        "name": "Calcium hydroxide",
        "formula": "Ca(OH)2",
        "adds": {"calcium": 1, "alkalinity": 2},
        "counted_as": {"CaCO3": 1},
        "strength": 94,
        "density": {10: 1.06, 30: 1.2},
        "density_source": "slurry, computed from the density of the solid, 2.24",
        "hazards": ALKALI,
    },
    "calcium_oxide": {
        "name": "Quicklime",
        "formula": "CaO",
        "adds": {"calcium": 1, "alkalinity": 2},
        "counted_as": {"CaCO3": 1},
        "strength": 90,
        "hazards": ("slakes hot", *ALKALI),
    },
    "sodium_carbonate": {
        "name": "Sodium carbonate",
        "formula": "Na2CO3",
        "adds": {"sodium": 2, "dic": 1, "alkalinity": 2},
        "counted_as": {"CaCO3": 1},
        "strength": 99,
        "density": {10: 1.1036},
        "density_source": LALIBERTE,
        "hazards": ALKALI,
    },
    "sodium_bicarbonate": {
        "name": "Sodium bicarbonate",
        "formula": "NaHCO3",
        "adds": {"sodium": 1, "dic": 1, "alkalinity": 1},
        "counted_as": {"CaCO3": 0.5},
        "strength": 99,
        "density": {6: 1.0414},
        "density_source": LALIBERTE,
    },
    "potassium_hydroxide": {
        "name": "Potassium hydroxide",
        "formula": "KOH",
        "adds": {"potassium": 1, "alkalinity": 1},
        "counted_as": {"CaCO3": 0.5},
        "strength": 45,
        "density": {10: 1.0904, 20: 1.1872, 30: 1.2892, 40: 1.3972, 45: 1.4538},
        "density_source": LALIBERTE,
        "hazards": (BURNS, SCALES_INJECTOR),
    },
    "magnesium_hydroxide": {
        "name": "Magnesium hydroxide",
        "formula": "Mg(OH)2",
        "adds": {"magnesium": 1, "alkalinity": 2},
        "counted_as": {"CaCO3": 1},
        "strength": 58,
        "density": {58: 1.5},
        "density_source": MEMORY,
        "hazards": ALKALI,
        "note": "taken as fully dissolved",
    },
    "carbon_dioxide": {
        "name": "Carbon dioxide",
        "formula": "CO2",
        "adds": {"dic": 1},
        "counted_as": {"C": 1},
        "strength": 99.5,
        "hazards": (DISPLACES_AIR,),
        "note": "the dose that dissolves; 85 to 95 % of what is fed usually does (common practice)",
    },
    "hydrochloric_acid": {
        "name": "Hydrochloric acid",
        "formula": "HCl",
        "adds": {"chloride": 1, "alkalinity": -1},
        "counted_as": {"CaCO3": 0.5},
        "strength": 33,
        "density": {10: 1.048, 20: 1.098, 30: 1.149, 32: 1.159, 34: 1.169, 36: 1.179, 38: 1.189},
        "density_source": "International Critical Tables, 20 °C",
        "hazards": ACID,
    },
    "sulfuric_acid": {
        "name": "Sulfuric acid",
        "formula": "H2SO4",
        "adds": {"sulfate": 1, "alkalinity": -2},
        "counted_as": {"CaCO3": 1},
        "strength": 96,
        "density": {
            10: 1.0661, 20: 1.1398, 30: 1.2191, 40: 1.3028, 50: 1.3952, 70: 1.6105, 80: 1.7272,
            85: 1.7786, 90: 1.8144, 93: 1.8279, 95: 1.8337, 96: 1.8355, 98: 1.8361, 100: 1.8305,
        },
        "density_source": "CRC Handbook, 20 °C; 80 to 98 % International Critical Tables, from memory",
        "hazards": (BURNS, *ACID),
    },
    "phosphoric_acid": {
        "name": "Phosphoric acid",
        "formula": "H3PO4",
        "adds": {"phosphate": 1, "alkalinity": -1},
        "counted_as": {"P": 1, "PO4": 1},
        "default_unit": "mg/L as P",
        "strength": 75,
        "density": {
            10: 1.0531, 20: 1.1135, 30: 1.1804, 40: 1.2536, 50: 1.336, 60: 1.4252, 70: 1.5234,
            75: 1.5761, 80: 1.6313, 85: 1.6891,
        },
        "density_source": f"CRC Handbook, 20 °C; above 40 % {LALIBERTE}",
        "hazards": ACID,
    },
    "monosodium_phosphate": {
        "name": "Monosodium phosphate",
        "formula": "NaH2PO4",
        "adds": {"phosphate": 1, "sodium": 1},
        "counted_as": {"P": 1, "PO4": 1},
        "default_unit": "mg/L as P",
        "strength": 98,
    },
    "disodium_phosphate": {
        "name": "Disodium phosphate",
        "formula": "Na2HPO4",
        "adds": {"phosphate": 1, "sodium": 2, "alkalinity": 1},
        "counted_as": {"P": 1, "PO4": 1},
        "default_unit": "mg/L as P",
        "strength": 98,
    },
    "trisodium_phosphate": {
        "name": "Trisodium phosphate",
        "formula": "Na3PO4",
        "adds": {"phosphate": 1, "sodium": 3, "alkalinity": 2},
        "counted_as": {"P": 1, "PO4": 1},
        "default_unit": "mg/L as P",
        "strength": 98,
        "hazards": (BURNS, SCALES_INJECTOR),
    },
    "aluminium_sulfate": {
        "name": "Aluminium sulfate (alum)",
        "formula": "Al2(SO4)3·14H2O",
        "adds": {"aluminium": 2, "sulfate": 3},
        "counted_as": {"Al": 2},
        "strength": 48.5,
        "density": {
            5 * _ALUM_PER_ANHYDROUS: 1.0494, 10 * _ALUM_PER_ANHYDROUS: 1.1043,
            15 * _ALUM_PER_ANHYDROUS: 1.1631, 20 * _ALUM_PER_ANHYDROUS: 1.2257,
            25 * _ALUM_PER_ANHYDROUS: 1.2917, 48.5: 1.335, 30 * _ALUM_PER_ANHYDROUS: 1.3602,
        },
        "density_source": f"{LALIBERTE}; 48.5 %: Hendricks, Fundamentals of Water Treatment Unit Processes",
        "hazards": COAGULANT,
        "note": "mg/L means the 14-hydrate; 48.5 % liquor is 8.3 % Al2O3; the hydroxide takes the alkalinity",
    },
    "polyaluminium_chloride": _polyaluminium_chloride(SETTINGS["polyaluminium_chloride"].usual),
    "ferric_chloride": {
        "name": "Ferric chloride",
        "formula": "FeCl3",
        "adds": {"iron": 1, "chloride": 3},
        "counted_as": {"Fe": 1},
        "strength": 40,
        "density": {10: 1.0848, 20: 1.1824, 30: 1.2925, 35: 1.3525, 40: 1.4162, 45: 1.4834},
        "density_source": LALIBERTE,
        "hazards": COAGULANT,
        "note": "without the up to 1 % of free acid in the liquor; the hydroxide takes the alkalinity",
    },
    "ferric_sulfate": {
        "name": "Ferric sulfate",
        "formula": "Fe2(SO4)3",
        "adds": {"iron": 2, "sulfate": 3},
        "counted_as": {"Fe": 2},
        "strength": 41,
        "density": {30: 1.3307, 41: 1.5},
        "density_source": f"30 %: {LALIBERTE}; 41 %: {MEMORY}",
        "hazards": COAGULANT,
        "note": "without the free acid of the liquor; the hydroxide takes the alkalinity",
    },
    "sodium_hypochlorite": {
        "name": "Sodium hypochlorite",
        "formula": "NaOCl",
        "adds": {"free_chlorine": 1, "sodium": 2, "chloride": 1, "alkalinity": 1},
        "plain": "Cl2",
        "counted_as": {"Cl2": 1},
        "default_unit": "mg/L as Cl2",
        "strength": 10.4,
        "density": {10.4: 1.2},
        "density_source": MEMORY,
        "hazards": (HYPOCHLORITE_AND_ACID, HYPOCHLORITE_AND_AMMONIA, SCALES_INJECTOR),
        "note": "with the mole of NaCl per mole of NaOCl left from manufacture, without the free alkali;"
        " 10.4 % by mass as Cl2 is 125 g/L (12.5 trade %); loses strength in store",
    },
    "calcium_hypochlorite": {
        "name": "Calcium hypochlorite",
        "formula": "Ca(OCl)2",
        "adds": {"free_chlorine": 2, "calcium": 1, "alkalinity": 2},
        "plain": "Cl2",
        "counted_as": {"Cl2": 2},
        "default_unit": "mg/L as Cl2",
        "strength": 65,
        "hazards": (HYPOCHLORITE_AND_ACID, HYPOCHLORITE_AND_AMMONIA),
        "note": "strength as available Cl2; without the salts of the trade product",
    },
    "chlorine": {
        "name": "Chlorine gas",
        "formula": "Cl2",
        "adds": {"free_chlorine": 1, "chloride": 1, "alkalinity": -1},
        "counted_as": {"Cl2": 1},
        "default_unit": "mg/L as Cl2",
        "strength": 100,
        "hazards": ("toxic gas", HYPOCHLORITE_AND_AMMONIA),
    },
    "ammonia": {
        "name": "Ammonia",
        "formula": "NH3",
        "adds": {"ammonia": 1, "alkalinity": 1},
        "counted_as": {"N": 1},
        "default_unit": "mg/L as N",
        "strength": 25,
        "density": {5: 0.978, 10: 0.9588, 15: 0.9406, 20: 0.9232, 25: 0.9065, 30: 0.8906},
        "density_source": LALIBERTE,
        "hazards": (AMMONIA_AND_HYPOCHLORITE, SCALES_INJECTOR),
    },
    "ammonium_sulfate": {
        "name": "Ammonium sulfate",
        "formula": "(NH4)2SO4",
        "adds": {"ammonia": 2, "sulfate": 1},
        "counted_as": {"N": 2},
        "default_unit": "mg/L as N",
        "strength": 40,
        "density": {10: 1.0574, 20: 1.1154, 30: 1.1721, 40: 1.2277},
        "density_source": "CRC Handbook, 20 °C",
        "hazards": (AMMONIA_AND_HYPOCHLORITE,),
    },
    "fluorosilicic_acid": {
        "name": "Fluorosilicic acid",
        "formula": "H2SiF6",
        "adds": {"fluoride": 6, "silica": 1, "alkalinity": -6},
        "counted_as": {"F": 6},
        "default_unit": "mg/L as F",
        "strength": 23,
        "density": {23: 1.212},
        "density_source": "technical data sheet of a 23 % solution, 24 °C",
        "hazards": ("gives off hydrogen fluoride", *ACID),
        "note": "taken as fully hydrolysed to fluoride and silica",
    },
    "sodium_fluoride": {
        "name": "Sodium fluoride",
        "formula": "NaF",
        "adds": {"fluoride": 1, "sodium": 1},
        "counted_as": {"F": 1},
        "default_unit": "mg/L as F",
        "strength": 98,
        "density": {3.5: 1.0347},
        "density_source": LALIBERTE,
    },
    "sodium_silicate": _sodium_silicate(SETTINGS["sodium_silicate"].usual),
    "calcium_chloride": {
        "name": "Calcium chloride",
        "formula": "CaCl2",
        "adds": {"calcium": 1, "chloride": 2},
        "counted_as": {"CaCO3": 1},
        "strength": 35,
        "density": {10: 1.0831, 20: 1.1778, 30: 1.2819, 35: 1.3369, 40: 1.3931},
        "density_source": LALIBERTE,
    },
    "magnesium_chloride": {
        "name": "Magnesium chloride",
        "formula": "MgCl2",
        "adds": {"magnesium": 1, "chloride": 2},
        "counted_as": {"CaCO3": 1},
        "strength": 30,
        "density": {30: 1.2746},
        "density_source": LALIBERTE,
    },
    "sodium_chloride": {
        "name": "Sodium chloride",
        "formula": "NaCl",
        "adds": {"sodium": 1, "chloride": 1},
        "strength": 26,
        "density": {26: 1.1967},
        "density_source": LALIBERTE,
    },
    "sodium_bisulfite": {
        "name": "Sodium bisulfite",
        "formula": "NaHSO3",
        "adds": {"sulfite": 1, "sodium": 1},
        "counted_as": {"S": 1},
        "strength": 38,
        "density": {38: 1.33},
        "density_source": f"{LALIBERTE}, extrapolated above 24 %; from memory",
        "hazards": COAGULANT,
    },
    "sodium_thiosulfate": {
        "name": "Sodium thiosulfate",
        "formula": "Na2S2O3",
        "adds": {"thiosulfate": 1, "sodium": 2},
        "counted_as": {"S": 2},
        "strength": 30,
        "density": {30: 1.2732},
        "density_source": LALIBERTE,
    },
    "acetic_acid": {
        "name": "Acetic acid",
        "formula": "C2H4O2",
        "adds": {"acetate": 1},
        "counted_as": {"C": 2},
        "strength": 80,
        "density": {80: 1.0699},
        "density_source": LALIBERTE,
        "hazards": ACID,
    },
    "citric_acid": {
        "name": "Citric acid",
        "formula": "C6H8O7",
        "adds": {"citrate": 1},
        "counted_as": {"C": 6},
        "strength": 50,
        "density": {50: 1.24},
        "density_source": "handbook, from memory",
        "hazards": ACID,
    },
}  # fmt: skip
