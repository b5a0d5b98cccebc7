"""The window view without a browser: dials, ranges, map, legend, and clicking."""

from types import SimpleNamespace

import numpy as np
import pytest

from explorer.app.files import Shelf
from explorer.app.look import DARK, HATCHES, LIGHT
from explorer.app.main import build
from explorer.app.shell import Shell
from explorer.app.window_view import WindowView
from explorer.scenario.shipped import shipped

WELL, HYPO, PH = "waters.well.share", "train.hypo.dose", "waters.well.analysis.ph"


@pytest.fixture
def shell() -> Shell:
    """The shipped river and wellfield with its map open."""
    shell = build(shipped()["amber"], shelf=Shelf())
    shell.views.open("window")
    return shell


@pytest.fixture
def view(shell: Shell) -> WindowView:
    return shell.views["window"]


def tap(view: WindowView, x: float, y: float) -> None:
    view.plot._tapped(SimpleNamespace(x=x, y=y))


def test_map_is_over_the_swept_dial_and_one_of_another_kind(view: WindowView) -> None:
    """At first: what is swept across, a dose up, both over their usual ranges."""
    setting = view.choices.setting()
    assert (setting.x.address, setting.y.address) == (WELL, HYPO)
    assert (setting.x_range, setting.y_range) == ((0, 100), (0, 3))
    assert (view.plot.x_range.end, view.plot.y_range.end) == (100, 3)
    assert view.plot.figure.xaxis[0].axis_label.text == "Share of Granite Wellfield, %"


def test_legend_lists_what_is_missed_first_and_how_much_of_the_map(view: WindowView) -> None:
    """Colour and hatch are beside the words, never alone."""
    words = view.legend.describe().words()
    assert "all targets met 16 %" in words
    assert "CaCO₃ potential below −5 44 %" in words and "pH below 7.4 39 %" in words
    looks = [node.properties.get("class", "") for node in view.legend.describe().walk()]
    assert "swatch hatch-0" in looks and "swatch hatch-1" in looks


def test_regions_are_drawn_with_a_colour_and_a_hatch_each(view: WindowView) -> None:
    """And named on the map where there is room."""
    areas = view.plot.areas.data
    assert areas["hatch"] == list(HATCHES[:2]) and areas["colour"] == list(LIGHT.series[:2])
    assert {"CaCO₃ potential below −5", "pH below 7.4"} <= set(view.plot.names.data["text"])
    view.restyle(DARK)
    assert view.plot.areas.data["colour"] == list(DARK.series[:2])


def test_page_can_tell_values_and_the_missed_target_at_any_place(view: WindowView) -> None:
    """It has every target's readout with its limits, and that of the contours."""
    grid = view.plot.grid.data
    assert grid["name"] == ["CaCO₃ potential", "pH", "Nitrate"]
    assert grid["low"][:2] == [-5, 7.4] and np.isnan(grid["high"][0]) and grid["high"][2] == 50
    assert grid["values"][1].shape == (129, 129)
    view.head.report("readout:alkalinity")
    assert view.plot.grid.data["name"][-1] == "Alkalinity"


def test_click_sets_both_dials_as_one_step(shell: Shell, view: WindowView) -> None:
    """At the nearest step of each; one undo brings both back."""
    session = shell.session
    tap(view, 20.04, 2.013)
    assert session.value(WELL) == pytest.approx(20, abs=session.dials[WELL].step)
    assert session.value(HYPO) == pytest.approx(2.01, abs=session.dials[HYPO].step)
    assert len(session.work.past) == 1
    assert view.plot.point.data["x"] == [session.value(WELL)]
    session.undo()
    assert (session.value(WELL), session.value(HYPO)) == (40, 1.2)
    assert view.plot.point.data == {"x": [40], "y": [1.2]}


def test_click_beside_the_map_does_nothing(shell: Shell, view: WindowView) -> None:
    """The axes are no places of the map."""
    tap(view, -3, 1)
    assert shell.session.work.past == []


def test_two_shares_of_three_both_become_what_is_clicked() -> None:
    """The third water takes the rest."""
    shell = build(shipped()["juniper"], shelf=Shelf())
    shell.views.open("window")
    view = shell.views["window"]
    view.choices.choose(x="waters.linen.share", y="waters.slate.share")
    tap(view, 30, 45)
    assert [water.share for water in shell.session.scenario.waters] == pytest.approx([30, 45, 25])


def test_turning_the_drawn_dials_keeps_the_map_and_moves_the_mark(shell: Shell, view: WindowView) -> None:
    """Only another input makes another map."""
    drawn = view.drawn
    shell.session.turn(WELL, 62.5)
    shell.session.turn(HYPO, 0.8)
    assert view.drawn is drawn and view.plot.point.data == {"x": [62.5], "y": [0.8]}
    shell.session.turn(PH, 7.4)
    assert view.drawn is not drawn


def test_proportions_of_the_other_waters_are_an_input() -> None:
    """Turning a share keeps the map only while the others keep their proportion."""
    shell = build(shipped()["juniper"], shelf=Shelf())
    shell.views.open("window")
    view = shell.views["window"]
    view.choices.choose(x="waters.linen.share", y=next(a for a in shell.session.dials if a.endswith(".dose")))
    drawn = view.drawn
    shell.session.turn("waters.linen.share", 33.3)
    assert view.drawn is drawn
    shell.session.turn("waters.slate.share", 10)
    assert view.drawn is not drawn


def test_range_stays_while_its_dial_is_turned(shell: Shell, view: WindowView) -> None:
    """The axis is pinned; only choosing another range changes it."""
    shell.session.turn(HYPO, 8.0)
    assert view.choices.setting().y_range == (0, 3)
    view.controls.report("y-stop", "10")
    assert view.plot.y_range.end == 10
    view.controls.report("y-start", "12")
    assert view.choices.setting().y_range == (10, 12)


def test_range_that_is_none_is_refused_beside_its_field(view: WindowView) -> None:
    """What was drawn stays."""
    view.controls.report("x-stop", "0")
    assert "differ" in view.controls.describe().words()
    view.controls.report("x-stop", "120")
    assert "outside what is allowed" in view.controls.describe().words()
    assert view.plot.x_range.end == 100


def test_choosing_the_dial_of_the_other_side_exchanges_them(view: WindowView) -> None:
    """A map needs two dials."""
    view.controls.report(f"dial-x:{HYPO}")
    setting = view.choices.setting()
    assert (setting.x.address, setting.y.address) == (HYPO, WELL)
    view.controls.report("swap")
    assert view.choices.setting().x.address == WELL


def test_without_targets_the_map_says_what_to_do(shell: Shell, view: WindowView) -> None:
    """Contours remain; nothing is shaded."""
    shell.session.edit("Remove", lambda scenario: scenario.targets.clear())
    assert "Press a tile above to enter one" in view.legend.describe().words()
    assert view.plot.areas.data["xs"] == [] and len(view.plot.lines.data["xs"]) > 2


def test_a_target_added_anywhere_is_on_the_map_at_once(shell: Shell, view: WindowView) -> None:
    """The map is of the scenario as it stands."""

    def cap(scenario) -> None:
        scenario.targets[2].high = 10

    shell.session.edit("Nitrate", cap)
    assert "Nitrate above 10" in view.legend.describe().words()


def test_closed_map_rests_and_is_new_when_opened(shell: Shell, view: WindowView) -> None:
    """No calculation behind other views."""
    drawn = view.drawn
    shell.views.open("ledger")
    shell.session.turn(PH, 7.5)
    assert view.drawn is drawn
    shell.views.open("window")
    assert view.drawn is not drawn


def test_last_good_map_stays_dimmed_while_the_inputs_have_no_result(shell: Shell, view: WindowView) -> None:
    """Until there is a result again."""
    assert "old" not in view.card.css_classes
    shell.session.stale = True
    assert "old" in view.card.css_classes
    shell.session.stale = False
    assert "old" not in view.card.css_classes


def test_names_from_a_file_stay_text(shell: Shell, view: WindowView) -> None:
    """Axis label and lists take them as they are written."""
    hostile = "<img src=x onerror=alert(1)>"

    def rename(scenario) -> None:
        scenario.waters[1].name = hostile

    shell.session.edit("Rename", rename)
    assert view.plot.figure.xaxis[0].axis_label.text == f"Share of {hostile}, %"
    assert type(view.plot.figure.xaxis[0].axis_label).__name__ == "PlainText"
