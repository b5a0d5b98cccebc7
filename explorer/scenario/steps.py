"""Treatment steps: one class a kind. Files, forms and dials take what they need from the declarations."""

from typing import Any, ClassVar, Self

from explorer.scenario.entity import OPTIONAL, Child, Children, Entity
from explorer.scenario.errors import ScenarioError, join, unknown
from explorer.scenario.fields import (
    NOTE_LENGTH,
    Choice,
    Choices,
    Flag,
    Id,
    Number,
    Text,
    object_fault,
)
from explorer.scenario.measured import TEMPERATURES
from explorer.scenario.quantity import DOSE, Amount

CARBONATE_SOLIDS = ("calcite", "aragonite", "vaterite")


class Hold(Entity):
    """A dose that is computed so that a readout of the water after the step meets a value."""

    readout = Text(None, required=True, label="Readout", doc="Readout that is held.")
    value = Number(None, required=True, label="Held value", doc="Value in the unit of the readout.")
    ceiling = Amount(
        None,
        quantity=DOSE,
        required=True,
        label="Ceiling",
        doc="Largest dose; beyond it the hold is not met.",
    )


class Step(Entity):
    """What all steps share. ``kind`` is the word in the file, ``kind_title`` the word on screen."""

    kind: ClassVar[str] = ""
    kind_title: ClassVar[str] = ""
    either: ClassVar[tuple[str, ...]] = ()
    """Fields of which exactly one is given."""
    after_joining: ClassVar[bool] = False
    """Whether it stands in the common train only: losing water before would change the shares of joining."""

    id = Id(None, required=True, label="Id", doc="Handle used in addresses.")
    named = OPTIONAL
    on = Flag(True, label="In service", doc="A step out of service keeps its settings but does nothing.")
    note = Text("", limit=NOTE_LENGTH, lines=True, label="Note", doc="Anything worth knowing of this step.")

    @property
    def title(self) -> str:
        """Name, or the kind of step where there is none."""
        return self.name or self.kind_title

    def __init_subclass__(cls, **keywords: Any) -> None:
        super().__init_subclass__(**keywords)
        cls.constants = {"step": cls.kind}

    @classmethod
    def from_dict(cls, raw: Any, path: str = "") -> Self:
        """Step of the kind that ``raw`` names. Raises ScenarioError."""
        if fault := object_fault(raw):
            raise ScenarioError(path, fault)
        kind = raw.get("step")
        if not isinstance(kind, str) or kind not in STEP_KINDS:
            raise ScenarioError(join(path, "step"), unknown(kind, "a kind of step", STEP_KINDS))
        return super(Step, STEP_KINDS[kind]).from_dict(raw, path)


class DoseStep(Step):
    """A chemical added: a fixed dose, or a dose that holds a readout."""

    kind, kind_title = "dose", "Dose"
    either = ("dose", "hold")

    chemical = Text(
        None, required=True, label="Chemical", doc="Key of the catalogue or id of an own chemical."
    )
    dose = Amount(None, quantity=DOSE, label="Dose", doc="Amount added to the water, with its basis.")
    hold = Child(None, item=Hold, label="Hold", doc="Readout that the dose is computed to meet.")
    strength = Number(
        None,
        unit="%",
        bounds=(0.1, 100),
        step=1,
        label="Product strength",
        doc="Mass of active substance in the product; the usual strength where none is given.",
    )
    basicity = Number(
        None,
        unit="%",
        bounds=(0, 100),
        step=1,
        label="Basicity",
        doc="Of a polyaluminium coagulant: the part of its chloride replaced by hydroxide.",
    )
    ratio = Number(
        None, bounds=(0, 10), step=0.1, label="Ratio", doc="SiO2 to Na2O by mass, of a sodium silicate."
    )
    price = Number(
        None,
        unit="per kg",
        bounds=(0, None),
        label="Price",
        doc="Of a kilogram of product, in the currency of the scenario.",
    )
    tank = Number(
        None, unit="m³", bounds=(0, None), label="Tank", doc="Usable volume of product in store, when full."
    )


class AirStep(Step):
    """Carbon dioxide exchanged with air: part of the way to equilibrium, or to a stated content."""

    kind, kind_title = "air", "Air contact"
    either = ("approach", "co2")

    approach = Number(
        None,
        unit="%",
        bounds=(0, 100),
        step=1,
        label="Approach to equilibrium",
        doc="Part of the carbon dioxide surplus (or deficit) that is exchanged.",
    )
    co2 = Number(
        None, unit="mg/L", bounds=(0, 1000), step=0.1, label="CO2 left", doc="Content after the step."
    )
    co2_ppm = Number(
        420, unit="ppm", bounds=(0, 100_000), step=10, label="CO2 in the air", doc="Volume share in dry air."
    )
    altitude = Number(
        0, unit="m", bounds=(-400, 5000), step=50, label="Altitude", doc="Sets the air pressure."
    )


class LimestoneStep(Step):
    """A bed of calcium carbonate that dissolves part of the way to saturation."""

    kind, kind_title = "limestone", "Limestone contactor"

    approach = Number(
        None,
        required=True,
        unit="%",
        bounds=(0, 100),
        step=1,
        label="Approach to saturation",
        doc="Part of the calcium carbonate dissolved that saturation would need.",
    )
    solid = Choice(
        "calcite",
        choices=CARBONATE_SOLIDS,
        what="a calcium carbonate",
        label="Solid",
        doc="Form of calcium carbonate that sets saturation.",
    )


class SettleStep(Step):
    """Solids leave: flocs always, calcium carbonate as far as stated."""

    kind, kind_title = "settle", "Settling and filtration"

    residual = Number(
        None,
        unit="mg/L as CaCO3",
        bounds=(0, 1000),
        step=1,
        label="Supersaturation left",
        doc="Calcium carbonate that stays dissolved above saturation.",
    )
    full = Flag(False, label="To saturation", doc="All that can precipitate does.")
    solids = Choices(
        ["calcite"],
        choices=(*CARBONATE_SOLIDS, "brucite"),
        what="a solid that may form here",
        label="Solids",
        doc="Solids that may precipitate in this step.",
    )


class SideStreamStep(Step):
    """Part of the flow goes through a train of its own and joins again."""

    kind, kind_title = "side_stream", "Side stream"

    fraction = Number(
        None,
        required=True,
        unit="%",
        bounds=(0, 100),
        step=1,
        label="Fraction",
        doc="Part of the flow taken aside.",
    )
    train = Children([], item=Step, label="Train", doc="Steps on the side stream, in flow order.")


class TemperatureStep(Step):
    """The water is warmed or cooled; nothing else changes."""

    kind, kind_title = "temperature", "Temperature"

    temperature = Amount(
        None,
        required=True,
        quantity="temperature",
        bounds=TEMPERATURES,
        step=1,
        label="Temperature",
        doc="Temperature after the step.",
    )


class ConcentrateStep(Step):
    """Pure water leaves (evaporation): everything dissolved stays in less water."""

    kind, kind_title = "concentrate", "Concentrate"
    after_joining = True

    cycles = Number(
        None,
        required=True,
        bounds=(1, 50),
        step=0.1,
        label="Cycles of concentration",
        doc="Content after the step over content before it.",
    )


STEP_KINDS: dict[str, type[Step]] = {
    step.kind: step
    for step in (
        DoseStep,
        AirStep,
        LimestoneStep,
        SettleStep,
        SideStreamStep,
        TemperatureStep,
        ConcentrateStep,
    )
}
"""Every kind of step by its word in the file."""
