"""What the plots of a titration and of a logarithmic diagram show."""

from typing import Any

import numpy as np
import pytest

from explorer.scenario.evaluate import evaluate
from explorer.scenario.model import Scenario, Target
from explorer.studies.pictures import Dots
from explorer.studies.titration import diagram, titration
from explorer.studies.titration_pictures import (
    LOWEST,
    diagram_picture,
    doses_of,
    names_along,
    titration_axis,
    titration_picture,
)


@pytest.fixture
def scenario(plant: Any) -> Scenario:
    return plant({"river": 60, "well": 40}, [plant.dosed("acid", "phosphoric_acid", 1, "mg/L as P")])


def curve(scenario: Scenario, **more: Any) -> Any:
    usual = {"opposite": "hydrochloric_acid", "start": -4.0, "stop": 4.0, "unit": "meq/L"}
    return titration(scenario, **{**usual, **more})


def test_dose_that_reaches_a_target_is_marked_on_the_curve(scenario: Scenario) -> None:
    """The place where the pH crosses the bound is the dose it takes."""
    found = curve(scenario)
    along = titration_axis(found, "Sodium hydroxide", "Hydrochloric acid")
    picture = titration_picture(found, "ph", along, [Target(readout="ph", low=9.0)])
    assert along.name == "Dose of sodium hydroxide, below 0 of hydrochloric acid" and along.unit == "meq/L"
    assert [mark.x for mark in picture.marks] == [pytest.approx(found.dose_to(9.0), abs=1e-4)]
    assert picture.title == "pH" and "crosses 9 at" in picture.words


def test_measured_points_stay_in_view_and_are_told(scenario: Scenario) -> None:
    """A point far from the curve widens the axis; screen readers hear of it."""
    found = curve(scenario)
    dots = Dots("Bench", np.array([0.0]), np.array([13.4]), "1 measured, model 6.00 below")
    picture = titration_picture(found, "ph", titration_axis(found, "Base"), (), [dots])
    assert picture.limits[1] >= 13.4 and picture.dots == (dots,)
    assert "1 measured point: Bench, 1 measured, model 6.00 below." in picture.words


def test_water_without_an_answer_leaves_a_gap_with_its_reason(scenario: Scenario) -> None:
    """Neighbouring points of one reason are one stretch."""
    found = curve(scenario)
    reasons = found.reasons.astype(object).copy()
    reasons[-3:] = "too alkaline"
    object.__setattr__(found, "reasons", reasons)
    (gap,) = titration_picture(found, "ph", titration_axis(found, "Base")).gaps
    step = found.x[1] - found.x[0]
    assert gap == (pytest.approx(found.x[-3] - step / 2), pytest.approx(4.0), "too alkaline")


def test_a_family_has_one_colour_and_its_species_different_dashes(scenario: Scenario) -> None:
    """What belongs together looks alike, and nothing is told by colour alone."""
    picture = diagram_picture(diagram(evaluate(scenario)), ("water", "carbonate"))
    looks = {line.name: (line.colour, line.dash) for line in picture.lines}
    assert {colour for name, (colour, _) in looks.items() if name in ("H⁺", "OH⁻")} == {0}
    assert {looks[name][0] for name in ("CO₂", "HCO₃⁻", "CO₃²⁻")} == {1}
    assert len(set(looks.values())) == len(looks)


def test_sums_that_several_families_have_are_told_apart(scenario: Scenario) -> None:
    """Ion pairs of carbonate are not those of phosphate."""
    found = diagram(evaluate(scenario))
    alone = [line.name for line in diagram_picture(found, ("carbonate",)).lines]
    both = [line.name for line in diagram_picture(found, ("carbonate", "phosphate")).lines]
    assert "ion pairs" in alone
    assert {"ion pairs, carbonate", "ion pairs, phosphate"} <= set(both) and len(set(both)) == len(both)


def test_species_of_no_account_are_left_off(scenario: Scenario) -> None:
    """A curve ends where it leaves the plot at the bottom."""
    picture = diagram_picture(diagram(evaluate(scenario)), ("phosphate",))
    values = np.concatenate([line.y for line in picture.lines])
    assert np.nanmin(values) >= LOWEST == picture.limits[0]
    assert np.isnan(values).any() and np.nanmax(values) < picture.limits[1]


def test_without_a_family_the_diagram_says_so(scenario: Scenario) -> None:
    """An empty plot explains itself."""
    assert diagram_picture(diagram(evaluate(scenario)), ()).empty == "No family is chosen."


def test_names_lie_on_their_curves_and_apart_from_each_other(scenario: Scenario) -> None:
    """Every curve in view is named once, on itself, away from the mark and from the other names."""
    found = diagram(evaluate(scenario))
    picture = diagram_picture(found, ("water", "carbonate", "phosphate"))
    names = names_along(picture, mark=found.own_ph)
    assert [name.line for name in names] == list(range(len(picture.lines)))
    for name in names:
        at = int(np.argmin(np.abs(picture.x - name.x)))
        assert picture.lines[name.line].y[at] == name.y
    places = np.array([((name.x - 2) / 10, (name.y - LOWEST) / 8) for name in names])
    distances = np.hypot(*(places[:, None] - places[None]).transpose(2, 0, 1))
    assert distances[~np.eye(len(places), dtype=bool)].min() > 0.05


@pytest.mark.parametrize(
    ("axis", "expected"),
    [
        (("sodium_hydroxide", "hydrochloric_acid", "meq/L"), [-1.0, 2.0]),
        (("sodium_hydroxide", "hydrochloric_acid", "mg/L"), [-1 / 36.458, 2 / 39.997]),
        (("potassium_hydroxide", "hydrochloric_acid", "meq/L"), None),
    ],
)
def test_measured_doses_come_in_the_unit_of_the_curve(
    scenario: Scenario, axis: tuple[str, str, str], expected: list[float] | None
) -> None:
    """mg of acid and mg of base are different amounts; points of another chemical belong to another curve."""
    raw = scenario.to_dict()
    against = dict(zip(("chemical", "opposite", "unit"), axis, strict=True))
    raw["measured"] = [{"name": "Bench", "titration": against, "readout": "ph", "points": [[-1, 6], [2, 9]]}]
    with_points = Scenario.from_dict(raw)
    doses = doses_of(with_points.measured[0], curve(scenario), evaluate(scenario), scenario.known_chemicals())
    assert (doses is None) if expected is None else doses == pytest.approx(expected, rel=1e-4)


def test_measured_doses_of_another_place_belong_to_another_curve(scenario: Scenario) -> None:
    """The finished water is the last stage under either name; the blend is not."""
    raw = scenario.to_dict()
    axis = {"chemical": "sodium_hydroxide", "unit": "meq/L"}
    raw["measured"] = [
        {"name": place, "titration": axis, "stage": place, "readout": "ph", "points": [[1, 9]]}
        for place in ("finished", "acid", "blend")
    ]
    found, outcome = curve(scenario), evaluate(scenario)
    sets = Scenario.from_dict(raw).measured
    fits = [doses_of(part, found, outcome, scenario.known_chemicals()) is not None for part in sets]
    assert fits == [True, True, False]
