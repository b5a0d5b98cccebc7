"""The basis view without a browser."""

import pytest

from explorer.app.basis_view import BasisView
from explorer.app.live_view import Node
from explorer.app.state import Session
from explorer.chemistry.constants import dissolved, solids
from explorer.scenario.files import open_scenario
from explorer.scenario.holding import holdings
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import READOUTS
from explorer.scenario.shipped import shipped
from explorer.studies.outside_checks import outside_checks


def opened(name: str = "juniper") -> BasisView:
    session = Session(open_scenario(shipped()[name]))
    session.solve_now()
    view = BasisView(session)
    view.opened()
    return view


@pytest.fixture(scope="module")
def view() -> BasisView:
    return opened()


def section(view: BasisView, key: str) -> Node:
    return view.view.shown(f"section:{key}")


def rows(view: BasisView, key: str) -> list[str]:
    return [part.words() for part in section(view, key).walk() if part.tag in ("tr", "li")]


def test_every_shipped_scenario_has_all_sections() -> None:
    """Nothing is missing where there is little to say; holds are listed where there are any."""
    keys = ["data", "notes", "cautions", "hazards", "tests", "validity", "excluded", "method"]
    keys += ["studies", "conventions", "constants", "left", "readouts", "checks"]
    for name in shipped():
        found = [node.key for node in opened(name).view.nodes if node.key.startswith("section:")]
        held = ["holds"] if holdings(open_scenario(shipped()[name])) else []
        assert found == [f"section:{key}" for key in ("assumptions", *held, *keys)]


def test_assumptions_say_what_is_taken_why_and_who_says_so(view: BasisView) -> None:
    """One line each; the count stands behind the title."""
    found = rows(view, "assumptions")
    assert any("Contact with air" in row and "assumed" in row for row in found)
    title = next(part for part in section(view, "assumptions").walk() if part.tag == "summary").words()
    assert title == f"Assumptions {len(found) - 1}"


def test_bad_analyses_are_named_with_their_likely_cause() -> None:
    """The balance as entered, its limit, and what would close it."""
    view = opened("faulty_analyses")
    found = rows(view, "data")
    granite = next(row for row in found if "Granite" in row)
    assert "▲ +35.0 %" in granite and "calcium 290 may be mg/L as CaCO3" in granite and "left open" in granite
    assert "4 analyses, ▲ 2 out of balance" in section(view, "data").words()


def test_notes_say_where_and_on_whose_word(view: BasisView) -> None:
    """The most serious first, places by their names."""
    found = rows(view, "notes")[1:]
    levels = [row.split(" ")[1] for row in found]
    assert levels == sorted(levels, key=["error", "caution", "info"].index)
    phosphate = next(row for row in found if row.startswith("▲ caution Orthophosphate"))
    assert phosphate.endswith("common practice")


def test_hazards_are_those_of_the_chemicals_dosed(view: BasisView) -> None:
    """With the steps that dose them; none of chemicals that are not there."""
    found = rows(view, "hazards")
    assert any("Sodium hypochlorite" in row and "chlorine gas forms" in row for row in found)
    assert not any("Fluorosilicic" in row for row in found)


def test_every_constant_is_listed_with_source_and_confidence(view: BasisView) -> None:
    """Those that are used in one table; those left out in another, with the reason."""
    used = rows(view, "constants")
    everything = [*dissolved(), *solids().values()]
    groups = ["Dissolved species", "Solids", "Gas"]
    assert len(used) == 1 + len(groups) + sum(one.used for one in everything) + 1
    bicarbonate = next(row for row in used if row.startswith("CO₂(aq) + H₂O = H⁺ + HCO₃⁻"))
    assert "−6.352" in bicarbonate and "Plummer & Busenberg 1982" in bicarbonate
    assert bicarbonate.endswith("seen in the source")
    assert any(row.endswith("from memory") for row in used)
    left = rows(view, "left")[1:]
    assert len(left) == sum(not one.used for one in everything)
    assert all("left out" in row for row in left)


def test_every_readout_is_explained(view: BasisView) -> None:
    """Meaning and source of each."""
    found = " ".join(rows(view, "readouts"))
    assert all(readout.meaning in found for readout in READOUTS.values())


def test_no_text_is_cut(view: BasisView) -> None:
    """Long explanations come in parts that fit."""
    assert not [node for node in view.view.nodes if str(node.properties.get("text", "")).endswith("…")]


def test_rows_can_be_searched(view: BasisView) -> None:
    """Every line of every table and list is looked through by the one search field."""
    looked = [part for part in view.view.nodes if part.properties.get("data-words")]
    lines = [
        part
        for part in view.view.nodes
        if part.tag in ("tr", "li") and not {"th"} >= {child.tag for child in part.children}
    ]
    assert set(map(id, lines)) <= set(map(id, looked))


def test_what_does_not_change_is_made_once(view: BasisView) -> None:
    """A turned dial does not build the tables of constants again."""
    before = section(view, "constants")
    view.session.turn("waters.slate.share", 33)
    assert section(view, "constants") is before


def test_names_from_a_file_are_text() -> None:
    """Markup in provenance and names is shown, not obeyed."""
    view = opened("amber")

    def mark(scenario: Scenario) -> None:
        scenario.waters[0].name = "<img src=x>"
        scenario.waters[0].analyses["winter"].provenance = {"lab": "<script>1</script>"}

    assert view.session.edit("Mark", mark) == ""
    assert any("<img src=x>, winter" in row and "<script>1</script>" in row for row in rows(view, "data"))


def test_assumptions_can_be_saved(view: BasisView) -> None:
    """The register as CSV."""
    view.view.report("csv")
    assert view.session.offered.text.lstrip("\ufeff").startswith("Assumption,Value,Unit,Basis,Source")


def test_every_outside_check_is_a_line_with_its_source(view: BasisView) -> None:
    """The same table as in the report; where engine and publication part, it is marked and says why."""
    found = rows(view, "checks")
    for check in outside_checks():
        said = (check.case, *check.numbers, check.why, check.source)
        row = next(row for row in found if all(part in row for part in said))
        assert ("▲" in row) == bool(check.parts)
    title = next(part for part in section(view, "checks").walk() if part.tag == "summary").words()
    assert f"{len(outside_checks())} cases" in title


def test_holds_are_listed_with_what_they_take_and_whether_they_are_reached() -> None:
    """Of doses and of other dials; without holds there is no such section."""
    scenario = open_scenario(shipped()["amber"])
    raw = scenario.to_dict()
    raw["holds"] = {"waters.well.share": {"readout": "nitrate", "value": 60}}
    session = Session(Scenario.from_dict(raw))
    session.solve_now()
    view = BasisView(session)
    view.opened()
    (line,) = rows(view, "holds")[1:]
    assert "Share of Granite Wellfield" in line and "Nitrate 60.0 mg/L" in line
    assert "▲ cannot be reached: 29.0 at best" in line
    assert "▲ 1 not reached" in section(view, "holds").words()
    assert "section:holds" not in opened("amber").view


def test_a_view_that_is_left_and_come_back_to_is_as_it_was(monkeypatch: pytest.MonkeyPatch) -> None:
    """Nothing is gathered again until a result is another."""
    view = opened("amber")
    found = view.found
    view.closed()
    monkeypatch.setattr("explorer.app.basis_view.gathered", lambda *arguments: pytest.fail("gathered again"))
    view.opened()
    assert view.found is found
