"""The titration view without a browser."""

import csv
import io
from typing import Any

import numpy as np
import pytest

from explorer.app.state import Session
from explorer.app.titration_setting import equivalents, setting, shared_units
from explorer.app.titration_view import TitrationView
from explorer.scenario.files import open_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.shipped import shipped
from explorer.treatment.chemicals import CATALOGUE


def opened(name: str = "juniper") -> TitrationView:
    session = Session(open_scenario(shipped()[name]))
    session.solve_now()
    view = TitrationView(session)
    view.opened()
    return view


@pytest.fixture
def view() -> TitrationView:
    return opened()


def lines(view: TitrationView, plot: str) -> list[np.ndarray]:
    return [np.asarray(y) for y in (view.curves.plots | view.species.plots)[plot].lines.data["ys"]]


def heard(view: TitrationView, key: str, value: Any = None) -> None:
    view.controls.report(key, value)


def test_curve_runs_from_acid_to_base_through_the_water_itself(view: TitrationView) -> None:
    """At dose 0 stands the own pH; acid lies to the left, base to the right."""
    (ph,), x = lines(view, "titration-ph"), view.found.curve.x
    assert np.all(np.diff(ph) > 0) and x[0] < 0 < x[-1]
    assert np.interp(0.0, x, ph) == pytest.approx(8.0, abs=0.01)
    assert ph[0] < 4 and ph[-1] > 10.5


def test_diagram_marks_the_own_ph(view: TitrationView) -> None:
    """The upright line stands there, and the note says it."""
    assert view.species.point.location == pytest.approx(8.0, abs=0.01)
    assert "own pH 8.00" in view.heads["diagram"].nodes[0].words()


def test_marks_are_not_moved_by_hand(view: TitrationView) -> None:
    """Nothing is turned from here."""
    assert not view.curves.point.editable and not view.species.point.editable


def test_every_place_of_the_plant_can_be_titrated(view: TitrationView) -> None:
    """Another water has another curve, and its range begins anew."""
    (before,) = lines(view, "titration-ph")
    heard(view, "stage:linen")
    assert view.setting().stage == "linen" and view.found.curve.stage == "linen"
    assert not np.array_equal(lines(view, "titration-ph")[0], before)


def test_targets_belong_to_the_finished_water(view: TitrationView) -> None:
    """At any other place there is no band."""
    assert view.curves.plots["titration-ph"].picture.band is not None
    heard(view, "stage:linen")
    assert view.curves.plots["titration-ph"].picture.band is None


def test_another_chemical_and_no_opposite(view: TitrationView) -> None:
    """Without an acid for negative doses, doses begin at 0."""
    heard(view, "opposite:")
    heard(view, "chemical:carbon_dioxide")
    assert (view.setting().chemical, view.setting().opposite) == ("carbon_dioxide", "")
    assert view.found.curve.x[0] == 0.0
    assert np.all(np.diff(lines(view, "titration-ph")[0]) < 0)


def test_another_unit_leaves_the_range_as_it_is(view: TitrationView) -> None:
    """−4 meq/L of acid are −146 mg/L, 4 meq/L of base 160 mg/L; the ends of the curve stay."""
    (before,) = lines(view, "titration-ph")
    heard(view, "unit", "mg/L")
    assert (view.setting().start, view.setting().stop) == (-146.0, 160.0)
    assert lines(view, "titration-ph")[0][[0, -1]] == pytest.approx(before[[0, -1]], abs=0.01)


def test_range_is_typed_and_refused_beside_its_field(view: TitrationView) -> None:
    """A range of no width is none."""
    heard(view, "dose:stop", "1,5")
    assert view.setting().stop == 1.5 and view.found.curve.x[-1] == 1.5
    heard(view, "dose:stop", "-4")
    assert "from and to have to differ" in view.controls.nodes[0].words()
    assert view.found.curve.x[-1] == 1.5


def test_families_are_chosen(view: TitrationView) -> None:
    """Each that the water has; a choice stays for waters that have it too."""
    before = len(lines(view, "diagram"))
    head = view.heads["diagram"]
    head.report("family:phosphate", True)
    assert len(lines(view, "diagram")) > before
    for family in ("water", "carbonate", "phosphate"):
        head.report(f"family:{family}", False)
    assert "No family is chosen." in head.nodes[0].words() and lines(view, "diagram") == []


def test_curve_follows_the_scenario_while_it_is_open(view: TitrationView) -> None:
    """A turned dial moves it; a closed view rests and catches up when it is opened again."""
    (before,) = lines(view, "titration-ph")
    view.session.turn("waters.slate.share", 45)
    (after,) = lines(view, "titration-ph")
    assert not np.array_equal(after, before)
    view.closed()
    view.session.turn("waters.slate.share", 30)
    assert np.array_equal(lines(view, "titration-ph")[0], after)
    view.opened()
    assert lines(view, "titration-ph")[0] == pytest.approx(before)


def test_measured_titration_is_laid_over_with_bias_and_scatter(view: TitrationView) -> None:
    """Pasted points are kept in the scenario, drawn, and compared with the model."""
    form = next(node.key for node in view.controls.nodes if node.key.endswith(":paste"))
    heard(view, form, "-1 6.0\n0 8.1\n1 10.2\n")
    heard(view, form.replace(":paste", ":add"))
    (kept,) = view.session.scenario.measured
    assert kept.stage == "finished" and kept.titration.opposite == "hydrochloric_acid"
    dots = view.curves.plots["titration-ph"].dots.data
    assert dots["x"] == [-1.0, 0.0, 1.0] and dots["y"] == [6.0, 8.1, 10.2]
    note = view.heads["titration-ph"].nodes[0].words()
    assert "3 measured, model" in note and "scatter" in note
    assert view.curves.plots["titration-buffer"].dots.data["x"] == []


def test_points_that_cannot_be_read_are_refused_by_line(view: TitrationView) -> None:
    """Nothing is kept; the text stays to be mended."""
    form = next(node.key for node in view.controls.nodes if node.key.endswith(":paste"))
    heard(view, form, "0 8.1\n1 eight\n")
    heard(view, form.replace(":paste", ":add"))
    assert "line 2" in view.controls.nodes[0].words()
    assert view.session.scenario.measured == [] and view.controls.shown(form).properties["value"].startswith(
        "0 8.1"
    )


def test_curve_can_be_saved(view: TitrationView) -> None:
    """Dose and pH, a line a point."""
    view.heads["titration-ph"].report("save:csv")
    heading, *rest = csv.reader(io.StringIO(view.session.offered.text.lstrip("\ufeff")))
    assert heading == ["Dose of sodium hydroxide, below 0 of hydrochloric acid [meq/L]", "pH"]
    assert [float(row[0]) for row in rest] == pytest.approx(view.found.curve.x)
    assert [float(row[1]) for row in rest] == pytest.approx(view.found.curve.ph)


def test_choice_of_what_is_gone_falls_back(view: TitrationView) -> None:
    """A removed step is no place, an own chemical that is gone is none either."""
    heard(view, "stage:coagulant")
    assert view.setting().stage == "coagulant"
    kept = {"stage": "nowhere", "chemical": "nothing", "opposite": "nothing", "unit": "buckets"}
    mended = setting(kept, view.session.solved, view.session.point)
    assert (mended.stage, mended.chemical, mended.opposite, mended.unit) == (
        "finished", "sodium_hydroxide", "", "meq/L",
    )  # fmt: skip


def test_every_shipped_scenario_can_be_titrated() -> None:
    """Two inflections need room: the range reaches well into acid and base."""
    for name in shipped():
        found = opened(name).found
        assert found.refusal == "" and np.isfinite(found.curve.ph).all()
        assert found.curve.ph[0] < 5 and found.curve.ph[-1] > 9.5


@pytest.mark.parametrize(
    ("key", "expected"),
    [("sodium_hydroxide", 1), ("hydrochloric_acid", -1), ("aluminium_sulfate", -6), ("sodium_chloride", 0)],
)
def test_acids_and_bases_are_told_by_what_they_do_to_the_alkalinity(key: str, expected: int) -> None:
    """Coagulants are acids: their hydroxide takes the alkalinity."""
    assert equivalents(CATALOGUE[key]) == expected


def test_unit_has_to_suit_both_chemicals() -> None:
    """An acid counted as phosphorus and a base share no such unit."""
    acid, base = CATALOGUE["phosphoric_acid"], CATALOGUE["sodium_hydroxide"]
    assert "mg/L as P" in shared_units(acid, None)
    units = shared_units(acid, base)
    assert units[0] == "meq/L" and "mg/L as P" not in units


def test_name_of_a_water_is_text(view: TitrationView) -> None:
    """Markup in a name is shown, not obeyed."""

    def rename(scenario: Scenario) -> None:
        scenario.waters[0].name = "<b>x</b>"

    view.session.edit("Rename", rename)
    assert "<b>x</b>" in view.controls.nodes[0].words()
