"""How much of each water: a share of the blend, or a flow of its own; from one to the other, in place."""

from explorer.scenario.dials import neat
from explorer.scenario.editing import SHARE_DECIMALS, tidy
from explorer.scenario.model import Quantity, Scenario
from explorer.scenario.shares import WHOLE, in_service
from explorer.treatment.units import from_base, to_base

FIRST_FLOW = Quantity(10, "ML/d")
"""Of the blend where none was entered: to be overwritten."""

FLOW_DECIMALS = 9


def by_flow(scenario: Scenario) -> bool:
    """Whether the waters have flows of their own."""
    return all(water.flow is not None for water in scenario.waters)


def give_flows(scenario: Scenario) -> None:
    """A flow for every water instead of shares; the blend stays what it is, but for its flow where none was
    entered. What hung on the shares (their tolerances, a sweep over one, the balance water) goes."""
    if by_flow(scenario):
        return
    whole = scenario.flow or FIRST_FLOW
    for water in scenario.waters:
        part = whole.value * (water.share or 0) / WHOLE
        water.flow, water.share = Quantity(neat(round(part, FLOW_DECIMALS)), whole.unit), None
    scenario.flow = scenario.balance_water = None
    tidy(scenario)


def give_shares(scenario: Scenario) -> None:
    """Shares of the blend instead of flows; their sum becomes the flow of the blend."""
    if not by_flow(scenario):
        return
    unit = scenario.waters[0].flow.unit
    flows = {
        water.id: float(from_base(to_base(water.flow.value, water.flow.unit, "flow"), unit, "flow"))
        for water in scenario.waters
    }
    shares = {name: neat(round(share, SHARE_DECIMALS)) for name, share in in_service(flows).items()}
    for water in scenario.waters:
        water.flow, water.share = None, shares[water.id]
    last = scenario.waters[-1]
    last.share = neat(round(WHOLE - sum(water.share for water in scenario.waters[:-1]), SHARE_DECIMALS))
    scenario.flow = Quantity(neat(round(sum(flows.values()), FLOW_DECIMALS)), unit)
    tidy(scenario)
