"""Window: where on a map of two dials every target is met, and what is missed elsewhere."""

import numpy as np
import pytest
from scipy.optimize import brentq

from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped
from explorer.studies.progress import Stopped, Watch
from explorer.studies.window import COARSE_POINTS, MET, NO_ANSWER, window

CAUSTIC, WELLS = "waters.permeate.train.caustic.dose", "waters.wells.share"
AXIS_PART = 0.01
"""Part of an axis to which a border has to be right."""


@pytest.fixture(scope="module")
def dune():
    return open_scenario(shipped()["dune"])


@pytest.fixture(scope="module")
def maps(dune):
    """Caustic in the desalinated water against the share of the wells."""
    return list(window(dune, CAUSTIC, WELLS, (5, 25), (0, 40)))


def last(*arguments, **named):
    return list(window(*arguments, **named))[-1]


# ---- the map -----------------------------------------------------------------------------------------------


def test_a_coarse_map_comes_first_and_then_the_fine_one(maps):
    """The first map has few points, the last is final and agrees with it where both have a point."""
    coarse, fine = maps
    assert (coarse.final, fine.final) == (False, True)
    assert len(coarse.x.values) == COARSE_POINTS
    assert coarse.missed.tolist() == fine.missed[::4, ::4].tolist()


def test_every_point_is_a_single_solution(dune, maps):
    """Readouts of the map are those of the scenario with both dials turned, one at a time."""
    fine = maps[-1]
    for row, column in ((0, 0), (64, 30), (128, 128)):
        alone = evaluate(dune, {CAUSTIC: fine.x.values[column], WELLS: fine.y.values[row]})
        for key, values in fine.readouts.items():
            assert values[row, column] == pytest.approx(float(alone.readout(key)), abs=1e-7)


def test_the_first_missed_target_is_that_of_the_scenario_order(dune, maps):
    """Where several targets are missed the one that stands first in the scenario counts."""
    fine = maps[-1]
    assert set(np.unique(fine.missed)) >= {MET, 1, 2}
    for row, column in np.argwhere(fine.missed >= 0)[::997]:
        alone = evaluate(dune, {CAUSTIC: fine.x.values[column], WELLS: fine.y.values[row]})
        missed = [position for position, (*_, met, _) in enumerate(alone.targets()) if not met]
        assert fine.missed[row, column] == missed[0]
    assert fine.part_met + sum(fine.parts_missed()) == pytest.approx(1)


def test_without_targets_everything_that_has_an_answer_is_met(plant):
    """A map can be asked for its readouts alone."""
    scenario = plant({"river": 60, "well": 40})
    found = last(scenario, "waters.well.share", "waters.well.analysis.ph", readouts=["ccpp"], points=5)
    assert list(found.readouts) == ["ccpp"]
    assert set(np.unique(found.missed)) <= {MET, NO_ANSWER}
    assert found.margins.shape == (0, 5, 5)


def test_places_without_an_answer_say_why(plant):
    """Two shares that leave less than nothing for the third water are no place to be."""
    scenario = plant({"river": 50, "well": 30, "transfer": 20}, targets=[{"readout": "ph", "low": 7}])
    found = last(scenario, "waters.river.share", "waters.well.share", points=5)
    assert found.missed[4, 4] == NO_ANSWER
    assert "shares do not add" in found.reasons[4, 4]
    assert np.isnan(found.readouts["ph"][4, 4])
    assert found.reasons[0, 0] == ""


def test_a_target_that_cannot_be_told_says_why(plant):
    """No ratio to sulfate without sulfate: the place has an answer, the target has none."""
    raw = plant.dict({"river": 100}, targets=[{"readout": "chloride_sulfate_ratio", "high": 2}])
    sulfate, ph = "waters.river.analysis.sulfate", "waters.river.analysis.ph"
    found = last(plant.read(raw), sulfate, ph, (0, 20), (7, 8), points=3)
    assert (found.missed[:, 0] == NO_ANSWER).all()
    assert (found.missed[:, 1:] != NO_ANSWER).all()
    assert "sulfate" in found.reasons[0, 0]


# ---- its borders -------------------------------------------------------------------------------------------


def test_the_border_is_where_single_solutions_start_to_meet_all_targets(dune, maps):
    """At fixed shares of the wells the border lies at the caustic dose that root finding on single solutions
    gives, to 1 % of the axis."""
    fine = maps[-1]
    span = fine.x.values[-1] - fine.x.values[0]
    checked = 0
    for row in range(0, 60, 6):
        share = fine.y.values[row]
        met = fine.missed[row] == MET

        def margin(dose, share=share):
            outcome = evaluate(dune, {CAUSTIC: dose, WELLS: share})
            return min(float(found[-1]) for found in outcome.targets())

        ends = fine.border.reshape(-1, 2)
        on_row = ends[ends[:, 1] == share][:, 0]
        for column in np.flatnonzero(met[:-1] != met[1:]):
            single = brentq(margin, fine.x.values[column], fine.x.values[column + 1])
            assert np.abs(on_row - single).min() < AXIS_PART * span / 10
            checked += 1
    assert checked >= 10


def test_the_border_of_a_target_is_its_limit(maps):
    """At every end of a border the readout is at one of the limits of its target."""
    fine = maps[-1]
    for target, border in zip(fine.targets, fine.borders, strict=True):
        ends = border.reshape(-1, 2)[::7]
        if not len(ends):
            continue
        value = fine.at(ends[:, 0], ends[:, 1]).readout(target.readout)
        limits = [limit for limit in (target.low, target.high) if limit is not None]
        away = np.min([np.abs(value - limit) for limit in limits], axis=0)
        assert away.max() < 0.05


def test_a_border_is_closed_or_ends_at_the_edge_of_the_map(maps):
    """Every inner end of a piece is the end of exactly one other piece."""
    fine = maps[-1]
    ends, counts = np.unique(fine.border.reshape(-1, 2), axis=0, return_counts=True)
    loose = ends[counts == 1]
    at_edge = np.isin(loose[:, 0], fine.x.values[[0, -1]]) | np.isin(loose[:, 1], fine.y.values[[0, -1]])
    assert counts.max() == 2
    assert at_edge.all()
    assert 2 <= len(loose) <= 6


def test_the_border_reaches_up_to_places_without_an_answer(plant):
    """Where the shares no longer add up the window ends, and its border runs along there."""
    scenario = plant({"river": 50, "well": 30, "transfer": 20}, targets=[{"readout": "ph", "low": 7}])
    found = last(scenario, "waters.river.share", "waters.well.share", points=11)
    ends = found.border.reshape(-1, 2)
    assert ends.sum(axis=1) == pytest.approx(100, abs=10 / 128)


# ---- asking ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("arguments", "named", "sentence"),
    [
        (("waters.well.shares", WELLS), {}, "x: "),
        ((WELLS, WELLS), {}, "y: waters.wells.share is the dial of x as well; allowed another dial"),
        ((CAUSTIC, WELLS, (5, 5)), {}, "x.stop: 5 to 5 is no range; allowed two different numbers"),
        ((CAUSTIC, WELLS), {"points": 1}, "points: 1 is out of range; allowed 2 to 401"),
        ((CAUSTIC, WELLS), {"readouts": ["acidity"]}, 'readouts: "acidity" is not a readout'),
    ],
)
def test_what_cannot_be_asked_is_refused_at_once(dune, arguments, named, sentence):
    """The call itself fails, with one sentence, before any map is asked for."""
    with pytest.raises(ScenarioError) as error:
        window(dune, *arguments, **named)
    assert str(error.value).startswith(sentence)


def test_other_dials_and_the_season_can_be_set(plant):
    """A map is of the plant with the given overrides."""
    scenario = plant({"river": 60, "well": 40}, [plant.dosed("caustic", "sodium_hydroxide", 5, "mg/L")])
    found = last(
        scenario, "waters.well.share", "waters.well.analysis.ph", (10, 20), (7, 8), ["ph"], 3,
        overrides={"train.caustic.dose": 0.0},
    )  # fmt: skip
    alone = evaluate(
        scenario, {"waters.well.share": 20, "waters.well.analysis.ph": 8, "train.caustic.dose": 0}
    )
    assert found.readouts["ph"][-1, -1] == pytest.approx(float(alone.readout("ph")), abs=1e-7)


def test_progress_rises_to_the_end(dune):
    """The watcher hears of rising parts up to 1."""
    heard = []
    list(window(dune, CAUSTIC, WELLS, (5, 25), (0, 40), watch=Watch(heard.append)))
    assert heard == sorted(heard)
    assert heard[-1] == pytest.approx(1)
    assert len(heard) > 4


def test_a_map_can_be_stopped_and_the_coarse_one_stands(dune):
    """Asked to stop after the coarse map, the fine one does not come."""
    stop = []
    asked = window(dune, CAUSTIC, WELLS, (5, 25), (0, 40), watch=Watch(stop=lambda: bool(stop)))
    assert not next(asked).final
    stop.append(True)
    with pytest.raises(Stopped):
        next(asked)


# ---- handing on --------------------------------------------------------------------------------------------


def test_a_map_as_plain_data(dune):
    """Lists, numbers and None only; targets by position."""
    found = last(dune, CAUSTIC, WELLS, (5, 25), (0, 40), points=5)
    plain = found.to_dict()
    assert plain["x"] == {"dial": CAUSTIC, "unit": "mg/L", "values": [5, 10, 15, 20, 25]}
    assert plain["targets"][2] == {"readout": "ccpp", "low": 3, "high": 10}
    assert plain["missed"] == found.missed.tolist()
    assert len(plain["readouts"]["ph"]) == len(plain["readouts"]["ph"][0]) == 5
    assert np.shape(plain["border"])[1:] == (2, 2)


def test_a_map_as_a_table(dune):
    """One row a point, x running fastest, with the label of the first missed target."""
    found = last(dune, CAUSTIC, WELLS, (5, 25), (0, 40), points=3)
    heading, *rows = found.table()
    assert heading[0] == "Dose of Sodium hydroxide [mg/L]"
    assert heading[-2:] == ["First target missed", "No answer because"]
    assert [row[:2] for row in rows[:4]] == [[5, 0], [15, 0], [25, 0], [5, 20]]
    missed = found.targets[found.missed[0, 0]].readout
    assert (rows[0][-2], missed) == ("Calcium carbonate precipitation potential", "ccpp")
