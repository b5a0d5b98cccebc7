"""Fan and distribution of a tolerance study as plain data, and the survey that a view shows bit by bit."""

import numpy as np
import pytest

from explorer.scenario.errors import ScenarioError
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped
from explorer.studies.corners import extremes, worst
from explorer.studies.pictures import rising
from explorer.studies.progress import Stopped, Watch
from explorer.studies.ranking import ranking
from explorer.studies.spread_pictures import (
    chance_text,
    distribution,
    fan_layers,
    resampled,
    with_fan,
)
from explorer.studies.spread_survey import survey
from explorer.studies.sweep import sweep
from explorer.studies.sweep_pictures import picture_of
from explorer.studies.tolerance import tolerance


@pytest.fixture(scope="module")
def amber():
    return open_scenario(shipped()["amber"])


@pytest.fixture(scope="module")
def study(amber):
    return list(tolerance(amber, points=21, samples=512, readouts=["ccpp"]))[-1]


# ---- the fan -----------------------------------------------------------------------------------------------


def test_layers_of_the_fan_lie_inside_each_other(study):
    """The widest first; the nominal curve need not be in the middle."""
    outer, inner = fan_layers(study, "ccpp")
    assert (outer.percent, inner.percent) == (95, 50)
    assert (outer.low <= inner.low).all() and (inner.high <= outer.high).all()
    assert np.mean(study.fan.values["ccpp"][:, 10] < outer.low[10]) == pytest.approx(0.025, abs=0.003)


def test_layers_follow_the_axis_of_a_sweep_that_runs_downwards(amber, study):
    """An axis always rises."""
    down = list(tolerance(amber, start=100, stop=0, points=21, samples=512, readouts=["ccpp"]))[-1]
    for layer, other in zip(fan_layers(down, "ccpp"), fan_layers(study, "ccpp"), strict=True):
        np.testing.assert_allclose(layer.low, other.low, rtol=1e-6)


def test_layers_known_at_few_places_are_drawn_at_many(study):
    """In between they are straight; where both have a place they agree."""
    x = rising(study.x, study.x)
    finer = np.linspace(0, 100, 101)
    layers = fan_layers(study, "ccpp")
    for layer, other in zip(resampled(layers, x, finer), layers, strict=True):
        assert layer.low[::5] == pytest.approx(other.low)
        assert layer.low[2] == pytest.approx(0.6 * other.low[0] + 0.4 * other.low[1])


def test_axis_takes_in_the_whole_fan(amber, study):
    """Without a fan the picture stays as it is."""
    swept = sweep(amber, points=21)
    plain = picture_of(swept, "ccpp", amber.targets)
    layers = fan_layers(study, "ccpp")
    picture = with_fan(plain, layers)
    assert picture.limits[0] <= layers[0].low.min() and layers[0].high.max() <= picture.limits[1]
    assert "95 % of the outcomes" in picture.words
    assert with_fan(plain, ()) is plain


# ---- the distribution --------------------------------------------------------------------------------------


def test_distribution_holds_the_outcomes_and_their_percentiles(study):
    """Bars add up to all outcomes but the farthest; 95 % lie between the outer marks."""
    found = distribution(study, "ccpp")
    values = study.here.values["ccpp"][:, 0]
    assert found.parts.sum() == pytest.approx(1, abs=0.01)
    assert found.marks == pytest.approx(np.percentile(values, (2.5, 50, 97.5)))
    assert found.nominal == pytest.approx(float(study.here.nominal["ccpp"][0]))
    assert found.band == (-5, None)
    assert found.limits[0] <= found.edges[0] and found.edges[-1] <= found.limits[1]
    assert found.most.startswith("95 % within −") and found.most in found.words


def test_distribution_of_what_is_not_there_is_empty_and_says_so(amber):
    """Without chlorine there is no share of it that could be off."""
    dry = amber.copy()
    dry.train = []
    study = list(tolerance(dry, points=5, samples=64, readouts=["hocl_percent"]))[-1]
    found = distribution(study, "hocl_percent")
    assert found.parts.sum() == 0 and found.answered == 0 and found.most == ""
    assert "no answer" in found.words


def test_distribution_without_width_is_one_bar(amber):
    """A readout that nothing moves is drawn, too."""
    calm = amber.copy()
    calm.tolerances = {"train.hypo.dose": amber.tolerances["train.hypo.dose"]}
    study = list(tolerance(calm, points=5, samples=64, readouts=["calcium"]))[-1]
    found = distribution(study, "calcium")
    assert np.count_nonzero(found.parts) == 1 and found.answered == 1


@pytest.mark.parametrize(
    ("part", "text"), [(0.0, "under 1 %"), (0.13, "13 %"), (1.0, "over 99 %"), (0.996, "over 99 %")]
)
def test_chance_claims_no_certainty(part, text):
    """Samples cannot tell that something never happens."""
    assert chance_text(part) == text


# ---- the survey --------------------------------------------------------------------------------------------


def test_survey_brings_the_fan_first_and_the_worst_place_last(amber):
    """Each part is that of its own study."""
    parts = list(survey(amber, "ccpp", samples=256))
    assert [part.study.samples for part in parts] == [64, 256, 256, 256, 256]
    known = [(part.here is not None, part.ranking is not None, part.anywhere is not None) for part in parts]
    assert known == [(False,) * 3, (False,) * 3, (True, False, False), (True, True, False), (True,) * 3]
    assert [part.final for part in parts] == [False] * 4 + [True]
    last = parts[-1]
    assert last.here[0].value == extremes(amber, "ccpp")[0].value
    assert last.ranking == ranking(amber, "ccpp")
    assert last.anywhere[1].value == worst(amber, "ccpp")[1].value


def test_survey_tells_how_far_it_is(amber):
    """From nothing to all, and never back."""
    told = []
    list(survey(amber, "ph", samples=64, watch=Watch(told.append)))
    assert told == sorted(told)
    assert (told[0], told[-1]) == (0, 1)


def test_survey_can_be_stopped(amber):
    """What it has shown before stands; the rest is not calculated."""
    told, shown = [0.0], []
    with pytest.raises(Stopped):
        for part in survey(amber, "ph", samples=64, watch=Watch(told.append, lambda: told[-1] > 0.35)):
            shown.append(part)
    assert len(shown) == 1 and shown[0].study.final
    assert max(told) < 0.5


def test_survey_of_a_plant_in_which_nothing_is_off_is_refused(amber):
    """One sentence that says what is needed."""
    calm = amber.copy()
    calm.tolerances = {}
    with pytest.raises(ScenarioError, match="nothing may be off"):
        next(survey(calm, "ph"))
