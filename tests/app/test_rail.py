"""The rail: what it shows of a scenario, and what using it does to the scenario."""

import pytest

from explorer.app.rail import Rail
from explorer.app.state import Session
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped

HOSTILE = '<img src=x onerror="window.__xss=1">'


def rail_of(name: str) -> Rail:
    """The rail of a shipped scenario, solved."""
    session = Session(open_scenario(shipped()[name]))
    rail = Rail(session)
    session.calculate()
    return rail


@pytest.fixture
def amber() -> Rail:
    """River and wellfield, hypochlorite after the blend."""
    return rail_of("amber")


@pytest.fixture
def dune() -> Rail:
    """Desalinated water with a side stream through limestone in its own train."""
    return rail_of("dune")


def words(rail: Rail, key: str) -> str:
    return rail.shown(key).words()


def text(rail: Rail, key: str) -> str:
    """What a field shows."""
    return rail.shown(key).properties["value"]


def message(rail: Rail, key: str) -> str:
    """The sentence beside a field: the first place for one that follows the field."""
    nodes = rail.nodes
    place = next(position for position, item in enumerate(nodes) if item.key == key)
    return next(item.properties["text"] for item in nodes[place:] if item.properties.get("role") == "alert")


def shares(rail: Rail) -> dict[str, float]:
    return {water.id: water.share for water in rail.desk.scenario.waters}


def train(rail: Rail) -> list[str]:
    return [step.id for step in rail.desk.scenario.train]


def test_card_of_a_water_says_what_it_is(amber: Rail) -> None:
    """Name, flow in the scenario's unit, pH, alkalinity, calcium and ion balance."""
    card = words(amber, "waters.well")
    for fact in ("Granite Wellfield", "8.0 ML/d", "pH 7.25", "alk 272", "Ca 116", "ion balance −0.9 %"):
        assert fact in card


def test_poor_ion_balance_is_said_in_a_word_and_a_glyph() -> None:
    """An analysis that does not close is marked beyond its colour."""
    rail = rail_of("faulty_analyses")
    assert any("▲ poor" in words(rail, f"waters.{water.id}") for water in rail.desk.scenario.waters)


def test_line_of_treatment_runs_from_blend_to_finished_water(amber: Rail) -> None:
    """The blend with flow and temperature, each step with what it did, the finished water, in order."""
    order = [item.key for item in amber.nodes if item.key in ("blend", "train.hypo", "finished")]
    assert order == ["blend", "train.hypo", "finished"]
    assert "20.0 ML/d · 6.8 °C" in words(amber, "blend")
    assert "→" in words(amber, "train.hypo")
    assert "dissolves" in words(amber, "finished")


def test_side_stream_holds_its_own_line(dune: Rail) -> None:
    """Steps of a side stream stand inside its card, below the water they treat."""
    water = dune.desk.scenario.waters[0]
    side = next(step for step in water.train if step.kind == "side_stream")
    card = dune.shown(f"waters.{water.id}.train.{side.id}")
    inner = [f"waters.{water.id}.train.{side.id}.train.{step.id}" for step in side.train]
    assert [item.key for item in card.walk() if item.key in inner] == inner


def test_slider_turns_the_share(amber: Rail) -> None:
    """Moving a share slider changes the share; the other water takes the rest."""
    amber.report("waters.well.share:slider", 55.0)
    assert shares(amber) == {"river": 45, "well": 55}
    assert text(amber, "waters.well.share") == "55.0"
    assert text(amber, "waters.river.share") == "45.0"


def test_number_turns_the_share_exactly(amber: Rail) -> None:
    """A typed share is taken to the digit, with a decimal comma too."""
    amber.report("waters.well.share", "33,25")
    assert shares(amber)["well"] == 33.25
    assert amber.shown("waters.well.share:slider").properties["value"] == 33.25


@pytest.mark.parametrize(
    ("typed", "said"), [("120", "0 to 100 %"), ("abc", "is not a number"), ("", "a number is needed")]
)
def test_bad_share_keeps_the_last_good_one(amber: Rail, typed: str, said: str) -> None:
    """The text stays in the field, marked, with the sentence beside it; scenario and results stay."""
    before, outcome = shares(amber), amber.desk.session.point
    amber.report("waters.well.share", typed)
    assert shares(amber) == before
    assert amber.desk.session.point is outcome
    assert text(amber, "waters.well.share") == typed
    assert said in message(amber, "waters.well.share")
    amber.report("waters.well.share", "50")
    assert message(amber, "waters.well.share") == ""
    assert shares(amber)["well"] == 50


def test_turning_a_dial_changes_texts_in_place(amber: Rail) -> None:
    """A turned dial sends only what differs: the tree on the page is not drawn anew."""
    tree = amber.tree
    amber.report("waters.well.share:slider", 70.0)
    assert amber.tree == tree
    assert amber.patch != "{}"


def test_dose_by_slider_and_number(amber: Rail) -> None:
    """A dose follows slider and number, and the facts of its card follow the dose."""
    before = words(amber, "train.hypo")
    amber.report("train.hypo.dose:slider", 2.0)
    assert amber.desk.scenario.step("hypo").dose.value == 2
    amber.report("train.hypo.dose", "2,5")
    assert amber.desk.scenario.step("hypo").dose.value == 2.5
    assert words(amber, "train.hypo") != before


def test_slider_end_stays_while_it_is_dragged(amber: Rail) -> None:
    """The right end of an unbounded dial stays while the value is inside: the handle does not slip."""
    end = amber.shown("train.hypo.dose:slider").properties["max"]
    for part in (0.9, 0.1, 0.5):
        amber.report("train.hypo.dose:slider", part * end)
        assert amber.shown("train.hypo.dose:slider").properties["max"] == end
    amber.report("train.hypo.dose", str(3 * end))
    assert amber.shown("train.hypo.dose:slider").properties["max"] > 3 * end


def test_adding_a_water_opens_it(amber: Rail) -> None:
    """A new water comes without share, with its analysis open to be filled in."""
    amber.report("waters:add:")
    new = amber.desk.scenario.waters[-1]
    assert new.share == 0
    assert amber.desk.opened == f"waters.{new.id}"
    assert f"waters.{new.id}.analysis.ph" in amber


def test_water_like_another(amber: Rail) -> None:
    """A water can start from the analysis of another."""
    amber.report("waters:add:well")
    first, copy = amber.desk.scenario.water("well"), amber.desk.scenario.waters[-1]
    assert copy.analyses["winter"].entries == first.analyses["winter"].entries


def test_removing_a_water_gives_its_share_to_the_rest(amber: Rail) -> None:
    """Shares still add to 100; the last water cannot go."""
    amber.report("waters.river:remove")
    assert shares(amber) == {"well": 100}
    assert amber.shown("waters.well:remove").on is None


def test_water_out_of_service_and_back(amber: Rail) -> None:
    """A water taken out does not flow but keeps its card; it comes back as it was."""
    before = shares(amber)
    amber.report("waters.river:switch")
    assert not amber.desk.scenario.water("river").on
    assert "out of service" in words(amber, "waters.river")
    amber.report("waters.river:switch")
    assert shares(amber) == before


def test_renaming_a_water(amber: Rail) -> None:
    """The name becomes a field; Enter takes it, a refused name keeps the field open with the reason."""
    amber.report("waters.well:rename")
    amber.report("waters.well:name", "x" * 81)
    assert "80 characters" in message(amber, "waters.well:name")
    amber.report("waters.well:name", "North wells")
    assert amber.desk.scenario.water("well").name == "North wells"
    assert "North wells" in words(amber, "waters.well")


def test_foreign_names_stay_text(amber: Rail) -> None:
    """Markup in a name is shown as it is written and never becomes part of the page's structure."""
    amber.report("waters.well:rename")
    amber.report("waters.well:name", HOSTILE)
    assert HOSTILE in words(amber, "waters.well")
    assert {item.tag for item in amber.nodes}.isdisjoint({"img", "script", "iframe"})


def test_adding_a_dose_and_another_step(amber: Rail) -> None:
    """Chemicals and kinds of step come from one list and join the end of the train, opened."""
    amber.report("train:add:dose:sodium_hydroxide")
    amber.report("train:add:air:")
    steps = amber.desk.scenario.train
    assert [step.kind for step in steps] == ["dose", "dose", "air"]
    assert steps[1].chemical == "sodium_hydroxide"
    assert amber.desk.opened == f"train.{steps[2].id}"


def test_every_kind_of_step_can_be_added_and_opened(amber: Rail) -> None:
    """Whatever the scenario knows as a step has a card and a form."""
    added = [item.key for item in amber.nodes if item.key.startswith("train:add:") and item.on]
    offered = [key for key in added if not key.startswith("train:add:own-")]
    kinds = {key.split(":")[2] for key in offered}
    assert kinds == {"dose", "air", "limestone", "settle", "side_stream", "temperature", "concentrate"}
    for kind in kinds - {"dose"}:
        amber.report(f"train:add:{kind}:")
        assert amber.desk.session.message == ""
        assert f"{amber.desk.opened}.note" in amber


def test_reordering_steps(amber: Rail) -> None:
    """Move up and down change the order of flow; the ends go no further."""
    amber.report("train:add:dose:sodium_hydroxide")
    first, second = train(amber)
    assert amber.shown(f"train.{first}:up").on is None
    assert amber.shown(f"train.{second}:down").on is None
    amber.report(f"train.{second}:up")
    assert train(amber) == [second, first]


def test_duplicating_switching_and_removing_a_step(amber: Rail) -> None:
    """A copy stands right behind; out of service it does nothing; removed it is gone."""
    amber.report("train.hypo:duplicate")
    copy = train(amber)[1]
    amber.report(f"train.{copy}:switch")
    assert "out of service" in words(amber, f"train.{copy}")
    amber.report(f"train.{copy}:remove")
    assert train(amber) == ["hypo"]


def test_one_card_is_open_at_a_time(amber: Rail) -> None:
    """Opening a card closes the one before; pressing again closes it."""
    amber.report("waters.river:open")
    amber.report("train.hypo:open")
    opened = [item.key for item in amber.nodes if item.properties.get("aria-expanded") == "true"]
    assert opened == ["train.hypo:open"]
    amber.report("train.hypo:open")
    assert amber.desk.opened == ""


def test_undo_takes_back_an_edit_of_the_rail(amber: Rail) -> None:
    """One press is one undo step, and the rail shows the state before."""
    amber.report("waters.river:remove")
    amber.desk.session.undo()
    assert shares(amber) == {"river": 60, "well": 40}
    assert "waters.river" in amber


def test_sweep_from_the_card(amber: Rail) -> None:
    """A card puts its dial on the x axis of the sweep."""
    amber.report("train.hypo:sweep")
    assert amber.desk.scenario.sweep.dial == "train.hypo.dose"


def test_season_changes_what_is_shown(amber: Rail) -> None:
    """The cards show the chosen season."""
    winter = words(amber, "waters.river")
    amber.desk.session.choose_season("summer")
    assert words(amber, "waters.river") != winter


def test_refusal_goes_when_the_value_changes_elsewhere(amber: Rail) -> None:
    """A refused text does not outlive the value it stood for."""
    amber.report("waters.well.share", "abc")
    amber.report("waters.river.share:slider", 50.0)
    assert text(amber, "waters.well.share") == "50.0"
    assert message(amber, "waters.well.share") == ""


def test_opened_file_forgets_what_was_open(amber: Rail, dune: Rail) -> None:
    """Another scenario starts with closed cards and no old refusals."""
    amber.report("waters.well:open")
    amber.report("waters.well.share", "abc")
    amber.desk.session.replace(dune.desk.scenario.copy())
    assert amber.desk.opened == ""
    assert amber.desk.entries.slips == {}


def test_use_of_chemicals_and_cost(amber: Rail) -> None:
    """Below the line: cost per ML where prices are entered, and kg a day of each product."""
    said = amber.shown("cost").words()
    # 1.2 mg/L at 20 ML/d is 24 kg/d as Cl2; as product of the usual strength it is that over the strength.
    strength = amber.desk.scenario.product(amber.desk.scenario.step("hypo")).usual_strength
    assert f"{24 / (strength / 100):.0f} kg/d" in said
    assert "per ML" in said


@pytest.mark.parametrize("name", sorted(shipped()))
def test_every_shipped_scenario_has_a_rail(name: str) -> None:
    """All cards of every shipped scenario can be drawn, and opened one after the other."""
    rail = rail_of(name)
    openers = [item.key for item in rail.nodes if item.key.endswith(":open")]
    assert len(openers) >= len(rail.desk.scenario.waters)
    for key in openers:
        rail.report(key)
        assert rail.desk.opened == key.removesuffix(":open")


@pytest.mark.parametrize("name", sorted(shipped()))
def test_keys_on_the_page_are_unique(name: str) -> None:
    """Whatever card is open, no two fields or buttons answer to one key."""
    rail = rail_of(name)
    for opener in [item.key for item in rail.nodes if item.key.endswith(":open")]:
        rail.report(opener)
        keys = [item.key for item in rail.nodes if item.key]
        assert len(keys) == len(set(keys))


def test_one_water_takes_the_rest() -> None:
    """Of three waters one can be told to take up every change alone, and be relieved of it."""
    rail = rail_of("juniper")
    first, second, third = rail.desk.scenario.waters
    rail.report(f"waters.{third.id}:balance")
    assert "takes the rest" in words(rail, f"waters.{third.id}")
    rail.report(f"waters.{first.id}.share", "40")
    assert shares(rail) == {first.id: 40, second.id: second.share, third.id: 60 - second.share}
    rail.report(f"waters.{third.id}:balance")
    assert rail.desk.scenario.balance_water is None


def test_results_that_are_out_of_date_are_dimmed(amber: Rail) -> None:
    """While the session says its results are stale, so does the rail."""
    amber.desk.session.stale = True
    assert amber.nodes[0].properties["class"] == "rail stale"
    amber.desk.session.stale = False
    assert amber.nodes[0].properties["class"] == "rail"


def test_waters_are_given_by_flow_and_back_by_share(amber: Rail) -> None:
    """The blend stays; one undo each."""
    session = amber.desk.session
    before, ph = session.scenario.to_dict(), float(session.point.readout("ph"))
    amber.report("waters:amounts")
    assert list(shares(amber).values()) == [None, None]
    assert float(session.point.readout("ph")) == pytest.approx(ph, abs=1e-9)
    assert "waters.well.flow" in session.dials
    assert words(amber, "waters:amounts") == "Give shares"
    amber.report("waters:amounts")
    assert float(session.point.readout("ph")) == pytest.approx(ph, abs=1e-9)
    session.undo()
    session.undo()
    assert session.scenario.to_dict() == before
