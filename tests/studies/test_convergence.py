"""Convergence: percentiles beside those of many more samples."""

import numpy as np
import pytest

from explorer.scenario.errors import ScenarioError
from explorer.studies.convergence import PERCENTS, convergence
from explorer.studies.tolerance import tolerance

TOLERANCES = {
    "waters.river.analysis.ph": {"plus_minus": 0.1},
    "waters.well.analysis.ph": {"plus_minus": 0.1, "distribution": "normal"},
    "waters.well.analysis.calcium": {"plus_minus": 5, "unit": "%"},
}


@pytest.fixture
def blend(plant):
    return plant({"river": 60, "well": 40}, tolerances=TOLERANCES)


def test_the_few_samples_are_those_of_the_study_itself(blend):
    """To the digit: the same sequence from its start."""
    *_, study = tolerance(blend, points=3, readouts=["ccpp"], samples=256)
    found = convergence(blend, ["ccpp"], samples=256)["ccpp"]
    assert (found.samples, found.more) == (256, 4096)
    assert found.few == pytest.approx(study.here.percentiles("ccpp", PERCENTS)[:, 0], abs=1e-9)


def test_more_samples_move_the_percentiles_less_and_less(blend):
    """Of 2048 by less than a hundredth of the width of the spread."""
    few, many = (convergence(blend, ["ccpp"], samples)["ccpp"] for samples in (16, 2048))
    assert many.shift < few.shift
    assert many.shift < 0.01 * (many.many[-1] - many.many[0])


def test_the_shift_is_that_of_the_percentile_that_moves_most(blend):
    """In the unit of the readout."""
    found = convergence(blend, ["ph"], samples=64)["ph"]
    assert found.shift == np.abs(found.many - found.few).max()
    assert found.to_dict()["many"] == found.many.tolist()


@pytest.mark.parametrize(
    ("tolerances", "readout", "sentence"),
    [(TOLERANCES, "sweetness", "is not a readout"), ({}, "ph", "nothing may be off")],
)
def test_what_cannot_be_asked_is_refused(plant, tolerances, readout, sentence):
    """In a sentence."""
    with pytest.raises(ScenarioError, match=sentence):
        convergence(plant({"river": 60, "well": 40}, tolerances=tolerances), [readout])
