"""Nothing is lost or made: every element and the charge, through any train, solids and gas counted."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from explorer.chemistry.components import COMPONENT
from explorer.chemistry.elements import molar_mass
from explorer.scenario.evaluate import evaluate
from explorer.treatment.chemicals import CATALOGUE

STEPS = {
    "lime": lambda x: {"step": "dose", "chemical": "calcium_hydroxide", "dose": _mg(250 * x)},
    "caustic": lambda x: {"step": "dose", "chemical": "sodium_hydroxide", "dose": _mg(40 * x)},
    "acid": lambda x: {"step": "dose", "chemical": "sulfuric_acid", "dose": _mg(40 * x)},
    "alum": lambda x: {"step": "dose", "chemical": "aluminium_sulfate", "dose": _mg(40 * x)},
    "ferric": lambda x: {"step": "dose", "chemical": "ferric_chloride", "dose": _mg(20 * x)},
    "gas": lambda x: {"step": "dose", "chemical": "carbon_dioxide", "dose": _mg(60 * x)},
    "phosphoric": lambda x: {"step": "dose", "chemical": "phosphoric_acid", "dose": _mg(4 * x)},
    "fluoride": lambda x: {"step": "dose", "chemical": "fluorosilicic_acid", "dose": _mg(2 * x)},
    "settle": lambda x: {"step": "settle", "residual": 20 * x, "solids": ["calcite", "brucite"]},
    "bed": lambda x: {"step": "limestone", "approach": 95 * x},
    "tower": lambda x: {"step": "air", "approach": 90 * x, "co2_ppm": 420},
    "heater": lambda x: {"step": "temperature", "temperature": {"value": 5 + 35 * x, "unit": "°C"}},
}
SOLIDS = {
    "calcite": ("CaCO3", {"calcium": 1, "dic": 1, "alkalinity": 2}),
    "brucite": ("Mg(OH)2", {"magnesium": 1, "alkalinity": 2}),
    "aluminium_hydroxide": ("Al(OH)3", {"aluminium": 1, "alkalinity": 3}),
    "iron_hydroxide": ("Fe(OH)3", {"iron": 1, "alkalinity": 3}),
}
"""Formula of each solid and what a mole of it holds of the totals."""


def _mg(value):
    return {"value": value, "unit": "mg/L"}


def charge_of_totals(totals, system):
    """eq/L of the zero-level forms less the alkalinity: the charge that the totals stand for."""
    charges = [COMPONENT[key].charge for key in system.keys]
    return np.tensordot(charges, totals, axes=1) - totals[system.index["alkalinity"]]


def held_in_solids(stage):
    """Totals held by the solids formed on the way to a stage."""
    totals = stage.system.zeros()
    for name, dry in stage.solids.items():
        formula, counts = SOLIDS[name]
        for key, count in counts.items():
            totals[stage.system.index[key]] += count * dry / (1000 * molar_mass(formula))
    return totals


trains = st.lists(st.tuples(st.sampled_from(sorted(STEPS)), st.floats(0.05, 1.0)), min_size=1, max_size=5)


@settings(max_examples=60, deadline=None)
@given(kinds=trains, share=st.floats(5, 95))
def test_every_total_and_the_charge_are_accounted_for(plant, kinds, share):
    """Each step changes totals and solids together by what was dosed, dissolved or exchanged only."""
    train = [{"id": f"s{n}", **STEPS[kind](x)} for n, (kind, x) in enumerate(kinds)]
    outcome = evaluate(plant({"river": share, "well": 100 - share}, train))
    stages = outcome.stages[outcome.stages.index(outcome.stage("blend")) :]
    for before, after, (kind, _) in zip(stages, stages[1:], kinds, strict=False):
        if after.problem.any():
            return
        system = after.system
        change = after.totals + held_in_solids(after) - before.totals - held_in_solids(before)
        scale = np.abs(after.totals).max()
        charge = charge_of_totals(change, system)
        if kind == "bed":
            # the bed gives calcium carbonate to the water; as much calcium as carbon, twice the alkalinity
            gained = change[system.index["calcium"]]
            change[system.index["calcium"]] -= gained
            change[system.index["dic"]] -= gained
            change[system.index["alkalinity"]] -= 2 * gained
        elif kind == "tower":
            change[system.index["dic"]] = 0.0
        elif after.kind == "dose":
            change = np.zeros(1)
        assert np.abs(change).max() <= 1e-9 * scale, kind
        assert abs(charge) <= 1e-9 * scale, kind


@pytest.mark.parametrize("kind", ["lime", "alum", "ferric", "phosphoric", "fluoride"])
def test_a_dose_adds_what_its_formula_says(plant, kind):
    """Solids counted, the totals rise by dose over molar mass times the catalogue's composition."""
    step = {"id": "s", **STEPS[kind](0.5)}
    outcome = evaluate(plant({"well": 100}, [step]))
    before, after = outcome.stage("blend"), outcome.stage("finished")
    chemical = CATALOGUE[step["chemical"]]
    expected = np.zeros_like(before.totals)
    for key, amount in chemical.totals.items():
        expected[before.system.index[key]] = amount * step["dose"]["value"] / (1000 * chemical.molar_mass)
    found = after.totals + held_in_solids(after) - before.totals
    assert found == pytest.approx(expected, rel=1e-9, abs=1e-14)
