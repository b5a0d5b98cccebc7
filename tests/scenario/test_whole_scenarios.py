"""Rules that hold for every plant: random waters, shares, trains and side streams, evaluated as a whole."""

from copy import deepcopy
from typing import Any

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from explorer.chemistry.elements import molar_mass
from explorer.scenario.dials import dials
from explorer.scenario.evaluate import Outcome, evaluate
from explorer.scenario.files import dumps, read_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import READOUTS
from explorer.treatment.chemicals import CATALOGUE
from explorer.treatment.units import from_base, to_base, units_for

SHEETS = ("river", "well", "transfer", "moor", "permeate")

DOSED = {
    "sodium_hydroxide": 20, "calcium_hydroxide": 60, "sodium_bicarbonate": 80, "sodium_carbonate": 40,
    "hydrochloric_acid": 5, "sulfuric_acid": 5, "carbon_dioxide": 20, "calcium_chloride": 60,
    "sodium_chloride": 60, "sodium_hypochlorite": 2, "phosphoric_acid": 2, "fluorosilicic_acid": 1,
    "sodium_silicate": 8,
}  # fmt: skip
"""Chemicals and the largest dose [mg/L] here; none of them is a coagulant."""

ACIDS, BASES = ("hydrochloric_acid", "sulfuric_acid"), ("sodium_hydroxide", "potassium_hydroxide")

PLAIN = ("sodium", "chloride", "potassium", "nitrate", "sulfate")
"""Components that no solid holds here."""

SAME = 1e-9


@st.composite
def doses(draw: st.DrawFn, name: str) -> dict[str, Any]:
    """A fixed dose of a chemical that makes no floc."""
    chemical = draw(st.sampled_from(sorted(DOSED)))
    dose = {"value": DOSED[chemical] * draw(st.floats(0.01, 1)), "unit": "mg/L"}
    return {"id": name, "step": "dose", "chemical": chemical, "dose": dose}


@st.composite
def trains(
    draw: st.DrawFn, name: str, longest: int, common: bool = True, deep: int = 1
) -> list[dict[str, Any]]:
    """Steps of every kind, with side streams in each other as deep as asked."""
    kinds = ["dose", "dose", "air", "limestone", "temperature"]
    kinds += ["alum", "settle", "hold"] * common + ["side_stream"] * (deep > 0)
    steps = []
    for place in range(draw(st.integers(0, longest))):
        kind, step, part = draw(st.sampled_from(kinds)), f"{name}{place}", draw(st.floats(0.05, 0.95))
        match kind:
            case "dose":
                steps.append(draw(doses(step)))
                continue
            case "hold":
                ceiling = {"value": 60, "unit": "mg/L"}
                hold = {"readout": "ph", "value": 7 + 2 * part, "ceiling": ceiling}
                made = {"step": "dose", "chemical": "sodium_hydroxide", "hold": hold}
            case "alum":
                dose = {"value": 20 * part, "unit": "mg/L"}
                made = {"step": "dose", "chemical": "aluminium_sulfate", "dose": dose}
            case "temperature":
                made = {"step": kind, "temperature": {"value": 5 + 30 * part, "unit": "°C"}}
            case "settle":
                made = {"step": kind, "residual": 20 * part}
            case "side_stream":
                inner = draw(trains(f"{step}_", 2, common=False, deep=deep - 1))
                made = {"step": kind, "fraction": 100 * part, "train": inner}
            case _:
                made = {"step": kind, "approach": 100 * part}
        steps.append({"id": step, **made})
    return steps


@st.composite
def plants(draw: st.DrawFn, plant: Any, longest: int = 3) -> dict[str, Any]:
    """A whole scenario as it stands in a file: one to four waters with their trains, and a common train."""
    names = draw(st.lists(st.sampled_from(SHEETS), min_size=1, max_size=4, unique=True))
    weights = np.array([draw(st.floats(0.05, 1)) for _ in names])
    shares = np.minimum(100 * weights / weights.sum(), 100)
    made = plant.dict(dict(zip(names, shares.tolist(), strict=True)))
    for place, water in enumerate(made["waters"]):
        water["train"] = draw(trains(f"w{place}_", 2, common=False))
        for key in ("alkalinity", "calcium", "sodium", "chloride"):
            water["analyses"]["winter"][key]["value"] *= draw(st.floats(0.7, 1.4))
    return made | {"train": draw(trains("c", longest, deep=2))}


def answered(scenario: dict[str, Any], **turned: Any) -> Outcome:
    """The outcome, where every stage has an answer."""
    outcome = evaluate(Scenario.from_dict(scenario), turned)
    assume(not any(np.any(stage.problem) for stage in outcome.stages))
    return outcome


def assert_same(one: Outcome, other: Outcome, within: float = SAME) -> None:
    """All readouts of the finished water agree."""
    for key in READOUTS:
        expected = one.readout(key)
        np.testing.assert_allclose(other.readout(key), expected, rtol=within, atol=within, err_msg=key)


@settings(max_examples=25)
@given(data=st.data())
def test_a_point_alone_equals_the_same_point_in_a_batch(plant, data):
    """Whatever the plant and the dials, an array is the same as its points one by one."""
    made = data.draw(plants(plant))
    scenario = Scenario.from_dict(made)
    every = {address: dial for address, dial in dials(scenario).items() if dial.value and dial.bounded}
    chosen = data.draw(st.lists(st.sampled_from(sorted(every)), min_size=1, max_size=3, unique=True))
    assume(sum(address.endswith(".share") for address in chosen) < 2)
    factors = np.array(data.draw(st.lists(st.floats(0.8, 1.0), min_size=2, max_size=5)))
    values = {address: every[address].value * factors for address in chosen}
    batch = evaluate(scenario, values)
    for point in range(len(factors)):
        alone = evaluate(scenario, {address: array[point] for address, array in values.items()})
        for key in READOUTS:
            found, expected = batch.readout(key)[point], alone.readout(key)
            # a held dose is searched for in company; its end is the same to the tolerance of the search
            np.testing.assert_allclose(found, expected, rtol=SAME, atol=SAME, err_msg=key)


@settings(max_examples=25)
@given(data=st.data(), name=st.sampled_from((*ACIDS, *BASES)))
def test_strong_acid_lowers_and_strong_base_raises_the_ph(plant, data, name):
    """At the end of any train, dose by dose, without exception."""
    made = data.draw(plants(plant))
    made["train"].append(
        {"id": "last", "step": "dose", "chemical": name, "dose": {"value": 0, "unit": "mg/L"}}
    )
    made["train"] = [step for step in made["train"] if step.get("chemical") != "aluminium_sulfate"]
    outcome = answered(made, **{"train.last.dose": np.linspace(0, 30, 40)})
    rises = np.diff(outcome.readout("ph"))
    assert (rises < 0).all() if name in ACIDS else (rises > 0).all()


@settings(max_examples=20)
@given(data=st.data())
def test_doses_that_stand_together_may_change_places(plant, data):
    """What is added counts, not in which order, as long as nothing else happens between."""
    made = data.draw(plants(plant))
    pair = [data.draw(doses("one")), data.draw(doses("two"))]
    place = data.draw(st.integers(0, len(made["train"])))
    other = deepcopy(made)
    made["train"][place:place] = pair
    other["train"][place:place] = pair[::-1]
    assert_same(answered(made), answered(other))


@settings(max_examples=20)
@given(data=st.data())
def test_the_order_of_the_waters_does_not_matter(plant, data):
    """Waters are blended, not put one after the other."""
    made = data.draw(plants(plant))
    other = made | {"waters": data.draw(st.permutations(made["waters"]))}
    assert_same(answered(made), answered(other))


@settings(max_examples=20)
@given(data=st.data())
def test_a_dose_to_every_water_is_the_same_dose_to_the_blend(plant, data):
    """Blending and dosing are both additions, where no water reacts with its own dose alone."""
    made = data.draw(plants(plant))
    dose = data.draw(doses("same"))
    assume(dose["chemical"] != "sodium_hypochlorite")
    before, after = deepcopy(made), deepcopy(made)
    for place, water in enumerate(before["waters"]):
        water["train"].append(dose | {"id": f"same{place}"})
    after["train"].insert(0, dose)
    assert_same(answered(before), answered(after))


@settings(max_examples=25)
@given(data=st.data())
def test_every_ion_that_flows_in_or_is_dosed_flows_out(plant, data):
    """Along all trains and side streams, with their parts of the flow; calcium with its solid."""
    made = data.draw(plants(plant))
    outcome = answered(made)
    system = outcome.stage().system

    def added(train: list[dict[str, Any]]) -> np.ndarray:
        """Totals that the doses of a train add per litre of what enters it."""
        totals = system.zeros()
        for step in train:
            if step["step"] == "side_stream":
                totals += step["fraction"] / 100 * added(step["train"])
            elif step["step"] == "dose":
                moles = outcome.dosing[step["id"]].moles
                for key, amount in CATALOGUE[step["chemical"]].totals.items():
                    totals[system.index[key]] += amount * moles
        return totals

    expected = added(made["train"])
    for water in made["waters"]:
        entered = outcome.stage(water["id"]).totals + added(water["train"])
        expected = expected + water["share"] / 100 * entered
    # hypochlorite and the chlorine that ammonia takes end as chloride
    chlorine = system.index["free_chlorine"]
    for key in PLAIN:
        row = system.index[key]
        if key != "chloride" or not expected[chlorine]:
            assert outcome.stage().totals[row] == pytest.approx(expected[row], rel=SAME, abs=1e-15), key
    kinds = {step["step"] for train in _trains(made) for step in train}
    if "limestone" not in kinds:
        formed = outcome.stage().solids.get("calcite", 0.0) / (1000 * molar_mass("CaCO3"))
        found = outcome.stage().totals[system.index["calcium"]] + formed
        assert found == pytest.approx(expected[system.index["calcium"]], rel=SAME, abs=1e-15)


def _trains(made: dict[str, Any]) -> list[list[dict[str, Any]]]:
    waiting = [made["train"], *(water["train"] for water in made["waters"])]
    found = []
    while waiting:
        found.append(waiting.pop())
        waiting += [step["train"] for step in found[-1] if "train" in step]
    return found


@settings(max_examples=20)
@given(data=st.data())
def test_the_units_of_a_file_do_not_change_the_answer(plant, data):
    """Every analysis entry and every dose in any unit that may stand there."""
    made = data.draw(plants(plant))
    other = deepcopy(made)
    for water in other["waters"]:
        for key, entry in water["analyses"]["winter"].items():
            units = [unit for unit in units_for(key) if unit]
            if units:
                unit = data.draw(st.sampled_from(units))
                value = from_base(to_base(entry["value"], entry["unit"], key), unit, key)
                entry.update(value=float(value), unit=unit)
    for train in _trains(other):
        for dose in (step["dose"] for step in train if "dose" in step):
            step = next(step for step in train if step.get("dose") is dose)
            factors = CATALOGUE[step["chemical"]].units
            unit = data.draw(st.sampled_from([unit for unit in factors if "product" not in unit]))
            dose.update(value=dose["value"] * factors["mg/L"] / factors[unit], unit=unit)
    assert_same(answered(made), answered(other), 1e-7)


@settings(max_examples=25)
@given(data=st.data())
def test_a_plant_comes_back_from_its_file_and_gives_the_same_answer(plant, data):
    """The file is stable, and what it says is all there is."""
    made = data.draw(plants(plant))
    scenario = Scenario.from_dict(made)
    text = dumps(scenario)
    again = read_scenario(text)
    assert again.to_dict() == scenario.to_dict() == made
    assert dumps(again) == text
    assert_same(evaluate(scenario), evaluate(again), 0.0)
