"""Holding a readout with a dial on the rail: one form, for doses and for everything else."""

import math

import pytest

from explorer.app.rail import Rail
from explorer.app.state import Session
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped

SHARE, OTHER = "waters.well.share", "waters.river.share"
FORM = f"hold:{SHARE}"


def rail_of(name: str = "amber") -> Rail:
    session = Session(open_scenario(shipped()[name]))
    rail = Rail(session)
    session.calculate()
    return rail


def with_caustic() -> tuple[Rail, str]:
    """Amber with caustic at the end, and the address of the dose."""
    rail = rail_of()
    rail.report("train:add:dose:sodium_hydroxide")
    return rail, f"{rail.desk.opened}.dose"


def hold(rail: Rail, address: str, **fields: str) -> None:
    """Open the form, fill it in and press Hold."""
    rail.report(f"{address}:aim")
    if "readout" in fields:
        rail.report(f"hold:{address}:readout:{fields.pop('readout')}")
    for field, text in fields.items():
        rail.report(f"hold:{address}:{field}", text)
    rail.report(f"hold:{address}:take")


def text(rail: Rail, key: str) -> str:
    return rail.shown(key).properties["value"]


def message(rail: Rail, key: str) -> str:
    """The sentence about a field."""
    said = rail.desk.entries.refusal(key)
    assert not said or any(said == item.properties.get("text") for item in rail.nodes)
    return said


def reading(rail: Rail, readout: str, stage: str = "finished") -> float:
    return rail.desk.reading(readout, stage)


# ---- a share -------------------------------------------------------------------------------------------


def test_the_form_starts_from_the_water_as_it_is_and_changes_nothing() -> None:
    """The readout of the first target at its present value; the scenario is as before until it is held."""
    rail = rail_of()
    before = rail.desk.scenario.to_dict()
    rail.report(f"{SHARE}:aim")
    assert "CaCO₃ precipitation potential" in rail.shown(FORM).words()
    assert float(text(rail, f"{FORM}:value")) == pytest.approx(reading(rail, "ccpp"), abs=0.051)
    rail.report(f"{FORM}:leave")
    assert FORM not in rail
    assert rail.desk.scenario.to_dict() == before


def test_a_held_share_is_computed_marked_and_at_rest() -> None:
    """Its row shows what it came to and cannot be used; the card says what is held; the readout is met."""
    rail = rail_of()
    hold(rail, SHARE, value="-7")
    assert reading(rail, "ccpp") == pytest.approx(-7, abs=1e-4)
    share = float(rail.desk.session.point.stands(SHARE))
    assert float(text(rail, SHARE)) == pytest.approx(share, abs=0.006)
    assert rail.shown(SHARE).properties["disabled"] and rail.shown(f"{SHARE}:slider").properties["disabled"]
    assert "release the hold to set it by hand" in rail.shown(SHARE).properties["title"]
    card = rail.shown("waters.well").words()
    assert "holds CCPP −7.0" in card and "computed · finished water" in card


def test_the_other_water_takes_what_the_held_share_leaves() -> None:
    """Its row is at rest too, with its true share and flow."""
    rail = rail_of()
    hold(rail, SHARE, value="-7")
    shares = [float(text(rail, address)) for address in (SHARE, OTHER)]
    assert sum(shares) == pytest.approx(100, abs=0.011)
    assert rail.shown(OTHER).properties["disabled"]
    assert f"{OTHER}:aim" not in rail
    assert f"{0.2 * shares[1]:.1f} ML/d" in rail.shown("waters.river").words()


def test_a_dial_that_is_held_cannot_be_turned_from_elsewhere() -> None:
    """Dragging it in a plot is refused in words, and the hold stands."""
    rail = rail_of()
    hold(rail, SHARE, value="-7")
    session = rail.desk.session
    assert "Share of Granite Wellfield is computed: it holds CCPP −7.0" in session.turn(SHARE, 30)
    assert "takes what a held share leaves" in session.turn(OTHER, 30)
    session.turn_along(30)
    assert "release the hold" in session.message
    assert session.scenario.holds[SHARE].value == -7


def test_the_held_value_is_turned_on_the_card() -> None:
    """By number and by slider, which keeps its ends while it is dragged."""
    rail = rail_of()
    hold(rail, SHARE, value="-7")
    goal = f"{SHARE}.hold.value"
    rail.report(goal, "-6")
    assert reading(rail, "ccpp") == pytest.approx(-6, abs=1e-4)
    ends = [rail.shown(f"{goal}:slider").properties[end] for end in ("min", "max")]
    rail.report(f"{goal}:slider", -3.5)
    assert [rail.shown(f"{goal}:slider").properties[end] for end in ("min", "max")] == ends
    rail.report(goal, "2")
    assert rail.desk.scenario.holds[SHARE].value == 2


def test_holding_and_releasing_are_one_undo_step_each() -> None:
    """A released dial stays where the hold put it."""
    rail = rail_of()
    session = rail.desk.session
    before = session.scenario.to_dict()
    hold(rail, SHARE, value="-7")
    share = session.value(SHARE)
    rail.report(f"{SHARE}:aim")
    rail.report(f"{FORM}:release")
    assert not session.scenario.holds and FORM not in rail
    assert session.value(SHARE) == pytest.approx(share, abs=0.001)
    assert not rail.shown(SHARE).properties.get("disabled")
    session.undo()
    assert session.scenario.holds[SHARE].value == -7
    session.undo()
    assert session.scenario.to_dict() == before


@pytest.mark.parametrize(
    ("field", "typed", "said"),
    [("value", "soft", "is not a number"), ("low", "120", "0 to 100 %"), ("high", "-5", "0 to 100 %")],
)
def test_a_bad_entry_stays_in_its_field_with_what_is_allowed(field: str, typed: str, said: str) -> None:
    """It is not held before it is mended, and nothing else that was entered is lost."""
    rail = rail_of()
    rail.report(f"{SHARE}:aim")
    rail.report(f"{FORM}:readout:nitrate")
    rail.report(f"{FORM}:{field}", typed)
    assert text(rail, f"{FORM}:{field}") == typed
    assert said in message(rail, f"{FORM}:{field}").replace("−", "-")
    rail.report(f"{FORM}:take")
    assert not rail.desk.scenario.holds
    assert "has to be mended first" in rail.shown(FORM).words()
    rail.report(f"{FORM}:{field}", "20" if field != "high" else "80")
    rail.report(f"{FORM}:take")
    assert rail.desk.scenario.holds[SHARE].readout == "nitrate"


def test_limits_that_leave_no_range_are_refused() -> None:
    """In the draft and of a hold that stands, beside the field."""
    rail = rail_of()
    rail.report(f"{SHARE}:aim")
    rail.report(f"{FORM}:low", "60")
    rail.report(f"{FORM}:high", "50")
    assert "leaves no range" in message(rail, f"{FORM}:high")
    rail.report(f"{FORM}:high", "90")
    rail.report(f"{FORM}:take")
    rail.report(f"{SHARE}:aim")
    rail.report(f"{FORM}:high", "55")
    assert "leaves no range" in message(rail, f"{FORM}:high")
    assert rail.desk.scenario.holds[SHARE].high == 90
    rail.report(f"{FORM}:low", "")
    assert rail.desk.scenario.holds[SHARE].low is None


def test_what_cannot_be_reached_is_told_with_the_best_that_can() -> None:
    """The dial then stands where the readout comes nearest."""
    rail = rail_of()
    hold(rail, SHARE, readout="nitrate", value="60")
    best = reading(rail, "nitrate")
    assert f"▲ cannot be reached: {best:.1f} at best" in rail.shown("waters.well").words()
    assert float(text(rail, SHARE)) == pytest.approx(100, abs=0.01)


def test_more_holds_than_can_be_solved_together_are_refused_in_words() -> None:
    """Beside the button that was pressed."""
    rail = rail_of("harbor")
    scenario = rail.desk.scenario
    dials = [f"waters.{water.id}.analysis.{key}" for water in scenario.waters for key in ("ph", "calcium")]
    raw = scenario.to_dict()
    raw["holds"] = {address: {"readout": "ph", "value": 8} for address in dials[:4]}
    for address in dials[:4]:
        raw["holds"][address]["high"] = 9 if address.endswith("ph") else 500
    rail.desk.session.replace(type(scenario).from_dict(raw))
    address = f"waters.{scenario.waters[-1].id}.share"
    hold(rail, address)
    assert "at most 4" in rail.shown(f"hold:{address}").words()
    assert len(rail.desk.scenario.holds) == 4


def test_the_place_of_a_hold_is_one_that_the_dial_reaches() -> None:
    """A source water is not; the blend and what follows it are."""
    rail = rail_of()
    rail.report(f"{SHARE}:aim")
    places = [item.properties["value"] for item in rail.shown(f"{FORM}:stage").children]
    assert places == ["blend", "hypo", "finished"]
    rail.report(f"{FORM}:stage", "blend")
    rail.report(f"{FORM}:take")
    assert rail.desk.scenario.holds[SHARE].stage == "blend"
    assert "computed · blend" in rail.shown("waters.well").words()


def test_a_share_beside_a_held_one_tells_its_part_of_the_blend() -> None:
    """Of three waters the others keep their proportion: what was entered stays in the field."""
    rail = rail_of("juniper")
    first, second, *_ = rail.desk.scenario.waters
    entered = second.share
    hold(rail, f"waters.{first.id}.share", readout="chloride", value="60")
    part = 100 * float(rail.desk.session.point.parts[second.id])
    assert part != pytest.approx(entered, abs=0.5)
    assert f"{part:.1f} % of the blend" in rail.shown(f"waters.{second.id}").words()
    assert float(text(rail, f"waters.{second.id}.share")) == entered


def test_holds_on_dials_without_a_card_are_listed() -> None:
    """A strength or a measured value that a file holds can be seen, changed and released."""
    rail = rail_of()
    raw = rail.desk.scenario.to_dict()
    address = "waters.well.analysis.nitrate"
    raw["holds"] = {address: {"readout": "nitrate", "value": 20, "high": 90}}
    rail.desk.session.replace(type(rail.desk.scenario).from_dict(raw))
    listed = rail.shown("held").words()
    assert "Nitrate of Granite Wellfield" in listed and "holds NO₃ 20.0" in listed
    assert "computed · finished water" in listed
    rail.report(f"{address}:aim")
    rail.report(f"hold:{address}:release")
    assert not rail.desk.scenario.holds and "held" not in rail


# ---- a dose --------------------------------------------------------------------------------------------


def test_a_dose_holds_the_ph_behind_its_step() -> None:
    """It starts from the pH the water has; the card shows the dose it takes, and the held value to turn."""
    rail, dose = with_caustic()
    step = dose.split(".")[-2]
    ph = reading(rail, "ph", step)
    rail.report(f"{dose}:aim")
    assert float(text(rail, f"hold:{dose}:value")) == pytest.approx(ph, abs=0.0051)
    rail.report(f"hold:{dose}:high", "60")
    rail.report(f"hold:{dose}:take")
    rail.report(f"train.{step}.hold.value", "8,2")
    assert reading(rail, "ph", step) == pytest.approx(8.2, abs=1e-6)
    card = rail.shown(f"train.{step}").words()
    assert "holds pH 8.20" in card and "computed" in card
    assert float(text(rail, dose)) == pytest.approx(rail.desk.dose(step), abs=0.006)
    assert rail.shown(dose).properties["disabled"]
    assert rail.desk.scenario.step(step).hold.ceiling.value == 60


def test_a_dose_may_hold_a_readout_further_on() -> None:
    """The same form; only the place is another."""
    rail, dose = with_caustic()
    step = dose.split(".")[-2]
    rail.report("train:add:air:")
    hold(rail, dose, high="60", value="8.3", stage="finished")
    assert rail.desk.scenario.step(step).hold is None
    assert reading(rail, "ph") == pytest.approx(8.3, abs=1e-6)
    assert "computed · finished water" in rail.shown(f"train.{step}").words()
    rail.report(f"{dose}:aim")
    rail.report(f"hold:{dose}:stage", step)
    assert rail.desk.scenario.step(step).hold.value == 8.3 and not rail.desk.scenario.holds


def test_a_dose_with_a_tolerance_is_held_too() -> None:
    """The tolerance of its pump goes: a held dose is what it takes, whatever the pump does."""
    rail = rail_of()
    assert "train.hypo.dose" in rail.desk.scenario.tolerances
    hold(rail, "train.hypo.dose", value="7.5")
    assert rail.desk.scenario.step("hypo").hold.value == 7.5
    assert "train.hypo.dose" not in rail.desk.scenario.tolerances


def test_a_dose_needs_a_limit() -> None:
    """It has none of its own."""
    rail, dose = with_caustic()
    rail.report(f"{dose}:aim")
    rail.report(f"hold:{dose}:high", "")
    assert "a number is needed here" in message(rail, f"hold:{dose}:high")


def test_a_dose_at_its_ceiling_is_told() -> None:
    """With the pH that it does reach."""
    rail, dose = with_caustic()
    step = dose.split(".")[-2]
    hold(rail, dose, high="2", value="11")
    best = reading(rail, "ph", step)
    assert f"▲ cannot be reached: {best:.2f} at best" in rail.shown(f"train.{step}").words()
    assert text(rail, dose).startswith("2.0")


def test_a_released_dose_starts_from_what_the_hold_came_to() -> None:
    """To three figures and more."""
    rail, dose = with_caustic()
    step = dose.split(".")[-2]
    hold(rail, dose, high="60", value="8")
    held = rail.desk.dose(step)
    rail.report(f"{dose}:aim")
    rail.report(f"hold:{dose}:release")
    assert rail.desk.scenario.step(step).dose.value == pytest.approx(held, rel=1e-4)


def test_another_held_readout_starts_from_the_water() -> None:
    """Its value is that of the water, not the old number in a new meaning."""
    rail, dose = with_caustic()
    step = dose.split(".")[-2]
    hold(rail, dose, high="60", value="8")
    rail.report(f"{dose}:aim")
    rail.report(f"hold:{dose}:readout:ccpp")
    held = rail.desk.scenario.step(step).hold
    assert held.readout == "ccpp"
    assert held.value == pytest.approx(reading(rail, "ccpp", step), abs=0.051)


@pytest.mark.parametrize("stage", ["own", "finished"])
def test_a_held_dose_in_another_unit_is_the_same_dose(stage: str) -> None:
    """Its limit is converted with it."""
    rail, dose = with_caustic()
    key, step = dose.removesuffix(".dose"), dose.split(".")[-2]
    hold(rail, dose, high="60", value="8", **({} if stage == "own" else {"stage": stage}))
    moles = float(rail.desk.session.point.dosing[step].moles)
    rail.report(f"{key}.hold.ceiling.unit" if stage == "own" else f"{dose}.unit", "mmol/L")
    now = rail.desk.session.point.dosing[step]
    assert (float(now.moles), now.unit) == (pytest.approx(moles, rel=1e-6), "mmol/L")
    assert rail.desk.session.holdings[dose].high == pytest.approx(60 / 40, rel=1e-3)


def test_a_menu_line_opens_the_form() -> None:
    """For whoever looks for it there."""
    rail = rail_of()
    rail.report("waters.well:hold")
    assert FORM in rail
    assert math.isfinite(float(text(rail, f"{FORM}:value")))
