"""Picture of a comparison."""

from typing import Any

import numpy as np

from explorer.scenario.editing import keep_option
from explorer.studies.compare import Case, all_cases, overlay
from explorer.studies.compare_pictures import overlay_picture, sign_of


def cases(plant: Any) -> list[Case]:
    scenario = plant({"river": 60, "well": 40})
    keep_option(scenario, "Base")
    scenario.waters[0].share, scenario.waters[1].share = 20, 80
    return all_cases(scenario)


def test_cases_have_short_names(plant: Any) -> None:
    """A letter where there is one, else a word."""
    assert [sign_of(case) for case in cases(plant)] == ["now", "A", "no River", "no Well"]


def test_a_case_keeps_its_colour_and_dash_when_another_has_no_curve(plant: Any) -> None:
    """They follow the place among all cases."""
    every = cases(plant)
    found = [
        (case, swept) for case, swept in overlay(every, "waters.river.analysis.ph") if case.letter != "A"
    ]
    picture = overlay_picture(every, found, "ph", ())
    looks = {line.name: (line.colour, line.dash) for line in picture.others}
    assert looks == {"no River": (1, 2), "no Well": (2, 3)}


def test_all_curves_are_in_view(plant: Any) -> None:
    """Limits hold the main curve and the others."""
    every = cases(plant)
    picture = overlay_picture(every, overlay(every, "waters.river.analysis.ph", 7, 9), "ph", ())
    low, high = picture.limits
    for line in (*picture.lines, *picture.others):
        assert low <= np.nanmin(line.y) and np.nanmax(line.y) <= high
