"""Weak acids and chemicals that a scenario defines for itself."""

from collections.abc import Iterable

from explorer.chemistry import WeakAcid
from explorer.scenario.entity import OPTIONAL, Entity
from explorer.scenario.fields import NOTE_LENGTH, TITLE_LENGTH, Amounts, Id, Number, Numbers, Text, Texts
from explorer.treatment.chemicals import Chemical, chemical_from_dict


class Acid(Entity):
    """A weak acid that analyses may list by its id."""

    named = OPTIONAL

    id = Id(None, required=True, label="Id", doc="Key in analyses.")
    molar_mass = Number(
        None, required=True, unit="g/mol", bounds=(1, 5000), label="Molar mass", doc="Of the protonated form."
    )
    pka = Numbers(None, required=True, bounds=(-2, 16), label="pKa", doc="At 25 °C, the strongest first.")
    enthalpy_kj = Numbers(
        None, unit="kJ/mol", bounds=(-200, 200), label="Enthalpy", doc="One for each pKa; 0 where not given."
    )
    charge = Number(
        0, whole=True, bounds=(-4, 4), label="Charge", doc="Of the fully protonated form, the zero level."
    )
    note = Text("", limit=NOTE_LENGTH, lines=True, label="Note", doc="Source of the figures.")

    def weak_acid(self) -> WeakAcid:
        """The acid as the equilibrium engine takes it. Raises ValueError for figures that do not fit."""
        enthalpy = None if self.enthalpy_kj is None else tuple(self.enthalpy_kj)
        return WeakAcid(
            self.id, self.name or self.id, self.molar_mass, tuple(self.pka), enthalpy, int(self.charge)
        )


class OwnChemical(Entity):
    """A chemical beyond the catalogue, or one ``like`` a chemical of the catalogue with its own figures."""

    named = OPTIONAL

    id = Id(None, required=True, label="Id", doc="Key in dose steps.")
    like = Text(None, label="Like", doc="Chemical of the catalogue that gives what is left out here.")
    formula = Text(None, limit=TITLE_LENGTH, label="Formula", doc="Gives the molar mass.")
    molar_mass = Number(
        None, unit="g/mol", bounds=(1, 10_000), label="Molar mass", doc="Where the formula does not give it."
    )
    adds = Amounts(
        None,
        unit="mol",
        bounds=(-100, 100),
        label="Adds",
        doc="Of each component, per mole; alkalinity in eq.",
    )
    plain = Text(None, label="Plain mg/L means", doc="Formula that a plain mg/L of dose counts.")
    counted_as = Amounts(
        None, unit="mol", bounds=(0, 100), label="Counted as", doc="Moles of other formulas the trade counts."
    )
    default_unit = Text(None, label="Usual unit", doc="Unit offered first for a dose.")
    strength = Number(
        None,
        unit="%",
        bounds=(0.1, 100),
        label="Product strength",
        doc="Mass of active substance in the product.",
    )
    density = Number(
        None, unit="kg/L", bounds=(0.5, 3), label="Product density", doc="At the product strength."
    )
    basicity = Number(None, unit="%", bounds=(0, 100), label="Basicity", doc="Of a polyaluminium coagulant.")
    ratio = Number(None, bounds=(0, 10), label="Ratio", doc="SiO2 to Na2O by mass, of a sodium silicate.")
    hazards = Texts(None, limit=TITLE_LENGTH, label="Hazards", doc="Cautions in handling.")
    source = Text(None, limit=TITLE_LENGTH, label="Source", doc="Of the figures.")
    note = Text("", limit=NOTE_LENGTH, lines=True, label="Note", doc="Anything else.")

    def chemical(self, acids: Iterable[Acid] = ()) -> Chemical:
        """The chemical as the dosing arithmetic takes it. Raises ChemicalError naming the field."""
        given = {key: getattr(self, key) for key in self.fields() if key != "id"}
        definition = {key: value for key, value in given.items() if value not in (None, "")}
        return chemical_from_dict(self.id, definition, {acid.id: acid.charge for acid in acids})
