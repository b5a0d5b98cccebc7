"""The map as plain data: regions by the target missed first, their labels, contours and words."""

import numpy as np
import pytest

from explorer.scenario.files import open_scenario
from explorer.scenario.model import Target
from explorer.scenario.shipped import shipped
from explorer.studies.window import MET, NO_ANSWER, window
from explorer.studies.window_picture import (
    USUAL_HEIGHT,
    USUAL_WIDTH,
    WindowPicture,
    contour_values,
    miss_text,
    percent_text,
    text_size,
    window_picture,
)

FRACTION = "waters.permeate.train.contactor.fraction"
CARBONIC = "waters.permeate.train.contactor.train.carbonic.dose"


@pytest.fixture(scope="module")
def dune():
    return open_scenario(shipped()["dune"])


@pytest.fixture(scope="module")
def found(dune):
    return list(window(dune, FRACTION, CARBONIC, (30, 70), (0, 200), ["ccpp"], points=65))[-1]


@pytest.fixture(scope="module")
def picture(found) -> WindowPicture:
    return window_picture(found, "ccpp")


def test_regions_name_the_target_and_the_side_on_which_it_is_missed(picture):
    """One target can have two regions: below and above its band."""
    labels = [region.label for region in picture.regions]
    assert labels[:3] == ["Alkalinity below 80", "Calcium below 32", "Calcium above 48"]
    assert miss_text(Target(readout="ph", high=8.5), above=True) == "pH above 8.5"


def test_regions_and_the_clear_part_make_up_the_whole_map(picture):
    """Every point is in exactly one of them."""
    unknown = picture.unknown.part if picture.unknown else 0.0
    assert sum(region.part for region in picture.regions) + picture.met.part + unknown == pytest.approx(1.0)


def test_field_of_a_region_is_positive_exactly_where_it_is(found, picture):
    """Its outline, where the field is zero, runs along the edge of the region."""
    for region in picture.regions:
        target = found.targets[region.target]
        values = found.readouts[target.readout]
        beyond = values > target.high if region.above else values < target.low
        inside = (found.missed == region.target) & beyond
        assert (region.field[inside] > 0).all()
        assert not (region.field[~inside & np.isfinite(region.field)] > 1e-12).any()


def test_label_fits_inside_its_region(found, picture):
    """All of the text lies on points of the region, at the smallest usual size of the map."""
    labelled = [region for region in picture.regions if region.place is not None]
    assert {region.label for region in labelled} >= {"Alkalinity below 80", "Calcium above 48"}
    x, y = picture.x, picture.y
    for region in labelled:
        width, height = text_size(region.text)
        half_x = width / 2 / USUAL_WIDTH * (x[-1] - x[0])
        half_y = height / 2 / USUAL_HEIGHT * (y[-1] - y[0])
        columns = np.abs(x - region.place[0]) <= half_x
        rows = np.abs(y - region.place[1]) <= half_y
        assert (found.missed[np.ix_(rows, columns)] == region.target).all()


def test_region_without_room_has_no_label_on_the_map(picture):
    """The legend still has it."""
    small = [region for region in picture.regions if region.part < 0.005]
    assert small and all(region.place is None for region in small)


def test_no_answer_has_a_region_and_a_reason_of_its_own():
    """Where the alkalinity is exhausted nothing is said of the targets."""
    moss = open_scenario(shipped()["moss"])
    sides = ("train.last_caustic.dose", "train.first_caustic.dose")
    found = list(window(moss, *sides, (0, 20), (0, 30), ["ccpp"], points=33))[-1]
    picture = window_picture(found, "ccpp")
    assert picture.unknown.part == pytest.approx(float(np.mean(found.missed == NO_ANSWER)))
    assert picture.reasons == ("alkalinity exhausted: add alkali first",)
    assert "No result on" in picture.words
    for region in picture.regions:
        assert np.isnan(region.field[found.missed == NO_ANSWER]).all()


def test_map_without_targets_has_contours_only(dune):
    """Nothing can be missed."""
    plain = dune.copy()
    plain.targets = []
    found = list(window(plain, FRACTION, CARBONIC, (30, 70), (0, 200), ["ccpp"], points=17))[-1]
    picture = window_picture(found, "ccpp")
    assert picture.regions == () and picture.contours.size > 2
    assert (found.missed == MET).all()
    assert "There are no targets" in picture.words


def test_contours_run_at_round_values_inside_the_map():
    """Neither at its lowest nor at its highest value, and nowhere on a flat map."""
    assert contour_values(np.array([[-8.5, 13.2], [np.nan, 2.0]])).tolist() == [-5, 0, 5, 10]
    assert contour_values(np.full((3, 3), 7.0)).size == 0
    assert contour_values(np.full((3, 3), np.nan)).size == 0


def test_words_say_what_the_eye_sees(picture):
    """Axes, contours, the part that is met, and what is missed where."""
    assert picture.words.startswith("Map of fraction of Limestone contactor from 30.0 % to 70.0 %")
    assert f"met on {percent_text(picture.met.part)} of it" in picture.words
    assert "Calcium above 48 on" in picture.words


@pytest.mark.parametrize(
    ("part", "text"), [(0, "0 %"), (0.001, "under 1 %"), (0.164, "16 %"), (0.998, "over 99 %"), (1, "100 %")]
)
def test_part_of_the_map_claims_neither_nothing_nor_all_of_it(part, text):
    """A few points are not none."""
    assert percent_text(part) == text
