"""Titration: curves of published systems, the water's own answer, and the logarithmic diagram."""

import json
from pathlib import Path

import numpy as np
import pytest

from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate
from explorer.studies.titration import diagram, titrated, titration

PUBLISHED = json.loads((Path(__file__).parent / "titrations.json").read_text(encoding="utf-8"))
IDS = [case["id"] for case in PUBLISHED]

PHTHALIC = {"id": "phthalate", "molar_mass": 166.13, "pka": [2.950, 5.408]}
"""pKa at 25 °C: CRC Handbook."""


def solution(plant, analysis):
    """A plant whose one water is a laboratory solution; amounts in mmol/L, alkalinity in meq/L."""
    amounts = {"dic": 0, **analysis}
    entries = {
        key: {"value": value, "unit": "meq/L" if key == "alkalinity" else "mmol/L"}
        for key, value in amounts.items()
    }
    raw = plant.dict({"river": 100}, acids=[PHTHALIC])
    raw["waters"][0]["analyses"]["winter"] = {"temperature": {"value": 25, "unit": "°C"}, **entries}
    return plant.read(raw)


# ---- published curves --------------------------------------------------------------------------------------


@pytest.mark.parametrize("case", PUBLISHED, ids=IDS)
def test_a_published_curve_is_met_at_every_dose(plant, case):
    """pH after each printed dose, within the tolerance stated beside the data."""
    titrant = titrated(
        solution(plant, case["analysis"]), "river", "sodium_hydroxide", "meq/L", "hydrochloric_acid"
    )
    ph = titrant.after(case["dose"]).readout("ph")
    assert np.abs(ph - case["ph"]).max() <= case["within"], np.round(ph, 3)


def test_a_published_buffer_intensity_is_met_along_its_curve(plant):
    """Phthalate: the slope printed beside each dose, mmol/L per pH."""
    case = PUBLISHED[IDS.index("phthalate")]
    titrant = titrated(
        solution(plant, case["analysis"]), "river", "sodium_hydroxide", "meq/L", "hydrochloric_acid"
    )
    beta = titrant.after(case["dose"]).readout("buffer_intensity")
    printed = np.array(case["beta"], float)
    known = np.isfinite(printed)
    assert np.abs(beta - printed)[known].max() <= case["beta_within"]


# ---- the curve of a water ----------------------------------------------------------------------------------


def test_acid_to_the_end_point_is_the_alkalinity(plant):
    """Strong acid equal to the alkalinity leaves the pH of carbon dioxide in water, near 4.5."""
    curve = titration(
        plant({"well": 100}), "well", "hydrochloric_acid", start=0, stop=272 / 50.04, unit="meq/L"
    )
    assert curve.ph[0] == pytest.approx(7.25, abs=1e-6)
    assert 4.0 < curve.ph[-1] < 4.8
    assert (np.diff(curve.ph) < 0).all()


def test_acid_and_base_stand_on_one_axis(plant):
    """Negative doses are doses of the opposite chemical; the water as it is lies between."""
    both = titration(
        plant({"well": 100}), "well", "sodium_hydroxide", start=-2, stop=2, points=5, unit="meq/L",
        opposite="hydrochloric_acid",
    )  # fmt: skip
    base = titration(plant({"well": 100}), "well", "sodium_hydroxide", stop=2, points=3, unit="meq/L")
    acid = titration(plant({"well": 100}), "well", "hydrochloric_acid", stop=2, points=3, unit="meq/L")
    assert both.x.tolist() == [-2, -1, 0, 1, 2]
    assert both.ph[2:] == pytest.approx(base.ph, abs=1e-9)
    assert both.ph[2::-1] == pytest.approx(acid.ph, abs=1e-9)
    assert both.ph[2] == pytest.approx(both.own_ph, abs=1e-9)


def test_the_buffer_intensity_is_the_slope_of_the_curve(plant):
    """Dose over pH between neighbouring points, for an alkali that brings nothing but alkalinity."""
    curve = titration(plant({"river": 100}), "river", "sodium_hydroxide", stop=0.4, points=401, unit="meq/L")
    slope = np.diff(curve.x) / np.diff(curve.ph)
    assert slope == pytest.approx((curve.buffer_intensity[1:] + curve.buffer_intensity[:-1]) / 2, rel=2e-3)


def test_a_titration_at_a_stage_is_the_dose_step_there(plant):
    """Titrating the blend with 10 mg/L of caustic is a caustic step of 10 mg/L behind the blend."""
    shares = {"river": 60, "well": 40}
    curve = titration(plant(shares), "blend", "sodium_hydroxide", stop=10, points=2)
    dosed = evaluate(plant(shares, [plant.dosed("caustic", "sodium_hydroxide", 10, "mg/L")]))
    assert curve.unit == "mg/L"
    assert curve.ph[-1] == pytest.approx(float(dosed.readout("ph")), abs=1e-9)


def test_a_chemical_without_the_unit_is_titrated_by_its_alkalinity(plant):
    """1 meq/L of phosphoric acid is 1 mmol/L, counted to dihydrogen phosphate; 31 mg/L as P."""
    by_alkalinity = titration(plant({"well": 100}), "well", "phosphoric_acid", stop=1, points=2, unit="meq/L")
    by_mass = titration(plant({"well": 100}), "well", "phosphoric_acid", stop=30.974, points=2)
    assert by_alkalinity.ph[-1] == pytest.approx(by_mass.ph[-1], abs=1e-5)


def test_a_chemical_of_the_scenario_can_be_titrated(plant):
    """An own chemical counts as the catalogue's."""
    scenario = plant(
        {"well": 100},
        chemicals=[{"id": "mild_acid", "formula": "HCl", "adds": {"chloride": 1}, "strength": 10}],
    )
    own = titration(scenario, "well", "mild_acid", stop=50, points=2)
    usual = titration(scenario, "well", "hydrochloric_acid", stop=50, points=2)
    assert own.ph[-1] == pytest.approx(usual.ph[-1], abs=1e-9)


def test_a_dose_that_has_no_answer_says_why(plant):
    """Alum beyond the alkalinity of a soft water, 7.5 mg/L at 0.505 a mg, is a gap."""
    curve = titration(plant({"moor": 100}), "moor", "aluminium_sulfate", stop=40, points=5)
    assert np.isfinite(curve.ph).tolist() == [True, True, False, False, False]
    assert curve.reasons[-1] == "alkalinity exhausted: add alkali first"
    assert curve.to_dict()["ph"][-1] is None


def test_the_dose_to_a_ph_is_read_off_the_curve(plant):
    """Back at that dose, the water has that pH; a pH the curve does not reach has none."""
    curve = titration(plant({"river": 100}), "river", "sodium_hydroxide", stop=20)
    dose = curve.dose_to(9.5)
    back = titration(plant({"river": 100}), "river", "sodium_hydroxide", stop=dose, points=2)
    assert back.ph[-1] == pytest.approx(9.5, abs=0.01)
    assert np.isnan(curve.dose_to(5.0))


@pytest.mark.parametrize(
    ("changed", "sentence"),
    [
        ({"chemical": "soap"}, r'chemical: "soap" is not a chemical'),
        ({"unit": "mg/L as P"}, r'unit: "mg/L as P" is not a unit of sodium hydroxide'),
        ({"stage": "loft"}, r'"loft" is not a stage'),
        ({"start": -1}, "start: -1 is negative; allowed with an opposite chemical"),
        ({"stop": 0}, "stop: 0 to 0 is no range"),
        ({"points": 1}, "points: 1 is out of range; allowed 2 to 2001"),
        ({"opposite": "soap"}, r'chemical: "soap" is not a chemical'),
    ],
)
def test_what_cannot_be_titrated_is_one_sentence(plant, changed, sentence):
    """Chemical, unit, stage and range."""
    asked = {"stage": "well", "chemical": "sodium_hydroxide", **changed}
    with pytest.raises(ScenarioError, match=f"^{sentence}"):
        titration(plant({"well": 100}), asked.pop("stage"), asked.pop("chemical"), **asked)


def test_the_table_has_a_row_for_every_dose(plant):
    """Heading with units, then dose, pH, buffer intensity and reason."""
    rows = titration(plant({"well": 100}), "well", "sodium_hydroxide", points=4).table()
    assert rows[0][0] == "Dose [mg/L]"
    assert len(rows) == 5


# ---- the logarithmic diagram -------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def made(plant):
    raw = plant.dict({"river": 100})
    entries = {"phosphate": {"value": 1, "unit": "mg/L as P"}, "ammonia": {"value": 0.5, "unit": "mg/L as N"}}
    raw["waters"][0]["analyses"]["winter"].update(entries)
    outcome = evaluate(plant.read(raw))
    return outcome, diagram(outcome)


def family(made, key):
    return next(part for part in made[1].families if part.key == key)


def test_the_diagram_covers_ph_2_to_12_and_only_what_is_there(made):
    """Families of the totals the water holds, the water's own ions first."""
    outcome, drawn = made
    assert (drawn.ph[0], drawn.ph[-1]) == (2, 12)
    keys = [part.key for part in drawn.families]
    assert keys[0] == "water"
    assert {"carbonate", "phosphate", "ammonia", "silicate"} <= set(keys)
    assert not {"chlorine", "borate", "aluminium"} & set(keys)
    assert drawn.own_ph == pytest.approx(float(outcome.readout("ph")))


def test_the_species_of_a_family_add_to_its_total_at_every_ph(made):
    """Every carbonate species holds one carbon; together they are the DIC of the water."""
    carbonate = family(made, "carbonate")
    total = sum(10**log for log in carbonate.logs.values())
    assert total == pytest.approx(np.full(total.shape, carbonate.total), rel=1e-9)


def test_acid_and_base_of_a_pair_cross_at_its_constant(made):
    """NH4+ and NH3 are equal where the pH is pKa and a little: 10.1 at 4 °C (Emerson et al. 1975, memory)."""
    ammonia = family(made, "ammonia")
    beyond = ammonia.logs["NH3(aq)"] - ammonia.logs["NH4+"]
    crossing = np.interp(0.0, beyond, made[1].ph)
    assert crossing == pytest.approx(0.09018 + 2729.92 / 277.15, abs=0.08)


def test_the_own_point_lies_on_the_curves(made):
    """At the water's own pH the diagram shows the water's own species."""
    drawn = made[1]
    for part in drawn.families:
        for species, log in part.logs.items():
            assert np.interp(drawn.own_ph, drawn.ph, log) == pytest.approx(part.own[species], abs=0.01)


def test_the_diagram_as_plain_data_holds_every_family(made):
    """By family and species, as long as the pH axis."""
    data = made[1].to_dict()
    assert set(data["families"]) == {part.key for part in made[1].families}
    assert len(data["families"]["carbonate"]["HCO3-"]) == len(data["ph"])


def test_a_diagram_is_of_one_water(plant):
    """A sweep has no diagram, and a range has to rise."""
    scenario = plant({"river": 60, "well": 40})
    with pytest.raises(ScenarioError, match="a diagram is of one water"):
        diagram(evaluate(scenario, {"waters.well.share": np.array([10.0, 20.0])}))
    with pytest.raises(ScenarioError, match="ph: 9 to 3 is no range"):
        diagram(evaluate(scenario), low=9, high=3)
