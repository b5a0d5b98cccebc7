"""Weak acids and chemicals that a scenario defines for itself."""

from typing import Any

import param

from explorer.scenario.entity import OPTIONAL, Entity
from explorer.scenario.errors import ScenarioError, join, unknown
from explorer.scenario.fields import NOTE_LENGTH, TITLE_LENGTH, Field, Id, Number, Numbers, Text, object_fault


class Acid(Entity):
    """A weak acid that analyses may list by its id."""

    id = Id(None, required=True, label="Id", doc="Key in analyses.")
    named = OPTIONAL
    molar_mass = Number(
        None, required=True, unit="g/mol", bounds=(1, 5000), label="Molar mass", doc="Of the protonated form."
    )
    pka = Numbers(
        None, required=True, bounds=(-2, 16), label="pKa", doc="At 25 °C, one to four, from the strongest down."
    )
    enthalpy_kj = Numbers(
        None, unit="kJ/mol", bounds=(-200, 200), label="Enthalpy", doc="Of each dissociation; 0 where not given."
    )
    charge = Number(
        0, whole=True, bounds=(-4, 4), label="Charge", doc="Of the fully protonated form, the zero level."
    )
    note = Text("", limit=NOTE_LENGTH, lines=True, label="Note", doc="Source of the figures.")


class _Totals(Field, param.Parameter):
    """Moles (alkalinity: equivalents) of each component that one mole of a chemical brings."""

    __slots__ = ["required"]
    _slot_defaults = param.Parameter._slot_defaults | {"required": True}

    def __init__(self, default: Any = None, **common: Any) -> None:
        self.required = param.Undefined
        super().__init__(default, **common)

    @property
    def allowed(self) -> str:
        return "an object with a number for each component the chemical brings"

    def fault(self, value: Any) -> str:
        return object_fault(value) or ("" if value else f"is empty; allowed {self.allowed}")

    def read(self, raw: Any, path: str) -> dict[str, float]:
        # Imported late: the equilibrium engine is not needed to read a scenario without own chemicals.
        from explorer.chemistry import COMPONENTS

        amount = Number(0, bounds=(-100, 100), unit="mol per mol")
        totals = super().read(raw, path)
        for component, moles in totals.items():
            if component not in COMPONENTS:
                raise ScenarioError(join(path, component), unknown(component, "a component", COMPONENTS))
            amount.read(moles, join(path, component))
        return dict(totals)

    def write(self, value: dict[str, float]) -> dict[str, float]:
        return dict(value)

    def duplicate(self, value: dict[str, float]) -> dict[str, float]:
        return dict(value)


class OwnChemical(Entity):
    """A chemical that the catalogue does not have."""

    id = Id(None, required=True, label="Id", doc="Key in dose steps.")
    named = OPTIONAL
    formula = Text("", limit=TITLE_LENGTH, label="Formula", doc="Shown beside the name.")
    molar_mass = Number(
        None, required=True, unit="g/mol", bounds=(1, 5000), label="Molar mass", doc="Of the active substance."
    )
    totals = _Totals(label="Brings", doc="Moles of each component (alkalinity: equivalents) per mole.")
    strength = Number(
        None, unit="%", bounds=(0.1, 100), label="Product strength", doc="Mass of active substance in the product."
    )
    density = Number(None, unit="kg/L", bounds=(0.5, 3), label="Product density", doc="For litres of product.")
    hazards = Text("", limit=NOTE_LENGTH, lines=True, label="Hazards", doc="Cautions in handling.")
    note = Text("", limit=NOTE_LENGTH, lines=True, label="Note", doc="Source of the figures.")
