"""The compare view without a browser."""

import pytest

from explorer.app.compare_view import CompareView
from explorer.app.state import Session
from explorer.scenario.files import open_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.shipped import shipped

WELL = "waters.well.share"


def opened(name: str = "amber") -> CompareView:
    session = Session(open_scenario(shipped()[name]))
    session.solve_now()
    view = CompareView(session)
    view.opened()
    return view


@pytest.fixture
def view() -> CompareView:
    """The shipped river and wellfield, with its other season beside it."""
    return opened()


def heading(view: CompareView) -> list[str]:
    head = next(part for part in view.sheet.nodes if part.tag == "thead")
    return [cell.words() for cell in head.children[0].children]


def lines(view: CompareView) -> dict[str, list[str]]:
    """Texts of every row by its label."""
    body = next(part for part in view.sheet.nodes if part.tag == "tbody")
    rows = [row for row in body.children if len(row.children) > 1]
    return {row.children[0].words(): [cell.words() for cell in row.children[1:]] for row in rows}


def keep(view: CompareView, name: str) -> None:
    view.controls.report("option:keep")
    view.controls.report("option:new", name)


def words(view: CompareView) -> str:
    return view.sheet.nodes[0].words()


def test_other_season_stands_beside_the_present_one(view: CompareView) -> None:
    """Only rows that differ: the river has other analyses, the well the same."""
    assert [title.split(" ")[0] for title in heading(view)] == ["Dial", "As", "summer"]
    found = lines(view)
    assert found["Temperature of Fern River °C"] == ["4", "19"]
    assert not any("Granite" in label for label in found)
    assert "Nitrate mg/L" in found


def test_results_carry_the_state_of_their_target_in_words(view: CompareView) -> None:
    """Glyph and word, never colour alone."""
    potential = next(cells for label, cells in lines(view).items() if label.startswith("Calcium carbonate"))
    assert all("▼ below" in cell or "● in range" in cell for cell in potential)
    assert "dissolves" in potential[0]


def test_kept_options_are_columns_in_the_order_of_their_letters(view: CompareView) -> None:
    """Kept here, changed in the rail, compared here."""
    keep(view, "Less well")
    view.session.turn(WELL, 80)
    keep(view, "More well")
    titles = heading(view)
    assert [title[:11] for title in titles[2:4]] == ["A Less well", "B More well"]
    assert lines(view)["Share of Granite Wellfield %"] == ["80", "40", "80", "80"]


def test_option_is_renamed_gone_back_to_and_deleted_in_its_column(view: CompareView) -> None:
    """Each with the menu at its name."""
    keep(view, "First")
    view.session.turn(WELL, 80)
    view.sheet.report("option:A:rename")
    view.controls.report("option:name", "Agreed")
    assert heading(view)[2].startswith("A Agreed")
    view.sheet.report("option:A:back")
    assert view.session.value(WELL) == 40
    view.sheet.report("option:A:drop")
    assert view.session.scenario.options == [] and not any("Agreed" in title for title in heading(view))


def test_a_name_that_is_taken_is_refused_beside_the_field(view: CompareView) -> None:
    """The field stays open."""
    keep(view, "First")
    keep(view, "First")
    assert "there twice" in view.controls.nodes[0].words() and "option:new" in view.controls


def test_kinds_of_cases_are_chosen(view: CompareView) -> None:
    """Sources off come and go; without any other case the view says what to do."""
    view.controls.report("kind:sources", True)
    assert any(title.startswith("Fern River off") for title in heading(view))
    for kind in ("seasons", "sources"):
        view.controls.report(f"kind:{kind}", False)
    assert words(view).startswith("Nothing to compare yet. “Keep as option”")


def test_without_options_and_seasons_each_source_is_switched_off(view: CompareView) -> None:
    """There is always something to see where there are two waters."""

    def one_season(scenario: Scenario) -> None:
        scenario.seasons = ["winter"]
        for water in scenario.waters:
            water.analyses = {"winter": water.analyses["winter"]}

    assert view.session.edit("One season", one_season) == ""
    assert view.kinds == ("sources",) and "Fern River off" in words(view)


def test_curves_are_told_apart_by_name_and_dash(view: CompareView) -> None:
    """The scenario as it stands is the main curve."""
    keep(view, "First")
    view.session.turn("train.hypo.dose", 2)
    plot = view.plots.plots["overlay"]
    assert plot.others.data["label"] == ["A", "summer"]
    dashes = [tuple(dash) for dash in plot.others.data["dash"]]
    assert len(set(dashes)) == 2 and () not in dashes
    assert view.plots.point.location == 40


def test_another_readout_is_drawn(view: CompareView) -> None:
    """It is the one chosen over the sweep, too."""
    view.head.report("readout:nitrate")
    plot = view.plots.plots["overlay"]
    assert plot.picture.title == "Nitrate" and max(plot.lines.data["ys"][0]) == pytest.approx(29, abs=0.1)


def test_dragging_the_point_turns_the_dial(view: CompareView) -> None:
    """As in the sweep."""
    view.plots.turned(63.2)
    assert view.session.value(WELL) == 63


def test_case_without_an_answer_says_why() -> None:
    """Its inputs stay in the table, its results are none."""
    view = opened("juniper")

    def too_much(scenario: Scenario) -> None:
        scenario.step("coagulant").dose = type(scenario.step("coagulant").dose)(900, "mg/L")

    assert view.session.edit("Dose", too_much) == ""
    assert "▲ As it stands: alkalinity exhausted: add alkali first" in words(view)
    found = lines(view)
    assert found["Dose of Coagulant mg/L"] == ["900", "19.1"]
    assert found["pH"] == ["— no value", "8.00 ● in range"]


def test_table_can_be_saved(view: CompareView) -> None:
    """A column a case."""
    view.controls.report("csv")
    assert view.session.offered.text.lstrip("\ufeff").startswith("Section,What,Unit,As it stands,summer")


def test_closed_view_rests(view: CompareView) -> None:
    """It catches up when it is opened again."""
    view.closed()
    view.session.turn("waters.well.analysis.nitrate", 31)
    before = lines(view)
    view.opened()
    assert lines(view) != before


def test_every_shipped_scenario_can_be_compared() -> None:
    """Whatever there is to compare."""
    for name in shipped():
        view = opened(name)
        view.controls.report("kind:sources", True)
        assert view.errand.refusal == "" and view.table is not None
        assert len(view.table.cases) == len(view.cases())


def test_names_are_text(view: CompareView) -> None:
    """Markup in the name of an option is shown, not obeyed."""
    keep(view, "<img src=x>")
    assert heading(view)[2].startswith("A <img src=x>")
