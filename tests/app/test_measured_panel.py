"""Measured points over the sweep, without a browser."""

from typing import Any

import pytest

from explorer.app.state import Session
from explorer.app.sweep_view import SweepView
from explorer.scenario.files import dumps, open_scenario, read_scenario
from explorer.scenario.shipped import shipped


@pytest.fixture
def view() -> SweepView:
    """The sweep of the shipped river and wellfield, along the share of the well."""
    session = Session(open_scenario(shipped()["amber"]))
    session.solve_now()
    made = SweepView(session)
    made.opened()
    return made


def key(view: SweepView, ending: str) -> str:
    return next(node.key for node in view.controls.nodes if node.key.endswith(ending))


def enter(view: SweepView, ending: str, value: Any = None) -> None:
    view.controls.report(key(view, ending), value)


def add(view: SweepView, text: str, name: str = "", readout: str = "ph") -> None:
    """Fill the form in and press its button."""
    enter(view, ":name", name)
    enter(view, ":readout", readout)
    enter(view, ":paste", text)
    enter(view, ":add")


def words(view: SweepView) -> str:
    return view.controls.nodes[0].words()


def dots(view: SweepView, plot: str) -> list[tuple[float, float]]:
    data = view.plots.plots[plot].dots.data
    return list(zip(data["x"], data["y"], strict=True))


def test_pasted_points_lie_over_the_plot_of_their_readout(view: SweepView) -> None:
    """With their number, bias and scatter in its note; the other plots stay as they are."""
    add(view, "0 8.6\n50\t7.4\n100 7.25", "Plant, May")
    assert dots(view, "ph") == [(0.0, 8.6), (50.0, 7.4), (100.0, 7.25)]
    assert dots(view, "buffer") == dots(view, "chosen") == []
    note = view.heads["ph"].nodes[0].words()
    assert "3 measured, model" in note and "scatter" in note
    assert "Plant, May: the model is" in words(view) and "Measured (1)" in words(view)


def test_readouts_may_stand_in_the_points(view: SweepView) -> None:
    """Three columns: dial, readout, value; every readout is a set of its own."""
    add(view, "dial;what;value\n20;pH;8,1\n20;buffer_intensity;0,5", "Bench")
    assert dots(view, "ph") == [(20.0, 8.1)] and dots(view, "buffer") == [(20.0, 0.5)]
    assert [part.name for part in view.session.scenario.measured] == ["Bench", "Bench 2"]


def test_points_are_kept_in_the_file(view: SweepView) -> None:
    """What is saved and opened again has them."""
    add(view, "0 8.6\n50 7.4", "Plant")
    (kept,) = read_scenario(dumps(view.session.scenario)).measured
    assert (kept.dial, kept.readout, kept.points) == ("waters.well.share", "ph", [[0, 8.6], [50, 7.4]])


def test_a_file_is_taken_with_its_name(view: SweepView) -> None:
    """The form is empty again afterwards."""
    enter(view, ":file", {"name": "jar test.csv", "text": "share,pH\n0,8.6\n50,7.4\n"})
    (kept,) = view.session.scenario.measured
    assert kept.name == "jar test" and view.controls.shown(key(view, ":paste")).properties["value"] == ""


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("0 8.6\n50 seven", 'line 2: "seven" is not'),
        ("0 8.6 1 2", "line 1: 4 columns found"),
        ("", "there are no points"),
        ("0;nonsense;3", "line 1"),
    ],
)
def test_what_cannot_be_read_is_refused_by_line(view: SweepView, text: str, said: str) -> None:
    """Nothing is kept, and the text stays in the field."""
    add(view, text)
    assert said in words(view)
    assert view.session.scenario.measured == []
    assert view.controls.shown(key(view, ":paste")).properties["value"] == text


def test_a_file_that_is_too_large_is_refused(view: SweepView) -> None:
    """The page tells its name only."""
    enter(view, ":file", {"name": "big.csv", "text": None})
    assert "larger than 1 MB" in words(view)


def test_removed_points_are_gone_and_can_be_undone(view: SweepView) -> None:
    """One step of the history."""
    add(view, "0 8.6", "Plant")
    enter(view, ":drop:Plant")
    assert dots(view, "ph") == [] and "Measured…" in words(view)
    view.session.undo()
    assert dots(view, "ph") == [(0.0, 8.6)]


def test_points_of_another_dial_wait_for_their_sweep(view: SweepView) -> None:
    """They are not drawn along a dial that was not turned for them."""
    add(view, "0 8.6", "Plant")
    view.session.set_sweep(dial="train.hypo.dose", start=0, stop=3)
    assert dots(view, "ph") == []
    view.session.set_sweep(dial="waters.well.share", start=0, stop=100)
    assert dots(view, "ph") == [(0.0, 8.6)]


def test_comparison_follows_the_model(view: SweepView) -> None:
    """Where the model moves, so does its bias."""
    add(view, "50 7.4", "Plant")
    before = view.heads["ph"].nodes[0].words()
    view.session.turn("waters.river.analysis.temperature", 20)
    assert view.heads["ph"].nodes[0].words() != before


def test_name_of_points_is_text(view: SweepView) -> None:
    """Markup in a name is shown, not obeyed."""
    add(view, "50 7.4", "<i>x</i>")
    assert "<i>x</i>: the model is" in words(view)
