"""Structural edits: each leaves a scenario that can be saved, and takes along what hung on a removed part."""

from pathlib import Path

import pytest

from explorer.scenario import editing
from explorer.scenario.errors import ScenarioError
from explorer.scenario.files import dumps, open_scenario, read_scenario
from explorer.scenario.model import STEP_KINDS, Measured, Quantity, Scenario
from explorer.scenario.shipped import shipped
from explorer.treatment.analysis import examine
from explorer.treatment.chemicals import CATALOGUE

SAVED = Path(__file__).parent / "saved"


@pytest.fixture
def scenario() -> Scenario:
    """The scenario that uses everything the format has."""
    return open_scenario(SAVED / "version_1.json")


@pytest.fixture
def juniper() -> Scenario:
    """Three waters of 50, 30 and 20 percent."""
    return open_scenario(shipped()["juniper"])


def saved(scenario: Scenario) -> Scenario:
    """The scenario after a trip through a file; fails where it could not be saved."""
    return read_scenario(dumps(scenario))


def shares(scenario: Scenario) -> dict[str, float]:
    """Share of each water by id."""
    return {water.id: water.share for water in scenario.waters}


def test_a_new_water_starts_without_a_share_and_with_assumed_values(scenario: Scenario) -> None:
    """The blend stays as it is until the share is turned."""
    new = editing.add_water(scenario)
    water = saved(scenario).water(new)
    assert (water.id, water.name, water.share) == ("new_water", "New water", 0)
    assert all(entry.assumed for entry in water.analyses["winter"].entries.values())


def test_the_values_of_a_new_water_balance() -> None:
    """Within 2 percent: nobody is to wonder about an analysis that nobody has entered."""
    from explorer.chemistry import System

    assert abs(examine(editing.NEW_WATER, System()).balance.percent) < 2


def test_a_copied_water_brings_its_analyses_and_steps_under_new_ids(scenario: Scenario) -> None:
    """Same chemistry, other addresses, no share."""
    new = editing.duplicate_water(scenario, "river")
    twin = saved(scenario).water(new)
    original = scenario.water("river")
    assert twin.name == "Fern River (copy)"
    assert twin.share == 0
    assert twin.analyses["winter"].same_as(original.analyses["winter"])
    assert [step.id for step in twin.train] == ["pre_acid_2"]


def test_a_water_added_among_flows_has_a_flow() -> None:
    """Zero, in the unit of the first water."""
    flows = open_scenario(SAVED / "version_1_flows.json")
    new = editing.add_water(flows)
    assert saved(flows).water(new).flow == Quantity(0, "m³/h")


def test_removing_a_water_lets_the_others_grow_in_proportion(juniper: Scenario) -> None:
    """50 and 20 of 70 percent."""
    editing.remove_water(juniper, "slate")
    assert shares(saved(juniper)) == pytest.approx({"linen": 100 * 5 / 7, "wicker": 100 * 2 / 7})


def test_what_hung_on_a_removed_water_goes_with_it(scenario: Scenario) -> None:
    """Holds, tolerances, measured points, the sweep, the balance water."""
    scenario.balance_water = "well"
    editing.remove_water(scenario, "well")
    assert saved(scenario).sweep is None
    assert scenario.balance_water is None
    assert list(scenario.tolerances) == [
        "train.coagulant.dose",
        "train.waterglass.dose",
        "waters.river.share",
        "train.coagulant.strength",
        "waters.river.analysis.temperature",
        "train.contactor.fraction.hold.value",
    ]
    assert list(scenario.holds) == ["train.contactor.fraction", "train.magic.dose"]
    assert [part.name for part in scenario.measured] == ["Jar test"]
    assert shares(scenario) == {"river": 100}


def test_the_last_water_in_service_stays(scenario: Scenario) -> None:
    """It can be neither removed nor switched off."""
    editing.switch_water(scenario, "river")
    before = dumps(scenario)
    with pytest.raises(ScenarioError, match="no other water is in service"):
        editing.remove_water(scenario, "well")
    with pytest.raises(ScenarioError, match="no other water is in service"):
        editing.switch_water(scenario, "well")
    assert dumps(scenario) == before
    editing.switch_water(scenario, "river")
    assert saved(scenario).water("river").on


def test_a_tolerance_of_a_share_waits_while_its_water_is_out_of_service(scenario: Scenario) -> None:
    """Switching off and on again loses nothing."""
    editing.switch_water(scenario, "river")
    assert "waters.river.share" in saved(scenario).tolerances


@pytest.mark.parametrize(
    ("prefix", "kind"),
    [
        (prefix, kind)
        for prefix in ("", "waters.well.", "train.contactor.")
        for kind, step in STEP_KINDS.items()
        if kind != "dose" and not (prefix and step.after_joining)
    ],
)
def test_a_step_of_every_kind_can_be_added_to_every_train(scenario: Scenario, kind: str, prefix: str) -> None:
    """It starts with usual settings, at the end of the train."""
    new = editing.add_step(scenario, prefix, kind)
    assert dict(editing.trains(saved(scenario)))[prefix].train[-1].id == new


@pytest.mark.parametrize("chemical", [*CATALOGUE, "blend_x"])
def test_a_dose_of_every_chemical_can_be_added(scenario: Scenario, chemical: str) -> None:
    """In the usual unit of the chemical, first in the train if asked."""
    new = editing.add_step(scenario, "", "dose", chemical, position=0)
    step = saved(scenario).train[0]
    assert (step.id, step.chemical, step.dose.value) == (new, chemical, 1)


@pytest.mark.parametrize(
    ("asked", "told"),
    [
        (("", "stir"), 'step: "stir" is not a kind of step'),
        (("", "dose", "bleach"), 'chemical: "bleach" is not a chemical'),
        (("waters.pond.", "air"), '"waters.pond." is not a train'),
    ],
)
def test_a_step_that_cannot_be_added_changes_nothing(scenario: Scenario, asked: tuple, told: str) -> None:
    """One sentence, and the scenario as it was."""
    before = dumps(scenario)
    with pytest.raises(ScenarioError) as refusal:
        editing.add_step(scenario, *asked)
    assert str(refusal.value).startswith(told)
    assert dumps(scenario) == before


def test_removing_a_side_stream_removes_its_steps_and_their_tolerances() -> None:
    """Nothing is left that has no place."""
    dune = open_scenario(shipped()["dune"])
    editing.remove_step(dune, "contactor")
    assert [step.id for step in saved(dune).water("permeate").train] == ["caustic"]
    assert not [address for address in dune.tolerances if "contactor" in address]
    assert dune.sweep is None


def test_a_step_moves_within_its_train_and_stops_at_the_ends(scenario: Scenario) -> None:
    """With and against the flow, on side streams too."""
    order = [step.id for step in scenario.train]
    editing.move_step(scenario, "tower", -1)
    assert [step.id for step in scenario.train][3:5] == ["tower", "softener"]
    editing.move_step(scenario, "tower", 1)
    assert [step.id for step in saved(scenario).train] == order
    editing.move_step(scenario, "tower", -100)
    assert scenario.train[0].id == "tower"
    editing.move_step(scenario, "bed", 1)
    assert [step.id for step in scenario.step("contactor").train] == ["inner", "bed"]


def test_a_duplicated_step_stands_after_the_first_with_all_that_is_in_it(scenario: Scenario) -> None:
    """A side stream brings copies of its steps, each with its own id."""
    new = editing.duplicate_step(scenario, "contactor")
    twin = saved(scenario).train[7]
    assert twin.id == new == "contactor_2"
    assert [step.id for step in twin.train] == ["bed_2", "inner_2"]


def test_switching_a_step_keeps_its_settings(scenario: Scenario) -> None:
    """Off, and on again as it was, but for the word in the file."""
    editing.switch_step(scenario, "bed")
    assert not saved(scenario).step("bed").on
    editing.switch_step(scenario, "bed")
    assert saved(scenario).same_as(open_scenario(SAVED / "version_1.json"))


def test_another_chemical_keeps_the_figure_and_drops_what_belonged_to_the_product(scenario: Scenario) -> None:
    """Strength, basicity and price go; a unit that does not fit becomes the usual one."""
    editing.change_chemical(scenario, "coagulant", "ferric_chloride")
    step = saved(scenario).step("coagulant")
    assert step.dose == Quantity(2.5, CATALOGUE["ferric_chloride"].default_unit)
    assert (step.strength, step.basicity, step.price) == (None, None, None)
    editing.change_chemical(scenario, "caustic", "calcium_hydroxide")
    assert saved(scenario).step("caustic").hold.ceiling == Quantity(40, "mg/L")
    with pytest.raises(ScenarioError, match="this step doses nothing"):
        editing.change_chemical(scenario, "tower", "ferric_chloride")


@pytest.mark.parametrize(
    ("name", "expected"),
    [
        ("Fern River", "fern_river"),
        ("Würm", "wurm"),
        ("2nd stage", "nd_stage"),
        ("水", "part"),
        ("", "part"),
        ("tower", "tower_2"),
        ("Blend", "blend_2"),
        ("x" * 200, "x" * 74),
    ],
)
def test_ids_are_made_of_names(scenario: Scenario, name: str, expected: str) -> None:
    """Plain letters, not taken, not reserved, not too long."""
    assert editing.unique_id(scenario, name) == expected


def test_renaming_keeps_the_address(scenario: Scenario) -> None:
    """Tolerances and the sweep go on pointing at the part."""
    editing.rename(scenario, "well", "Granite Wellfield")
    editing.rename(scenario, "bed", "Marble bed")
    assert saved(scenario).water("well").title == "Granite Wellfield"
    assert scenario.step("bed").title == "Marble bed"
    with pytest.raises(ScenarioError, match="81 characters are too many"):
        editing.rename(scenario, "well", "n" * 81)
    with pytest.raises(ScenarioError, match='"pond" is not a water or step'):
        editing.rename(scenario, "pond", "Pond")


def test_an_entry_is_set_and_taken_out(scenario: Scenario) -> None:
    """An entry that is replaced keeps its place among the others."""
    analysis = scenario.water("river").analyses["winter"]
    order = list(analysis.entries)
    editing.set_entry(analysis, "ph", Measured(8.4, read_at=20))
    editing.set_entry(analysis, "iron", None)
    editing.set_entry(analysis, "sodium", Measured(11, unit="mg/L"))
    entries = saved(scenario).water("river").analyses["winter"].entries
    assert list(entries) == [*(key for key in order if key != "iron"), "sodium"]
    assert entries["ph"].value == 8.4


def test_seasons_are_added_renamed_and_removed(scenario: Scenario) -> None:
    """Every water has an analysis for each season all the time."""
    editing.add_season(scenario, "flood", like="winter")
    assert saved(scenario).water("well").analyses["flood"].same_as(scenario.water("well").analyses["winter"])
    editing.rename_season(scenario, "Spätsommer", "summer")
    assert saved(scenario).season == "summer"
    editing.remove_season(scenario, "summer")
    assert saved(scenario).seasons == ["winter", "flood"]
    assert scenario.season == "winter"
    editing.remove_season(scenario, "flood")
    for refused in (
        lambda: editing.remove_season(scenario, "winter"),
        lambda: editing.add_season(scenario, "winter"),
        lambda: editing.add_season(scenario, " "),
        lambda: editing.rename_season(scenario, "spring", "May"),
        lambda: editing.remove_season(scenario, "spring"),
    ):
        with pytest.raises(ScenarioError, match=r"^seasons: "):
            refused()


def test_an_option_stays_as_it_was_kept(scenario: Scenario) -> None:
    """Later changes do not reach it; taken up again it brings all options along."""
    editing.keep_option(scenario, "B", note="before the change", kept="2026-02-03")
    scenario.step("tower").approach = 10
    assert saved(scenario).options[1].scenario.step("tower").approach == 80
    working = editing.take_option(scenario, "B")
    assert working.step("tower").approach == 80
    assert [option.name for option in saved(working).options] == ["A", "B"]
    working.step("tower").approach = 20
    assert scenario.options[1].scenario.step("tower").approach == 80
    with pytest.raises(ScenarioError, match='"C" is not an option'):
        editing.take_option(scenario, "C")
