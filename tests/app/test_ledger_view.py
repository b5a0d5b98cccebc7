"""The ledger view without a browser."""

import pytest

from explorer.app.ledger_view import LedgerView
from explorer.app.live_view import Node
from explorer.app.state import Session
from explorer.scenario.files import open_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.shipped import shipped


def opened(name: str) -> LedgerView:
    session = Session(open_scenario(shipped()[name]))
    session.solve_now()
    view = LedgerView(session)
    view.opened()
    return view


def line(view: LedgerView, start: str) -> list[str]:
    """Texts of the row whose first cell starts so, in the order of the columns."""
    rows = [part for part in view.view.nodes if part.tag == "tr"]
    found = next(row for row in rows if row.words().startswith(start))
    return [str(cell.properties.get("text", "")) for cell in found.children]


def heading(view: LedgerView) -> list[str]:
    return [
        part.words() for part in next(p for p in view.view.nodes if p.tag == "thead").children[0].children
    ]


def texts(view: LedgerView) -> str:
    return view.view.nodes[0].words()


def test_every_step_is_a_line_and_every_total_a_column() -> None:
    """What a dose takes carries its sign; what it does not touch stays blank."""
    view = opened("juniper")
    alkalinity = heading(view).index("Alkalinity mg/L as CaCO₃")
    sulfate = heading(view).index("Sulfate mg/L")
    assert line(view, "Coagulant: aluminium hydroxide forms")[alkalinity] == "−8.6"
    dosed = line(view, "Coagulant, 35 mg/L")
    assert dosed[alkalinity] == "" and dosed[sulfate] == "+8.5"
    assert line(view, "Finished water")[alkalinity] == "91.3"


def test_sums_are_checked_in_words() -> None:
    """Closed to rounding in every shipped scenario."""
    for name in shipped():
        assert "✓ The lines add up to the finished water in every column" in texts(opened(name))


def test_amounts_a_day_follow_the_flow() -> None:
    """1 mg/L at 1000 m³/h is 24 kg/d."""
    view = opened("juniper")
    view.view.report("per:day")
    sulfate = heading(view).index("Sulfate kg/d")
    assert float(line(view, "Finished water")[sulfate]) == pytest.approx(33.0 * 1250 * 24 / 1000, rel=0.005)


def test_without_a_flow_there_are_no_amounts_a_day() -> None:
    """The switch is there, but cannot be pressed."""
    view = opened("amber")

    def no_flow(scenario: Scenario) -> None:
        scenario.flow = None

    assert view.session.edit("No flow", no_flow) == ""
    assert view.view.shown("per:day").properties["disabled"]
    view.view.report("per:day")
    assert "Alkalinity mg/L as CaCO₃" in heading(view)


def test_three_hand_checks_with_both_results() -> None:
    """The sentence, what it gives, what the engine has, and how far they are apart."""
    view = opened("dune")
    rows: list[Node] = [
        part for part in view.view.nodes if part.tag == "tr" and "gives alkalinity" in part.words()
    ]
    assert [cell.properties["text"] for cell in rows[0].children][1:] == [
        "18.81 mg/L as CaCO₃", "18.83 mg/L as CaCO₃", "−0.1 %",
    ]  # fmt: skip
    checks = next(part for part in view.view.nodes if part.properties.get("aria-label") == "Hand checks")
    assert sum(part.tag == "tr" for part in checks.walk()) == 1 + 3


def test_without_a_result_it_says_why() -> None:
    """No table of noughts for a water that could not be solved."""
    view = LedgerView(Session(open_scenario(shipped()["amber"])))
    view.opened()
    assert texts(view) == "There is no result yet."


def test_names_from_a_file_are_text() -> None:
    """A name that looks like markup is shown as it is written."""
    view = opened("amber")

    def rename(scenario: Scenario) -> None:
        scenario.waters[0].name = "<img src=x>"

    view.session.edit("Rename", rename)
    assert "<img src=x>, 60 % of the blend" in texts(view)
