"""The scenario as objects: declared fields, refusals on assignment, copies, shares."""

from pathlib import Path

import pytest

from explorer.scenario.errors import ScenarioError
from explorer.scenario.fields import Number
from explorer.scenario.files import open_scenario
from explorer.scenario.model import (
    STEP_KINDS,
    AirStep,
    Analysis,
    DoseStep,
    Measured,
    Quantity,
    Scenario,
    SettleStep,
    Target,
    Tolerance,
    Water,
)
from explorer.scenario.quantity import Amount

SAVED = Path(__file__).parent / "saved"


@pytest.fixture
def scenario() -> Scenario:
    """The scenario that uses everything the format has."""
    return open_scenario(SAVED / "version_1.json")


@pytest.mark.parametrize("kind", [Scenario, Water, Analysis, Target, Tolerance, *STEP_KINDS.values()])
def test_every_field_has_a_label_and_a_meaning(kind: type) -> None:
    """Forms, dials and help take them from the declaration."""
    for name, field in kind.fields().items():
        assert field.label, name
        assert field.doc, name
        assert field.allowed, name


def test_every_number_of_a_step_has_bounds() -> None:
    """A slider needs ends and a file needs limits."""
    for kind in STEP_KINDS.values():
        for field in kind.fields().values():
            assert not isinstance(field, Number | Amount) or field.bounds is not None


TOWER, LIME, BASIN, PLAN = AirStep(id="tower"), DoseStep(id="lime"), SettleStep(id="basin"), Scenario()


@pytest.mark.parametrize(
    ("owner", "field", "value", "told"),
    [
        (TOWER, "approach", 101, "101 is out of range; allowed 0 to 100 %"),
        (TOWER, "approach", "80", '"80" is not a number; allowed 0 to 100 %'),
        (TOWER, "on", 1, "1 is neither true nor false; allowed true or false"),
        (LIME, "dose", 5, "5 is not a value with a unit; allowed a value of 0 or more and a unit"),
        (LIME, "dose", Quantity(-1, "mg/L"), "-1 mg/L is out of range; allowed 0 or more"),
        (BASIN, "solids", ["chalk"], '[0] "chalk" is not a solid that may form here; allowed: calcite'),
        (PLAN, "flow", Quantity(1, "mg/L"), '"mg/L" is not a unit here; allowed: ML/d'),
        (PLAN, "waters", "river", '"river" is not a list; allowed a list of 1 to 50 objects'),
    ],
)
def test_an_assignment_that_is_not_allowed_is_refused_in_one_sentence(
    owner: Scenario | AirStep, field: str, value: object, told: str
) -> None:
    """Name of the field, what is wrong, what is allowed; the old value stays."""
    before = getattr(owner, field)
    with pytest.raises(ScenarioError) as refusal:
        setattr(owner, field, value)
    assert str(refusal.value).startswith(f"{field}: {told}")
    assert getattr(owner, field) == before


def test_a_copy_shares_nothing_that_can_change(scenario: Scenario) -> None:
    """Waters, analyses, nested steps, tables: changing the copy leaves the scenario alone."""
    before = scenario.to_dict()
    copy = scenario.copy()
    copy.water("river").analyses["winter"].entries["ph"] = Measured(9)
    copy.water("river").analyses["winter"].provenance["lab"] = "another"
    copy.step("bed").approach = 10
    copy.step("clarifier").solids.append("vaterite")
    copy.step("caustic").hold.value = 9
    copy.tolerances["waters.river.share"].plus_minus = 50
    copy.acids[0].pka.append(9)
    copy.chemicals[0].adds["sodium"] = 3
    copy.seasons.append("autumn")
    copy.targets.pop()
    assert scenario.to_dict() == before
    assert not copy.same_as(scenario)


def test_two_scenarios_are_the_same_when_they_say_the_same(scenario: Scenario) -> None:
    """Order and explicit defaults do not count."""
    raw = scenario.to_dict()
    raw["train"][2].pop("full")
    turned = dict(reversed(raw.items()))
    other = Scenario.from_dict(turned)
    assert other.same_as(scenario)
    assert list(other.to_dict()) != list(scenario.to_dict())


def test_reading_leaves_what_it_reads_alone(scenario: Scenario) -> None:
    """Neither the objects read nor a later change reach into the source."""
    raw = scenario.to_dict()
    kept = open_scenario(SAVED / "version_1.json").to_dict()
    Scenario.from_dict(raw).step("clarifier").solids.append("vaterite")
    assert raw == kept


def test_fractions_count_waters_in_service_only(scenario: Scenario) -> None:
    """What a water out of service leaves is divided in proportion."""
    assert scenario.fractions() == {"river": 0.625, "well": 0.375}
    scenario.water("river").on = False
    assert scenario.fractions() == {"river": 0, "well": 1}


def test_flows_of_waters_make_shares_and_a_total() -> None:
    """400 m³/h and 2.4 ML/d: four to one, 500 m³/h."""
    flows = open_scenario(SAVED / "version_1_flows.json")
    assert flows.fractions() == pytest.approx({"north": 0.8, "south": 0.2})
    assert flows.total_flow() == pytest.approx(500)


def test_steps_are_found_wherever_they_stand(scenario: Scenario) -> None:
    """Before blending, after it, and on side streams."""
    paths = {step.id: path for path, step in scenario.steps()}
    assert paths["pre_acid"] == "waters[0].train[0]"
    assert paths["caustic"] == "train[8]"
    assert paths["bed"] == "train[6].train[0]"
    with pytest.raises(KeyError):
        scenario.step("nowhere")


def test_a_product_has_the_basicity_that_its_step_states(scenario: Scenario) -> None:
    """70 % basicity: 0.9 mol of chloride to a mole of aluminium."""
    assert scenario.product(scenario.step("coagulant")).totals["chloride"] == pytest.approx(0.9)
    assert scenario.product(scenario.step("magic")).name == "Blend X"


def test_tolerances_may_be_one_sided() -> None:
    """Widths down and up; a half-width is both."""
    assert Tolerance(plus_minus=3).sides == (3, 3)
    assert Tolerance(minus=20, plus=0).sides == (20, 0)
    assert Tolerance(minus=20).sides == (20, 0)
