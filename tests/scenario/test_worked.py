"""What has been worked out about a source is kept while its analysis is not turned."""

import numpy as np
import pytest

from explorer.scenario.evaluate import evaluate


def test_an_unturned_source_is_solved_once(plant):
    """Another dose or share leaves the equilibrium of the source alone: it is the same object."""
    scenario = plant({"river": 60, "well": 40}, [plant.dosed("caustic", "sodium_hydroxide", 5, "mg/L")])
    first = evaluate(scenario).solution("river")
    assert evaluate(scenario, {"train.caustic.dose": 8.0}).solution("river") is first
    assert evaluate(scenario, {"waters.well.share": np.array([10.0, 20.0])}).solution("river") is first


def test_its_flow_is_that_of_each_evaluation(plant):
    """Only what depends on the analysis is kept."""
    scenario = plant({"river": 60, "well": 40})
    flows = [
        float(evaluate(scenario, {"waters.well.share": share}).stage("river").flow) for share in (40.0, 75.0)
    ]
    assert flows == pytest.approx([600.0, 250.0])


def test_a_turned_source_is_solved_anew(plant):
    """And one whose analysis was edited."""
    scenario = plant({"river": 60, "well": 40})
    first = evaluate(scenario)
    turned = evaluate(scenario, {"waters.river.analysis.calcium": 30.0})
    assert turned.solution("river") is not first.solution("river")
    assert turned.readout("calcium", "river") == pytest.approx(30.0)
    assert first.readout("calcium", "river") == pytest.approx(26.0)
