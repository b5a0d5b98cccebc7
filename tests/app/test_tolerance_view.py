"""The tolerance view without a browser: the table changes the scenario, the results follow."""

import numpy as np
import pytest

from explorer.app.files import Shelf
from explorer.app.look import DARK
from explorer.app.main import build
from explorer.app.shell import Shell
from explorer.app.state import Session
from explorer.app.tolerance_table import ToleranceTable
from explorer.app.tolerance_view import ToleranceView
from explorer.scenario.files import open_scenario
from explorer.scenario.model import DialHold
from explorer.scenario.shipped import shipped
from explorer.studies.ranking import allowed_tolerance
from explorer.studies.suggestions import suggested_tolerances

WELL, WELL_PH, HYPO = "waters.well.share", "waters.well.analysis.ph", "train.hypo.dose"
KEY = f"tolerance:{WELL_PH}"


@pytest.fixture
def shell() -> Shell:
    """The shipped river and wellfield, few samples, with the tolerance view open."""
    shell = build(shipped()["amber"], shelf=Shelf())
    shell.session.choose(tolerance={"samples": 512})
    # Three that matter are enough to specify the view, and soon calculated.
    kept = (WELL_PH, "waters.river.analysis.ph", HYPO)
    shell.session.edit("Fewer", lambda scenario: _keep(scenario, kept))
    shell.views.open("tolerance")
    return shell


def _keep(scenario, addresses) -> None:
    scenario.tolerances = {address: scenario.tolerances[address] for address in addresses}


@pytest.fixture
def view(shell: Shell) -> ToleranceView:
    return shell.views["tolerance"]


@pytest.fixture
def table(view: ToleranceView):
    """The page of the tolerances."""
    view.controls.report("page:table")
    return view.table


def stated(shell: Shell, address: str) -> dict:
    return shell.session.scenario.tolerances[address].to_dict()


# ---- results -------------------------------------------------------------------------------------------


def test_fan_lies_around_the_curve_of_the_sweep(view: ToleranceView) -> None:
    """Two layers, nominal curve, target band and operating point in one plot."""
    plot = view.plots.plots["fan"]
    assert len(plot.fan.data["xs"]) == 2 and len(plot.lines.data["ys"]) == 1
    assert plot.band.visible and view.plots.point.location == 40
    outer, inner = view.picture().fan
    curve = plot.lines.data["ys"][0]
    assert ((outer.low <= curve) & (curve <= outer.high)).mean() > 0.9
    assert (outer.high - outer.low >= inner.high - inner.low).all()


def test_distribution_is_that_of_the_operating_point(shell: Shell, view: ToleranceView) -> None:
    """It moves with the point; what it shows is said in words."""
    before = view.histogram.marks.data["x"]
    assert view.histogram.nominal.location == pytest.approx(float(shell.session.point.readout("ccpp")))
    assert "95 % within −" in view.distribution_head.describe().words()
    shell.session.turn(WELL, 90)
    assert view.histogram.marks.data["x"] != before
    assert "at the operating point" in view.histogram.figure.html_attributes["aria-label"]


def test_dragging_in_the_fan_turns_the_swept_dial(shell: Shell, view: ToleranceView) -> None:
    """As in the sweep view."""
    view.plots.point.location = 70.0003
    assert shell.session.value(WELL) == pytest.approx(70)


def test_chances_of_each_target_and_of_all(view: ToleranceView) -> None:
    """A part of the outcomes, never a certainty; all together are not more likely than each."""
    words = view.figures.describe().words()
    assert "CaCO₃ potential at least −5 mg/L as CaCO₃" in words and "all of them" in words
    assert "Nitrate at most 50 mg/L over 99 %" in words
    assert view.controls.describe().words().count("All entered targets are met in ") == 1


def test_extremes_here_and_anywhere_with_their_place(view: ToleranceView) -> None:
    """Wider than 95 % of the outcomes, and wider still over the sweep and the seasons."""
    words = view.figures.describe().words()
    assert "everything at its worst, here" in words and "anywhere on the sweep" in words
    found = view.found
    low, high = found.study.here.percentiles("ccpp", (2.5, 97.5))[:, 0]
    assert found.anywhere[0].value <= found.here[0].value <= low
    assert high <= found.here[1].value <= found.anywhere[1].value
    assert f"{found.anywhere[0].season}" in words and " % , " not in words
    assert "pH of Granite Wellfield low end high end" in words


def test_ranking_names_the_measurement_that_pays(view: ToleranceView) -> None:
    """Bars with their figures; the headline gives the best one."""
    words = view.bars.describe().words()
    assert "Halving the tolerance of pH of Granite Wellfield narrows that by" in words
    bars = [node for node in view.bars.describe().walk() if "bar " in node.properties.get("class", "")]
    assert len(bars) == 2 * len(view.found.ranking.ranks)
    assert "100.0%" in [node.properties["--part"] for node in bars]


def test_another_readout_is_surveyed(shell: Shell, view: ToleranceView) -> None:
    """Everything on the page is then of it."""
    view.head.report("readout:ph")
    assert view.found.readout == "ph"
    assert view.picture().title == "pH" and "How far pH may go" in view.figures.describe().words()


def test_samples_and_seed_are_shown_and_chosen(shell: Shell, view: ToleranceView) -> None:
    """Another seed gives other samples, the same seed the same digits."""
    first = view.histogram.marks.data["x"]
    view.controls.report("seed", "7")
    other = view.histogram.marks.data["x"]
    assert view.found.study.seed == 7 and other != first
    view.controls.report("seed", "20")
    assert view.histogram.marks.data["x"] == first
    view.controls.report("seed", "1.5")
    assert "allowed a whole number" in view.controls.describe().words()
    view.controls.report("samples", "2048")
    assert view.found.study.samples == 2048


def test_nothing_is_calculated_again_without_need(shell: Shell, view: ToleranceView) -> None:
    """Choices of other views and a new title are no reason."""
    found = view.found
    shell.session.choose(family="chlorine")
    shell.session.edit("Title", lambda scenario: setattr(scenario, "title", "Other"))
    assert view.found is found


def test_results_turn_dark(view: ToleranceView) -> None:
    """Both plots take the palette."""
    view.restyle(DARK)
    assert view.histogram.bar.glyph.fill_color == DARK.accent
    assert view.plots.plots["fan"].fan_area.glyph.fill_color == DARK.accent


def test_stale_results_are_dimmed(shell: Shell, view: ToleranceView) -> None:
    """The last good result stays."""
    shell.session.stale = True
    assert all("old" in card.css_classes for card in view.cards)
    shell.session.stale = False
    assert not any("old" in card.css_classes for card in view.cards)


# ---- the table -----------------------------------------------------------------------------------------


def test_half_width_is_edited_and_the_results_follow(shell: Shell, view: ToleranceView, table) -> None:
    """One undo step; a narrower tolerance narrows the spread."""
    before, steps = view.found.ranking.width, len(shell.session.work.past)
    table.report(f"{KEY}:plus_minus", "0,05")
    assert stated(shell, WELL_PH) == {"plus_minus": 0.05}
    assert len(shell.session.work.past) == steps + 1
    assert view.found.ranking.width < before
    shell.session.undo()
    assert stated(shell, WELL_PH) == {"plus_minus": 0.1}


def test_width_that_is_none_is_refused_beside_its_field(shell: Shell, table) -> None:
    """The tolerance stays as it was."""
    table.report(f"{KEY}:plus_minus", "-1")
    assert "outside what is allowed" in table.describe().words()
    assert stated(shell, WELL_PH) == {"plus_minus": 0.1}


def test_tolerance_becomes_one_sided(shell: Shell, table) -> None:
    """A decay goes down only; back to both sides the wider one counts."""
    table.report(f"{KEY}:kind", "sides")
    table.report(f"{KEY}:plus", "0")
    assert stated(shell, WELL_PH) == {"minus": 0.1, "plus": 0}
    table.report(f"{KEY}:kind", "same")
    assert stated(shell, WELL_PH) == {"plus_minus": 0.1}


def test_another_unit_converts_the_width(shell: Shell, table) -> None:
    """A unit toggle must not change the answer."""
    table.report(f"{KEY}:unit", "%")
    assert stated(shell, WELL_PH) == {"plus_minus": pytest.approx(100 * 0.1 / 7.25, rel=1e-3), "unit": "%"}
    table.report(f"{KEY}:unit", "")
    assert stated(shell, WELL_PH)["plus_minus"] == pytest.approx(0.1, rel=1e-3)


def test_percent_of_zero_is_refused(shell: Shell, table) -> None:
    """Nothing has no parts."""
    shell.session.turn(HYPO, 0)
    unit = shell.session.scenario.tolerances[HYPO].unit
    table.report(f"tolerance:{HYPO}:unit", "" if unit == "%" else "%")
    assert "stands at zero" in table.describe().words()
    assert shell.session.scenario.tolerances[HYPO].unit == unit


def test_distribution_and_common_cause_are_chosen(shell: Shell, table) -> None:
    """Dials with the same word are one cause of error."""
    table.report(f"{KEY}:distribution", "normal")
    table.report(f"{KEY}:shared", "the same pH meter")
    table.report("tolerance:waters.river.analysis.ph:shared", "the same pH meter")
    assert stated(shell, WELL_PH)["distribution"] == "normal"
    labels = [part.label for part in shell.views["tolerance"].found.study.inputs]
    assert labels.count("the same pH meter") == 1 and len(labels) == 2


def test_removed_tolerance_is_offered_again_as_common_practice(shell: Shell, table) -> None:
    """What is usual is marked as such, with what it stands for."""
    table.report(f"{KEY}:drop")
    assert WELL_PH not in shell.session.scenario.tolerances
    words = table.describe().words()
    assert "Usual half-widths (common practice), not entered yet" in words and "laboratory pH" in words
    table.report(f"offer:{WELL_PH}")
    assert stated(shell, WELL_PH) == {"plus_minus": 0.1}


def test_all_usual_half_widths_are_one_step(shell: Shell, table) -> None:
    """Entered tolerances are not overwritten."""
    table.report(f"{KEY}:plus_minus", "0.4")
    steps = len(shell.session.work.past)
    table.report("add-all")
    tolerances = shell.session.scenario.tolerances
    assert tolerances.keys() >= suggested_tolerances(shell.session.scenario).keys()
    assert stated(shell, WELL_PH) == {"plus_minus": 0.4}
    assert len(shell.session.work.past) == steps + 1
    assert "add-all" not in table


def test_any_dial_can_be_added_once(shell: Shell, table) -> None:
    """One without a usual tolerance starts with a few percent."""
    table.report("add:train.hypo.strength")
    assert stated(shell, "train.hypo.strength")["unit"] == "%"
    table.report(f"add:{WELL_PH}")
    assert "has a tolerance already" in table.describe().words()


def test_width_beside_a_value_of_an_analysis_is_listed(shell: Shell, table) -> None:
    """It counts as well, and is edited where it stands."""

    def state(scenario) -> None:
        scenario.waters[0].analyses["winter"].entries = {
            key: entry if key != "sodium" else type(entry)(**{**vars(entry), "plus_minus": 0.5})
            for key, entry in scenario.waters[0].analyses["winter"].entries.items()
        }

    assert shell.session.edit("State a width", state) == ""
    words = table.describe().words()
    assert "Entered beside values of the analyses" in words and "Sodium of Fern River" in words
    assert "offer:waters.river.analysis.sodium" not in table


def test_tolerance_out_of_service_says_so(shell: Shell, table) -> None:
    """It is kept for the return of its step."""

    def switch_off(scenario) -> None:
        scenario.train[0].on = False

    shell.session.edit("Off", switch_off)
    assert "out of service here" in table.describe().words()


def test_without_any_tolerance_the_table_is_open_and_says_what_to_do() -> None:
    """There are no results to be shown, and nothing is calculated."""
    shell = build(shipped()["faulty_analyses"], shelf=Shelf())
    shell.views.open("tolerance")
    view = shell.views["tolerance"]
    assert view.table.visible and not view.results.visible
    assert "Nothing may be off yet" in view.table.describe().words()
    assert view.controls.shown("page:results").properties["disabled"]
    assert view.found is None and view.errand.refusal == ""


def test_removing_the_last_tolerance_brings_the_table_back(shell: Shell, view: ToleranceView) -> None:
    """With undo the results are there again."""
    shell.session.edit("None", lambda scenario: _keep(scenario, ()))
    assert view.table.visible and view.found is None
    shell.session.undo()
    assert view.results.visible and view.found is not None
    assert np.isfinite(view.found.ranking.width)


# ---- what goes along, and how far a dial may be off --------------------------------------------------------


def test_shared_errors_say_what_they_move(shell: Shell, view: ToleranceView, table) -> None:
    """A strength moves the doses of its tank, the flow those that are paced on it."""
    table.report("add:train.hypo.strength")
    table.report("add:flow")
    for address in ("train.hypo.strength", "flow"):
        assert "moves along: dose of Sodium hypochlorite" in table.shown(f"tolerance:{address}").words()


def test_a_tolerance_of_a_held_dial_counts_for_nothing_and_says_why() -> None:
    """Its controller makes up for it."""
    session = Session(open_scenario(shipped()["amber"]))

    def change(scenario) -> None:
        scenario.holds = {HYPO: DialHold(readout="ph", value=7.6, high=5)}

    assert session.edit("Hold", change) == ""
    table = ToleranceTable(session)
    table.refresh()
    assert "held: its controller makes up for it" in table.shown(f"tolerance:{HYPO}").words()


def test_the_largest_tolerance_of_a_dial_is_told(shell: Shell, view: ToleranceView) -> None:
    """Of the first dose at first; the answer is that of the study."""
    card = view.allowed
    asked = card.question()
    assert asked.dial == "train.hypo.dose"
    card.report(f"allowed:dial:{WELL_PH}")
    card.report("allowed:within", "2")
    found = allowed_tolerance(shell.session.scenario, [WELL_PH], asked.readout, 2.0)
    assert card.answer[1].half_width == found.half_width
    assert f"± {found.half_width:.3g} keeps it within" in card.nodes[0].words()


def test_a_distance_that_is_none_is_refused_beside_its_field(view: ToleranceView) -> None:
    """The last answer stays."""
    card = view.allowed
    before = card.answer
    card.report("allowed:within", "0")
    assert card.entries.refusal("allowed:within") == "0 is no distance; allowed above 0"
    assert card.answer is before


def test_many_more_samples_stand_beside_the_percentiles(view: ToleranceView) -> None:
    """When they are asked for: sixteen times as many, a power of two, and the ends from them."""
    assert "… with 10 times the samples?" in view.figures.nodes[0].words()
    view.figures.report("more")
    words = view.figures.nodes[0].words()
    assert "… with 16 times the samples" in words and "samples?" not in words
    assert "What is off at the worst place" in words
