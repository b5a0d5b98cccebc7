"""Shares of the blend and flows of the waters: the same plant, entered in two ways."""

import pytest

from explorer.scenario.amounts import by_flow, give_flows, give_shares
from explorer.scenario.evaluate import evaluate
from explorer.scenario.model import Quantity, Scenario


@pytest.fixture
def blend(plant):
    return plant(
        {"river": 60, "well": 30, "transfer": 10},
        flow={"value": 20, "unit": "ML/d"},
        balance_water="river",
        tolerances={"waters.well.share": {"plus_minus": 2}},
    )


def test_every_water_gets_the_flow_of_its_share(blend):
    """The blend stays the same water."""
    before = float(evaluate(blend).readout("ph"))
    give_flows(blend)
    assert [water.flow for water in blend.waters] == [
        Quantity(12, "ML/d"), Quantity(6, "ML/d"), Quantity(2, "ML/d")]  # fmt: skip
    assert blend.flow is None and blend.balance_water is None and blend.tolerances == {}
    read = Scenario.from_dict(blend.to_dict())
    assert float(evaluate(read).readout("ph")) == pytest.approx(before, abs=1e-12)
    assert read.total_flow() == pytest.approx(20_000 / 24)


def test_shares_and_the_flow_of_the_blend_come_back(blend):
    """There and back; what hung on the shares does not return."""
    give_flows(blend)
    give_shares(blend)
    assert [water.share for water in blend.waters] == [60, 30, 10]
    assert blend.flow == Quantity(20, "ML/d") and not by_flow(blend)
    Scenario.from_dict(blend.to_dict())


def test_flows_in_different_units_are_added(blend):
    """In the unit of the first water; shares add to 100 whatever the flows are."""
    give_flows(blend)
    for water, flow in zip(blend.waters, (7, 300, 11), strict=True):
        water.flow = Quantity(flow, "m³/h" if flow == 300 else "ML/d")
    give_shares(blend)
    assert blend.flow.unit == "ML/d"
    assert blend.flow.value == pytest.approx(7 + 7.2 + 11)
    assert sum(water.share for water in blend.waters) == pytest.approx(100, abs=1e-9)
    assert blend.waters[1].share == pytest.approx(100 * 7.2 / 25.2, abs=1e-6)
    Scenario.from_dict(blend.to_dict())


def test_without_a_flow_of_the_blend_there_is_one_to_begin_with(blend):
    """Flows need a number to be overwritten."""
    blend.flow = None
    give_flows(blend)
    assert sum(water.flow.value for water in blend.waters) == pytest.approx(10)


def test_doing_it_twice_changes_nothing(blend):
    """Shares that are shares stay."""
    before = blend.to_dict()
    give_shares(blend)
    assert blend.to_dict() == before
    give_flows(blend)
    once = blend.to_dict()
    give_flows(blend)
    assert blend.to_dict() == once
