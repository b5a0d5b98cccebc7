"""The scenario: source waters, train, targets, and what is varied."""

from collections.abc import Iterator, Mapping
from typing import Any, ClassVar, Self

from explorer.chemistry import WeakAcid
from explorer.scenario.chemicals import Acid, OwnChemical
from explorer.scenario.entity import REQUIRED, Child, Children, Entity, Table
from explorer.scenario.errors import join
from explorer.scenario.fields import (
    NAME_LENGTH,
    NOTE_LENGTH,
    TITLE_LENGTH,
    Choice,
    Flag,
    Id,
    Number,
    Text,
    Texts,
)
from explorer.scenario.observed import MeasuredPoints
from explorer.scenario.quantity import Amount, Quantity
from explorer.scenario.shares import WHOLE, in_service
from explorer.scenario.steps import (
    STEP_KINDS,
    AirStep,
    ConcentrateStep,
    DoseStep,
    Hold,
    LimestoneStep,
    SettleStep,
    SideStreamStep,
    Step,
    TemperatureStep,
)
from explorer.scenario.water import Analysis, Water
from explorer.treatment.analysis import Measured
from explorer.treatment.chemicals import CATALOGUE, Chemical, with_setting
from explorer.treatment.units import to_base

__all__ = [
    "STEP_KINDS",
    "Acid",
    "AirStep",
    "Analysis",
    "ConcentrateStep",
    "DialHold",
    "DoseStep",
    "Hold",
    "LimestoneStep",
    "Measured",
    "MeasuredPoints",
    "Option",
    "OwnChemical",
    "Quantity",
    "Scenario",
    "SettleStep",
    "SideStreamStep",
    "Step",
    "SweepSetting",
    "Target",
    "TemperatureStep",
    "Tolerance",
    "Water",
]

FORMAT, VERSION = "blendwright-scenario", 1


class Target(Entity):
    """A band that the finished water should meet, with its basis. Low, high or both are given."""

    readout = Text(None, required=True, label="Readout", doc="Readout that should lie in the band.")
    low = Number(None, label="Lowest", doc="In the unit of the readout.")
    high = Number(None, label="Highest", doc="In the unit of the readout.")
    basis = Text("", limit=TITLE_LENGTH, label="Basis", doc="Who set the target, where and when.")


class Tolerance(Entity):
    """How far a dial may be off: half-width, or different widths down and up."""

    plus_minus = Number(None, bounds=(0, None), label="±", doc="Half-width.")
    minus = Number(None, bounds=(0, None), label="Down", doc="Width downwards, where the sides differ.")
    plus = Number(None, bounds=(0, None), label="Up", doc="Width upwards, where the sides differ.")
    unit = Text(
        "", limit=NAME_LENGTH, label="Unit", doc="% of the value; the unit of the dial where not given."
    )
    distribution = Choice(
        "uniform",
        choices=("uniform", "normal"),
        what="a distribution",
        label="Distribution",
        doc="Uniform between the ends, or normal with the ends at two standard deviations.",
    )
    shared = Text(
        "",
        label="Shared error",
        doc="Dials with the same word here are off together, from one cause: a tank, a meter, a method.",
    )

    @property
    def sides(self) -> tuple[float, float]:
        """Widths downwards and upwards, in ``unit``."""
        both = self.plus_minus or 0
        return (both if self.minus is None else self.minus, both if self.plus is None else self.plus)


class DialHold(Entity):
    """A dial that is computed so that a readout anywhere in the plant meets a value."""

    readout = Text(None, required=True, label="Readout", doc="Readout that is held.")
    value = Number(None, required=True, label="Held value", doc="Value in the unit of the readout.")
    stage = Text("finished", label="Stage", doc="Id of the water or step behind which it is held.")
    low = Number(None, label="Lowest", doc="Of the dial; its own lower limit where not given.")
    high = Number(None, label="Highest", doc="Of the dial; its own upper limit where not given.")


class SweepSetting(Entity):
    """The dial that is swept, and over which range."""

    dial = Text(None, limit=TITLE_LENGTH, required=True, label="Dial", doc="Address of the dial.")
    start = Number(None, required=True, label="From", doc="In the unit of the dial.")
    stop = Number(None, required=True, label="To", doc="In the unit of the dial.")
    points = Number(101, whole=True, bounds=(2, 2001), label="Points", doc="Evenly spaced, ends included.")
    readout = Text(None, label="Readout", doc="Drawn beside pH and buffer; ccpp where none is given.")
    family = Text(None, label="Species", doc="Family of species shown; carbonate where none is given.")


class Option(Entity):
    """A scenario kept for comparison as it was: never changed, only replaced or dropped."""

    named = REQUIRED
    note = Text("", limit=NOTE_LENGTH, lines=True, label="Note", doc="Why it was kept.")
    kept = Text("", label="Kept", doc="Date and time it was kept.")
    method = Text("", limit=TITLE_LENGTH, label="Method", doc="Version of the calculation at that time.")

    def copy(self) -> Self:
        """The option itself: it is frozen."""
        return self


class Scenario(Entity):
    """Everything that is decided, assumed or asked: the content of a scenario file."""

    constants: ClassVar[Mapping[str, Any]] = {"format": FORMAT, "version": VERSION}

    title = Text(None, limit=TITLE_LENGTH, required=True, label="Title", doc="Title of the scenario.")
    note = Text("", limit=NOTE_LENGTH, lines=True, label="Note", doc="What the scenario is about.")
    potable = Flag(True, label="Drinking water", doc="Off for water that nobody is to drink.")
    seasons = Texts(
        None, required=True, names=True, label="Seasons", doc="Every water has an analysis for each."
    )
    season = Text(None, required=True, label="Season", doc="The season shown.")
    flow = Amount(None, quantity="flow", label="Flow", doc="Flow of the blend, where waters have shares.")
    low_flow = Amount(
        None, quantity="flow", label="Lowest flow", doc="Of the blend; pumps follow it at the same doses."
    )
    high_flow = Amount(
        None, quantity="flow", label="Highest flow", doc="Of the blend; pumps follow it at the same doses."
    )
    waters = Children([], item=Water, required=True, label="Source waters", doc="Waters that are blended.")
    balance_water = Id(
        None,
        label="Balance water",
        doc="Takes up the change of another share; none: all others in proportion.",
    )
    train = Children([], item=Step, label="Train", doc="Steps after blending, in flow order.")
    targets = Children([], item=Target, label="Targets", doc="Bands the finished water should meet.")
    holds = Table({}, item=DialHold, label="Holds", doc="Of dials that are computed, by dial address.")
    tolerances = Table({}, item=Tolerance, label="Tolerances", doc="By dial address.")
    sweep = Child(None, item=SweepSetting, label="Sweep", doc="What the sweep view shows.")
    organic_charge_density = Number(
        10.0,
        unit="µeq/mg C",
        bounds=(0, 30),
        step=0.5,
        label="Charge of organic matter",
        doc="Acid groups of the organic carbon (Oliver, Thurman & Malcolm 1983).",
    )
    currency = Text("", label="Currency", doc="Of prices and costs.")
    price_date = Text("", label="Prices of", doc="When the prices held.")
    acids = Children([], item=Acid, label="Own acids", doc="Weak acids beyond those built in.")
    chemicals = Children([], item=OwnChemical, label="Own chemicals", doc="Chemicals beyond the catalogue.")
    measured = Children(
        [], item=MeasuredPoints, label="Measured points", doc="Bench or plant data to compare with."
    )
    options = Children([], item=Option, label="Options", doc="Kept copies for comparison.")

    @classmethod
    def from_dict(cls, raw: Any, path: str = "") -> Self:
        """Scenario from its JSON form, checked as a whole. Raises ScenarioError."""
        # Imported late: the rules are about the classes of this module.
        from explorer.scenario.rules import check, check_format

        check_format(raw, path)
        scenario = super().from_dict(raw, path)
        check(scenario, path)
        return scenario

    def water(self, water_id: str) -> Water:
        """The water with this id. Raises KeyError."""
        return next((water for water in self.waters if water.id == water_id), None) or _missing(water_id)

    def step(self, step_id: str) -> Step:
        """The step with this id, wherever it stands. Raises KeyError."""
        return next((step for _, step in self.steps() if step.id == step_id), None) or _missing(step_id)

    def trains(self) -> Iterator[tuple[str, list[Step]]]:
        """Every train with its path in the file: of the waters, after blending, of side streams."""
        roots = [(f"waters[{position}].train", water.train) for position, water in enumerate(self.waters)]
        for path, train in [*roots, ("train", self.train)]:
            yield from _with_side_trains(path, train)

    def steps(self) -> Iterator[tuple[str, Step]]:
        """Every step with its path in the file."""
        for path, train in self.trains():
            yield from ((join(path, position), step) for position, step in enumerate(train))

    def weak_acids(self) -> tuple[WeakAcid, ...]:
        """The scenario's own acids as the equilibrium engine takes them."""
        return tuple(acid.weak_acid() for acid in self.acids)

    def known_chemicals(self) -> dict[str, Chemical]:
        """The catalogue and the scenario's own chemicals by key."""
        return CATALOGUE | {own.id: own.chemical(self.acids) for own in self.chemicals}

    def product(self, step: DoseStep) -> Chemical:
        """What a dose step adds, with the basicity or ratio it states. Raises KeyError, ChemicalError."""
        setting = next((value for value in (step.basicity, step.ratio) if value is not None), None)
        return (
            self.known_chemicals()[step.chemical] if setting is None else with_setting(step.chemical, setting)
        )

    def fractions(self) -> dict[str, float]:
        """Part (0 to 1) of each water in the blend by id; a water out of service has none."""
        running = in_service({water.id: _amount(water) for water in self.waters if water.on})
        return {water.id: running.get(water.id, 0.0) / WHOLE for water in self.waters}

    def total_flow(self) -> float | None:
        """Flow of the blend in m³/h, None where neither the scenario nor its waters give one."""
        if self.flow is not None:
            return float(to_base(self.flow.value, self.flow.unit, "flow"))
        flows = [_amount(water) for water in self.waters if water.flow is not None and water.on]
        return sum(flows) if flows else None


# A scenario holds options and an option a scenario; the class comes into being only here.
Option.param.add_parameter(
    "scenario", Child(None, item=Scenario, required=True, label="Scenario", doc="Copy.")
)


def _missing(name: str) -> Any:
    raise KeyError(name)


def _amount(water: Water) -> float:
    if water.flow is not None:
        return float(to_base(water.flow.value, water.flow.unit, "flow"))
    return float(water.share or 0)


def _with_side_trains(path: str, train: list[Step]) -> Iterator[tuple[str, list[Step]]]:
    yield path, train
    for position, step in enumerate(train):
        if isinstance(step, SideStreamStep):
            yield from _with_side_trains(f"{path}[{position}].train", step.train)
