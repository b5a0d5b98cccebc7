"""Ranking: which tolerance matters, which measurement pays, and how wide a tolerance may be."""

import numpy as np
import pytest

from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped
from explorer.studies.progress import Stopped, Watch
from explorer.studies.ranking import allowed_tolerance, ranking

CAUSTIC = "train.last_caustic.dose"


@pytest.fixture(scope="module")
def moss():
    return open_scenario(shipped()["moss"])


def chloride(plant, distribution):
    widths = {"river": 3, "well": 2, "transfer": 5}
    tolerances = {
        f"waters.{water}.analysis.chloride": {"plus_minus": width, "distribution": distribution}
        for water, width in widths.items()
    }
    shares = {"river": 50, "well": 40, "transfer": 10}
    return plant(shares, tolerances=tolerances), {
        f"Chloride of {water.capitalize()}": widths[water] * shares[water] / 100 for water in widths
    }


# ---- ranking -----------------------------------------------------------------------------------------------


def test_an_input_alone_spreads_by_its_own_width(plant):
    """95 % of a uniform error of the blend: share times width, hand arithmetic."""
    scenario, effects = chloride(plant, "uniform")
    found = ranking(scenario, "chloride")
    for rank in found.ranks:
        assert rank.alone == pytest.approx(0.95 * 2 * effects[rank.input.label], rel=0.005)


def test_halving_a_tolerance_removes_what_its_variance_adds(plant):
    """For normal errors in proportion the width is that of the root of the sum of squares, before and
    after."""
    scenario, effects = chloride(plant, "normal")
    found = ranking(scenario, "chloride")
    per_deviation = 2 * 1.96 * 0.5
    squares = np.square(list(effects.values())).sum()
    assert found.width == pytest.approx(per_deviation * np.sqrt(squares), rel=0.02)
    for rank in found.ranks:
        halved = squares - 0.75 * effects[rank.input.label] ** 2
        expected = per_deviation * (np.sqrt(squares) - np.sqrt(halved))
        assert rank.removed == pytest.approx(expected, rel=0.1, abs=0.01 * found.width)


def test_the_input_that_pays_most_comes_first(plant):
    """In the order of the width that halving removes."""
    scenario, effects = chloride(plant, "normal")
    labels = [rank.input.label for rank in ranking(scenario, "chloride").ranks]
    assert labels == sorted(effects, key=effects.get, reverse=True)


def test_measuring_the_well_ph_properly_pays_more_than_better_pumps():
    """Amber, calcium carbonate: the pH of the well makes up nearly all of the spread."""
    found = ranking(open_scenario(shipped()["amber"]), "ccpp")
    first, second = found.ranks[:2]
    assert first.input.label == "pH of Granite Wellfield"
    assert first.removed > 0.3 * found.width
    assert second.removed < 0.1 * found.width
    pumps = next(rank for rank in found.ranks if rank.input.name == "train.hypo.dose")
    assert pumps.alone < 0.1 * first.alone


def test_the_same_seed_ranks_with_the_same_digits(plant):
    """And the watcher hears of rising parts, and may stop it."""
    scenario, _ = chloride(plant, "normal")
    heard = []
    assert ranking(scenario, "chloride", seed=4) == ranking(
        scenario, "chloride", seed=4, watch=Watch(heard.append)
    )
    assert heard == sorted(heard)
    assert heard[-1] == 1
    with pytest.raises(Stopped):
        ranking(scenario, "chloride", watch=Watch(stop=lambda: True))


# ---- how wide a tolerance may be ---------------------------------------------------------------------------


def test_the_dose_tolerance_that_keeps_the_ph(moss):
    """Moss, final caustic: at the tolerance found the pH is just within 0.2, a hundredth beyond it is not."""
    found = allowed_tolerance(moss, [CAUSTIC], "ph", 0.2)
    dose = float(evaluate(moss).inputs[CAUSTIC])
    assert (found.unit, found.limited) == ("%", True)
    assert found.nominal == pytest.approx(8.2, abs=0.05)

    def farthest(percent):
        doses = dose * (1 + np.array([-percent, percent]) / 100)
        return np.abs(evaluate(moss, {CAUSTIC: doses}).readout("ph") - found.nominal).max()

    assert farthest(found.half_width) <= 0.2
    assert farthest(found.half_width * 1.01) > 0.2


def test_doses_together_may_be_off_by_less(moss):
    """Two doses in all four combinations; the place where the pH leaves the band is named."""
    pair = [CAUSTIC, "train.alum.dose"]
    alone, both = allowed_tolerance(moss, [CAUSTIC], "ph", 0.2), allowed_tolerance(moss, pair, "ph", 0.2)
    assert both.half_width < alone.half_width
    assert both.at.keys() == set(pair)
    assert abs(float(evaluate(moss, both.at).readout("ph")) - both.nominal) == pytest.approx(0.2, abs=0.001)


def test_a_ph_may_be_off_by_units_of_ph(moss):
    """A reading has no percent."""
    found = allowed_tolerance(moss, ["waters.reservoir.analysis.ph"], "ph", 0.2)
    off = np.array([-1, 1]) * found.half_width
    values = evaluate(moss, {"waters.reservoir.analysis.ph": 6.5 + off}).readout("ph")
    assert np.abs(values - found.nominal).max() == pytest.approx(0.2, abs=0.001)


def test_a_dial_that_does_not_matter_has_no_limit(moss):
    """Nothing within 100 % moves the readout beyond."""
    found = allowed_tolerance(moss, ["train.hypo.dose"], "calcium", 1.0)
    assert (found.limited, found.half_width, found.at) == (False, 100, {})


def test_a_place_without_an_answer_is_beyond(plant):
    """The dose that exhausts the alkalinity ends the tolerance."""
    scenario = plant({"moor": 100}, [plant.dosed("alum", "aluminium_sulfate", 12, "mg/L")])
    found = allowed_tolerance(scenario, ["train.alum.dose"], "temperature", 1.0)
    assert found.limited
    assert np.isnan(float(evaluate(scenario, found.at).readout("ph")))


@pytest.mark.parametrize(
    ("addresses", "readout", "within", "sentence"),
    [
        ([], "ph", 0.2, "dials: 0 dials cannot be asked for; allowed 1 to 6"),
        (["train.hippo.dose"], "ph", 0.2, "dials: "),
        ([CAUSTIC], "acidity", 0.2, 'readout: "acidity" is not a readout'),
        ([CAUSTIC], "ph", 0, "within: 0 is no distance; allowed above 0"),
    ],
)
def test_what_cannot_be_asked_is_refused(moss, addresses, readout, within, sentence):
    """One sentence."""
    with pytest.raises(ScenarioError) as error:
        allowed_tolerance(moss, addresses, readout, within)
    assert str(error.value).startswith(sentence)


def test_a_held_dial_has_no_allowed_tolerance(moss):
    """Its controller makes up for what it is off."""
    raw = moss.to_dict()
    raw["holds"] = {CAUSTIC: {"readout": "ph", "value": 8, "high": 40}}
    with pytest.raises(ScenarioError, match="is held: its controller makes up for errors"):
        allowed_tolerance(type(moss).from_dict(raw), [CAUSTIC], "ph", 0.2)
