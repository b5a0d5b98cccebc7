"""Tolerance: the spread of results when everything that may be off is off by chance."""

import numpy as np
import pytest

from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate
from explorer.studies.progress import Stopped, Watch
from explorer.studies.tolerance import PERCENTS, chances, tolerance

WELL = "waters.well.share"

SMALL = {
    "waters.river.analysis.alkalinity": {"plus_minus": 2},
    "waters.river.analysis.chloride": {"plus_minus": 10, "unit": "%"},
    "waters.well.analysis.alkalinity": {"plus_minus": 3, "unit": "%", "distribution": "normal"},
    "waters.well.analysis.chloride": {"plus_minus": 5, "unit": "%", "distribution": "normal"},
    "waters.well.analysis.ph": {"plus_minus": 0.02},
    "waters.well.share": {"plus_minus": 0.5},
    "train.caustic.dose": {"plus_minus": 2, "unit": "%"},
}
"""So narrow that results answer nearly in proportion."""

TARGETS = [
    {"readout": "ph", "low": 7.6, "high": 8.4},
    {"readout": "ccpp", "low": -5},
    {"readout": "chloride", "high": 24.5},
]


@pytest.fixture
def blend(plant):
    return plant(
        {"river": 60, "well": 40},
        [plant.dosed("caustic", "sodium_hydroxide", 6, "mg/L")],
        tolerances=SMALL,
        targets=TARGETS,
        sweep={"dial": WELL, "start": 20, "stop": 60, "points": 5},
    )


def last(*arguments, **named):
    return list(tolerance(*arguments, **named))[-1]


# ---- the numbers -------------------------------------------------------------------------------------------


@pytest.mark.parametrize("key", ["chloride", "alkalinity", "ph"])
def test_in_proportion_the_variances_add(blend, key):
    """Where results answer in proportion, the standard deviation is that of linear error propagation, to 2 %
    (JCGM 100:2008, 5.1.2; uniform: width/√3, normal: half the width)."""
    variance = 0.0
    for address, given in SMALL.items():
        value = evaluate(blend).inputs[address]
        width = given["plus_minus"] * (value / 100 if given.get("unit") == "%" else 1)
        off = np.array([-width, width]) / 10
        slope = np.diff(evaluate(blend, {address: value + off}).readout(key))[0] / np.diff(off)[0]
        variance += (slope * width / (2 if "distribution" in given else np.sqrt(3))) ** 2
    study = last(blend, readouts=["alkalinity"])
    assert study.here.values[key].std() == pytest.approx(np.sqrt(variance), rel=0.02)
    assert study.here.values[key].mean() == pytest.approx(
        float(study.here.nominal[key][0]), abs=0.05 * np.sqrt(variance)
    )


def test_the_chance_is_that_of_plain_random_numbers(blend):
    """Ordinary random numbers, turned into dials by hand and counted, give the same chances within their
    noise."""
    count, random = 20_000, np.random.default_rng(7)
    dials = {}
    for address, given in SMALL.items():
        value = float(evaluate(blend).inputs[address])
        width = given["plus_minus"] * (value / 100 if given.get("unit") == "%" else 1)
        normal = "distribution" in given
        dials[address] = (
            random.normal(value, width / 2, count)
            if normal
            else random.uniform(value - width, value + width, count)
        )
    found = evaluate(blend, dials).targets()
    study = last(blend)
    chances_here = [float(study.here.chance(position)[0]) for position in range(3)]
    assert 0.2 < chances_here[2] < 0.8
    assert chances_here == pytest.approx([met.mean() for *_, met, _ in found], abs=0.012)
    everything = np.all([met for *_, met, _ in found], axis=0).mean()
    assert float(study.here.chance_of_all()[0]) == pytest.approx(everything, abs=0.012)


def test_percentiles_have_settled(blend):
    """Sixteen times as many samples move no percentile by more than 2 % of the width of the spread."""
    usual, many = (
        last(blend, points=2, start=40, stop=60, readouts=["ccpp"], samples=samples)
        for samples in (2048, 32_768)
    )
    for key in ("ph", "ccpp", "chloride"):
        one, other = usual.here.percentiles(key)[:, 0], many.here.percentiles(key)[:, 0]
        assert one == pytest.approx(other, abs=0.02 * (other[-1] - other[0]))


def test_the_fan_and_the_operating_point_are_of_the_same_samples(blend):
    """Where the sweep passes the operating point both say the same."""
    study = last(blend)
    assert study.x.tolist() == [20, 30, 40, 50, 60]
    assert study.fan.values["ph"].shape == (2048, 5)
    assert study.fan.values["ph"][:, 2].tolist() == study.here.values["ph"][:, 0].tolist()
    assert study.fan.percentiles("ph").shape == (len(PERCENTS), 5)
    assert study.fan.chance(0)[2] == study.here.chance(0)[0]


def test_the_nominal_line_is_the_sweep_itself(blend):
    """With nothing off the results are those of the scenario."""
    study = last(blend, samples=64)
    assert study.fan.nominal["ph"] == pytest.approx(evaluate(blend, {WELL: study.x}).readout("ph"), abs=1e-9)


def test_the_operating_point_follows_the_dials_that_are_set(blend):
    """Setting the swept dial moves the operating point, not the sweep."""
    study = last(blend, samples=64, overrides={WELL: 25, "train.caustic.dose": 0})
    assert float(study.here.nominal["ph"][0]) == pytest.approx(
        float(evaluate(blend, {WELL: 25, "train.caustic.dose": 0}).readout("ph")), abs=1e-9
    )


def test_the_same_seed_gives_the_same_digits(blend):
    """And another seed gives others."""
    one, same, other = (
        last(blend, samples=256, seed=seed).here.percentiles("ph").tolist() for seed in (1, 1, 2)
    )
    assert one == same
    assert one != other


def test_a_coarse_picture_is_the_start_of_the_fine_one(blend):
    """64 samples at once, then four times as many: the first ones stay."""
    pictures = list(tolerance(blend, samples=1000))
    assert [picture.samples for picture in pictures] == [64, 256, 1024]
    assert [picture.final for picture in pictures] == [False, False, True]
    fine = pictures[-1].fan.values["ccpp"]
    assert pictures[0].fan.values["ccpp"] == pytest.approx(fine[:64], abs=1e-7)


def test_chances_fill_their_square_evenly():
    """Any power of two from the start leaves no sixteenth of the square empty or crowded."""
    parts = chances(2, 1024, 3)
    for samples in (64, 256, 1024):
        counts, *_ = np.histogram2d(*parts[:, :samples], bins=4, range=[[0, 1], [0, 1]])
        assert counts == pytest.approx(samples / 16, abs=1)


def test_an_outcome_without_an_answer_meets_nothing(plant):
    """Where some combinations leave no alkalinity for the floc, the chance counts them against the target."""
    scenario = plant(
        {"moor": 100},
        [plant.dosed("alum", "aluminium_sulfate", 14, "mg/L")],
        tolerances={"train.alum.dose": {"plus_minus": 50, "unit": "%"}},
        targets=[{"readout": "ph", "low": 2}],
    )
    study = last(scenario, "waters.moor.analysis.temperature", 3, 4, 2)
    answered = float(study.here.answered("ph")[0])
    assert 0.1 < answered < 0.9
    assert float(study.here.chance(0)[0]) == pytest.approx(answered)
    assert np.isfinite(study.here.percentiles("ph")).all()


def test_where_nothing_has_an_answer_there_are_no_percentiles(plant):
    """Nan, not a number and not a crash."""
    scenario = plant(
        {"moor": 100},
        [plant.dosed("alum", "aluminium_sulfate", 60, "mg/L")],
        tolerances={"train.alum.dose": {"plus_minus": 1, "unit": "%"}},
        targets=[{"readout": "ph", "low": 2}],
    )
    study = last(scenario, "train.alum.dose", 0, 60, 3, samples=64)
    assert np.isnan(study.fan.percentiles("ph")[:, 2]).all()
    assert np.isfinite(study.fan.percentiles("ph")[:, 0]).all()
    assert study.to_dict()["here"]["ph"]["percentiles"] == [None] * 5


# ---- asking ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("named", "sentence"),
    [
        ({"dial": "waters.wel.share"}, "dial: "),
        ({"readouts": ["acidity"]}, 'readouts: "acidity" is not a readout'),
        ({"samples": 0}, "samples: 0 is out of range; allowed 1 to 65536"),
        (
            {"samples": 65_536, "points": 201},
            "samples: 65536 of 201 points are too many; allowed 10 000 000 together",
        ),
        ({"season": "autumn"}, 'season: "autumn" is not one of the seasons'),
    ],
)
def test_what_cannot_be_asked_is_refused_at_once(blend, named, sentence):
    """The call itself fails, with one sentence."""
    with pytest.raises(ScenarioError) as error:
        tolerance(blend, **named)
    assert str(error.value).startswith(sentence)


def test_a_scenario_in_which_nothing_is_off_has_no_spread(plant):
    """That is said, rather than a band without width drawn."""
    with pytest.raises(ScenarioError, match=r"^tolerances: nothing may be off; allowed a tolerance"):
        tolerance(plant({"river": 100}))


def test_progress_rises_to_the_end_and_a_study_can_be_stopped(blend):
    """Asked to stop after the first picture, no other comes."""
    heard, stop = [], []
    watch = Watch(heard.append, lambda: bool(stop))
    list(tolerance(blend, samples=256, watch=watch))
    assert heard == sorted(heard)
    assert heard[-1] == 1
    asked = tolerance(blend, samples=256, watch=watch)
    assert next(asked).samples == 64
    stop.append(True)
    with pytest.raises(Stopped):
        next(asked)


# ---- handing on --------------------------------------------------------------------------------------------


def test_a_study_as_plain_data(blend):
    """Lists and numbers only, with everything needed to repeat it."""
    study = last(blend, samples=64)
    plain = study.to_dict()
    assert (plain["dial"], plain["unit"], plain["samples"], plain["seed"]) == (WELL, "%", 64, 20)
    assert plain["inputs"][0] == {
        "name": "waters.river.analysis.alkalinity",
        "label": "Alkalinity of River",
    }
    assert plain["percents"] == list(PERCENTS)
    assert np.shape(plain["fan"]["ph"]) == (5, 5)
    assert plain["here"]["ph"]["nominal"] == float(study.here.nominal["ph"][0])
    assert plain["targets"][1]["chance_along"] == study.fan.chance(1).tolist()


def test_a_study_as_a_table(blend):
    """One row a value of the dial; nominal, percentiles and chances under headings with units."""
    study = last(blend, samples=64)
    heading, *rows = study.table()
    assert heading[:3] == ["Share of Well [%]", "pH", "pH, percentile 2.5"]
    assert heading[-1] == "Chance of meeting all targets [%]"
    assert [row[0] for row in rows] == [20, 30, 40, 50, 60]
    assert rows[2][1] == pytest.approx(float(study.here.nominal["ph"][0]))
    assert rows[2][-1] == pytest.approx(100 * float(study.here.chance_of_all()[0]))


def test_a_histogram_counts_every_answer(blend):
    """Counts over edges, at the operating point."""
    counts, edges = last(blend, samples=256).histogram("ph", bins=12)
    assert (counts.sum(), len(edges)) == (256, 13)


def test_a_held_dial_is_swept_by_hand_and_held_at_the_operating_point(plant):
    """There its readout does not spread; along the sweep it does."""
    off = {"waters.well.analysis.chloride": {"plus_minus": 10, "unit": "%"}}
    holds = {"waters.well.share": {"readout": "chloride", "value": 25}}
    scenario = plant({"river": 60, "well": 40}, tolerances=off, holds=holds)
    *_, study = tolerance(scenario, "waters.well.share", 0, 100, 5, ["chloride"], samples=64)
    assert study.here.values["chloride"][:, 0] == pytest.approx(np.full(64, 25.0), abs=1e-6)
    assert study.here.nominal["chloride"] == pytest.approx([25.0], abs=1e-6)
    assert np.ptp(study.fan.values["chloride"][:, -1]) > 5
    assert study.fan.values["chloride"].shape == (64, 5)
