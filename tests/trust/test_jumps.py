"""Curves do not jump unless the engine reports why: dials of every shipped scenario, looked at closely."""

import numpy as np
import pytest

from explorer.scenario.compile import compiled
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped
from explorer.scenario.stage import Stage

from .jumps import jumps, suspicious, turnable

KINDS = (".share", ".dose", ".hold.value", ".temperature")
MOST = 2
"""Dials of a kind that are swept here; ``python -m tests.trust.jumps`` takes all."""


def swept(name):
    """A scenario and some of its dials of every kind."""
    scenario = open_scenario(shipped()[name])
    every = turnable(scenario, compiled(scenario).dials)
    return scenario, [address for kind in KINDS for address in [a for a in every if a.endswith(kind)][:MOST]]


@pytest.mark.parametrize("name", shipped())
def test_no_readout_jumps_along_shares_doses_and_temperatures(name):
    """A finite change over no distance comes only with solids, answers, holds or chlorine that come or go."""
    scenario, addresses = swept(name)
    assert len(addresses) >= 3
    assert [str(jump) for address in addresses for jump in jumps(scenario, address)] == []


@pytest.fixture
def stepping(monkeypatch):
    """Puts a step of a given height into the pH where the calcium passes a value."""

    def put(height, calcium):
        plain = Stage.readout

        def stepped(stage, key):
            passed = plain(stage, "calcium") > calcium
            return plain(stage, key) + (height * passed if key == "ph" else 0.0)

        monkeypatch.setattr(Stage, "readout", stepped)

    return put


@pytest.mark.parametrize("height", [0.5, 0.05, -0.01])
def test_a_step_that_nothing_explains_is_found(stepping, height):
    """Also one that is small beside the rise of the whole curve, and at its place."""
    scenario = open_scenario(shipped()["amber"])
    readouts = ("ph",)
    assert list(jumps(scenario, "waters.well.share", readouts)) == []
    stepping(height, 60.0)
    (jump,) = jumps(scenario, "waters.well.share", readouts)
    assert jump.after - jump.before == pytest.approx(height, rel=0.01)


def test_steep_curves_and_kinks_are_no_jumps():
    """Differences of a smooth curve lie between their neighbours; what does not is looked at closely."""
    x = np.linspace(-1, 1, 241)
    assert suspicious(x**3 + x) == [] and suspicious(np.exp(3 * x)) == []
    assert suspicious(np.tanh(500 * x)) != []
    assert 120 in suspicious(x + 0.1 * (x > 0.001))
