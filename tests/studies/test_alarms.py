"""Alarms: each fires on its case and is silent on a clean one; each says where, what, and what to do."""

import numpy as np
import pytest

from explorer.scenario.alarms import ALARMS
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped
from explorer.studies.alarms import ENDS_MISLEAD, INTERIOR_MINIMUM, alarms
from explorer.studies.sweep import sweep

KEYS = {alarm.key for alarm in ALARMS} | {"reading_temperature", INTERIOR_MINIMUM.key, ENDS_MISLEAD.key}

HYPO = ("hypo", "sodium_hypochlorite", 1.0, "mg/L as Cl2")


def raised(scenario, key, **dials):
    """Alarms of one key."""
    return [note for note in alarms(scenario, evaluate(scenario, dials)) if note.key == key]


def opened(name, option=None):
    scenario = open_scenario(shipped()[name])
    return scenario if option is None else scenario.options[option].scenario


def clean(plant, **parts):
    """A hard well and a transfer of the same kind, read at their temperatures, with a little hypochlorite."""
    raw = plant.dict({"well": 100}, [plant.dosed(*HYPO)], **parts)
    well = plant.sheet("well")
    well["ph"]["read_at"] = 11
    raw["waters"][0]["analyses"]["winter"] = well
    return raw


def with_train(plant, *train, water="well", **changed):
    raw = plant.dict({water: 100}, list(train))
    raw["waters"][0]["analyses"]["winter"] = plant.sheet(water, **changed)
    return plant.read(raw)


def softened(plant, solids):
    """Far more lime than the carbonate hardness needs, and a clarifier in which some solids may form."""
    clarifier = {"id": "clarifier", "step": "settle", "residual": 5, "solids": solids}
    return with_train(plant, plant.dosed("lime", "calcium_hydroxide", 400, "mg/L"), clarifier)


CASES = {
    "coagulant_window": lambda plant: with_train(
        plant, plant.dosed("alum", "aluminium_sulfate", 32, "mg/L"), water="moor"
    ),
    "aluminium_left": lambda plant: with_train(
        plant, plant.dosed("alum", "aluminium_sulfate", 40, "mg/L"),
        plant.dosed("caustic", "sodium_hydroxide", 80, "mg/L"),
    ),
    "charge_balance": lambda plant: opened("faulty_analyses"),
    "salinity": lambda plant: with_train(
        plant, sodium=10800, chloride=19300, magnesium=1290, sulfate=2700, calcium=410, potassium=390
    ),
    "ionic_strength": lambda plant: with_train(plant, sodium=2300, chloride=3600),
    "ph_range": lambda plant: with_train(plant, plant.dosed("acid", "sulfuric_acid", 400, "mg/L")),
    "weak_buffer": lambda plant: opened("moss"),
    "blend_turns": lambda plant: opened("amber"),
    "brucite": lambda plant: softened(plant, ["calcite"]),
    "chlorine_gas": lambda plant: opened("moss"),
    "chlorine_ammonia": lambda plant: with_train(
        plant, plant.dosed(*HYPO), plant.dosed("salt", "ammonium_sulfate", 0.3, "mg/L as N")
    ),
    "chloramine_ratio": lambda plant: opened("harbor"),
    "inhibitor": lambda plant: opened("juniper"),
    "warm": lambda plant: opened("cinder"),
    "not_carbonate": lambda plant: opened("faulty_analyses"),
    "chlorine_kinetics": lambda plant: opened("harbor"),
    "reading_temperature": lambda plant: with_train(plant),
}  # fmt: skip


@pytest.mark.parametrize("key", CASES)
def test_each_alarm_is_raised_on_its_case(plant, key):
    """One sentence that says what and, but for a plain remark, what to do; with where and a source."""
    found = raised(CASES[key](plant), key)
    assert found
    for note in found:
        assert note.where
        assert "\n" not in note.text
        assert note.source or key == "chlorine_kinetics"
        assert ":" in note.text or ";" in note.text


@pytest.mark.parametrize("key", sorted(KEYS))
def test_each_alarm_is_silent_on_a_clean_plant(plant, key):
    """Balanced, buffered, cool, with chlorine alone."""
    scenario = plant.read(clean(plant))
    swept = sweep(scenario, "train.hypo.dose", 0, 3, 7)
    assert key not in {note.key for note in alarms(scenario, evaluate(scenario), swept)}


def test_every_alarm_has_a_case():
    """None is left untested; points without an answer are in the cases of the evaluation."""
    assert {alarm.key for alarm in ALARMS} - {"no_answer"} <= CASES.keys()


def test_alarms_are_notes_of_the_outcome():
    """One place: what the alarms say of an outcome stands among its notes."""
    scenario = opened("moss")
    outcome = evaluate(scenario)
    assert alarms(scenario, outcome) == [note for note in outcome.notes if note.key]
    assert "weak_buffer" in {note.key for note in outcome.notes}


# ---- coagulants --------------------------------------------------------------------------------------------


def test_exhausted_alkalinity_says_how_much_is_missing(plant):
    """32 mg/L of alum takes 16.2 mg/L of alkalinity where there are 7.5: 8.7 are missing; hand arithmetic."""
    (note,) = raised(CASES["coagulant_window"](plant), "coagulant_window")
    assert (note.level, note.where) == ("error", "alum")
    assert note.text.startswith("alkalinity exhausted: 8.6")
    assert "add alkali before the coagulant" in note.text


def test_a_floc_that_is_rescued_by_later_alkali_is_a_caution(plant):
    """The finished water has an answer, but the floc was formed in acid."""
    scenario = with_train(
        plant, plant.dosed("alum", "aluminium_sulfate", 32, "mg/L"),
        plant.dosed("caustic", "sodium_hydroxide", 15, "mg/L"), water="moor",
    )  # fmt: skip
    (note,) = raised(scenario, "coagulant_window")
    assert note.level == "caution"
    assert "a later dose puts it right" in note.text
    assert np.isfinite(evaluate(scenario).readout("ph"))


def test_a_ph_under_the_window_is_told_apart_from_no_alkalinity(plant):
    """Enough alkalinity for the metal, but with so much carbon dioxide that the pH is too low."""
    gas, alum = (
        plant.dosed("gas", "carbon_dioxide", 700, "mg/L"),
        plant.dosed("alum", "aluminium_sulfate", 90, "mg/L"),
    )
    scenario = with_train(plant, gas, alum, alkalinity=58, ph=7.0)
    (note,) = raised(scenario, "coagulant_window")
    assert "below the window of the coagulant (about 5.3)" in note.text


def test_an_exhausted_stage_is_told_once(plant):
    """Not again at every step behind it, nor as a point without answer."""
    scenario = with_train(
        plant, plant.dosed("alum", "aluminium_sulfate", 32, "mg/L"), {"id": "sand", "step": "settle"},
        plant.dosed(*HYPO), water="moor",
    )  # fmt: skip
    assert len(raised(scenario, "coagulant_window")) == 1
    assert not raised(scenario, "no_answer")


def test_the_points_of_an_array_are_counted(plant):
    """Alum from 5 to 40 mg/L: the sentence says at how many points the alkalinity is gone."""
    scenario = with_train(plant, plant.dosed("alum", "aluminium_sulfate", 5, "mg/L"), water="moor")
    (note,) = raised(scenario, "coagulant_window", **{"train.alum.dose": np.array([5.0, 10.0, 20.0, 40.0])})
    assert note.text.endswith("(2 of 4 points)")


# ---- analyses ----------------------------------------------------------------------------------------------


def test_the_charge_balance_names_the_waters_that_are_off():
    """Calcium entered as hardness (+35 %) and sulfate missing (+6.4 %); the other two waters are fine."""
    notes = raised(opened("faulty_analyses"), "charge_balance")
    assert [note.where for note in notes] == ["granite", "cobble"]
    assert "+35" in notes[0].text
    assert "+6.4" in notes[1].text


def test_a_water_that_is_not_used_raises_no_alarm(plant):
    """A bad analysis without a share does no harm."""
    raw = plant.dict({"river": 100, "well": 0})
    raw["waters"][1]["analyses"]["winter"] = plant.sheet("well", calcium=290)
    assert not raised(plant.read(raw), "charge_balance")
    raw["waters"][0]["share"], raw["waters"][1]["share"] = 50, 50
    assert raised(plant.read(raw), "charge_balance")


def test_a_ph_without_reading_temperature_is_a_caution_at_its_entry(plant):
    """Where to look, what is used, what to enter."""
    (note,) = raised(with_train(plant), "reading_temperature")
    assert (note.level, note.where) == ("caution", "waters.well.analysis.ph")


def test_ionic_strength_is_a_remark_before_it_is_a_caution(plant):
    """0.05 to 0.1 mol/L coarse, above 0.1 a guide only."""
    (remark,) = raised(with_train(plant, sodium=1300, chloride=2050), "ionic_strength")
    (caution,) = raised(with_train(plant, sodium=2300, chloride=3600), "ionic_strength")
    assert (remark.level, caution.level) == ("info", "caution")


# ---- saturation --------------------------------------------------------------------------------------------


def test_a_dissolving_blend_of_two_precipitating_waters():
    """Amber: said at the blend, with the amount."""
    (note,) = raised(opened("amber"), "blend_turns")
    assert note.where == "blend"
    assert "dissolves 9.2 mg/L as CaCO3" in note.text


def test_the_sweep_of_the_share_finds_the_worst_blend():
    """Amber: the interior minimum replaces the word on the blend as it stands, with the share where it is."""
    scenario = opened("amber")
    swept = sweep(scenario)
    found = {note.key: note for note in alarms(scenario, evaluate(scenario), swept)}
    assert "blend_turns" not in found
    ccpp = swept.outcome.readout("ccpp")
    assert f"dissolves {-ccpp.min():.1f} mg/L as CaCO3 at worst" in found["interior_minimum"].text
    assert "between Fern River and Granite Wellfield" in found["interior_minimum"].text


def test_no_minimum_where_one_end_dissolves_already(plant):
    """Permeate dissolves by itself: nothing is hidden between the ends."""
    scenario = plant({"well": 50, "permeate": 50})
    found = alarms(scenario, evaluate(scenario), sweep(scenario, "waters.permeate.share", 0, 100, 21))
    assert "interior_minimum" not in {note.key for note in found}


def test_a_target_met_at_both_ends_but_not_between():
    """Harbor: total chlorine is there at both ends and gone in between."""
    scenario = opened("harbor")
    found = {note.key: note for note in alarms(scenario, evaluate(scenario), sweep(scenario))}
    assert "Total chlorine meets its target at both ends of the sweep" in found["ends_mislead"].text


def test_brucite_that_may_form_raises_no_alarm(plant):
    """With brucite among its solids the clarifier leaves the water saturated, not more."""
    (note,) = raised(softened(plant, ["calcite"]), "brucite")
    assert note.where == "clarifier"
    assert not raised(softened(plant, ["calcite", "brucite"]), "brucite")


def test_a_clarifier_that_brings_the_ph_down_raises_no_alarm():
    """Quartz: above pH 10.6 where the lime goes in, below it once the calcium carbonate has formed."""
    outcome = evaluate(opened("quartz"))
    assert outcome.readout("ph", "lime") > 10.6 > outcome.readout("ph", "clarifier")
    assert not raised(opened("quartz"), "brucite")


def test_warm_water_says_what_a_heater_does_to_it():
    """Cinder at 42 °C: CCPP here and at 60 °C, the latter larger."""
    scenario = opened("cinder")
    (note,) = raised(scenario, "warm")
    here = float(evaluate(scenario).readout("ccpp"))
    assert f"precipitates {here:.0f} mg/L as CaCO3 here" in note.text
    hot = evaluate(scenario, {"train.warm.temperature": 60.0}).readout("ccpp")
    assert f"precipitates {hot:.0f} mg/L as CaCO3 at 60 °C" in note.text


# ---- what must not meet ------------------------------------------------------------------------------------


ACIDS = ["sulfuric_acid", "hydrochloric_acid", "phosphoric_acid", "fluorosilicic_acid", "citric_acid",
         "aluminium_sulfate", "ferric_chloride", "sodium_bisulfite"]  # fmt: skip


@pytest.mark.parametrize("acid", ACIDS)
@pytest.mark.parametrize("first", [True, False], ids=["before", "behind"])
def test_hypochlorite_beside_acid_or_coagulant(plant, acid, first):
    """In either order: chlorine gas."""
    unit = "mg/L" if acid in ("sulfuric_acid", "hydrochloric_acid") else None
    chemical = plant.dosed("other", acid, 1, unit or "mmol/L")
    chemical["dose"]["value"] = 0.02 if unit is None else 2
    train = [plant.dosed(*HYPO), chemical]
    (note,) = raised(with_train(plant, *(train if first else train[::-1])), "chlorine_gas")
    assert "chlorine gas" in note.text
    assert note.where == ("other" if first else "hypo")


@pytest.mark.parametrize("between", ["sodium_hydroxide", "sodium_bicarbonate", "sodium_fluoride"])
def test_hypochlorite_beside_alkali_or_salt_is_fine(plant, between):
    """No acid, no alarm."""
    train = [plant.dosed(*HYPO), plant.dosed("other", between, 1, "mg/L")]
    assert not raised(with_train(plant, *train), "chlorine_gas")


def test_a_step_between_keeps_them_apart(plant):
    """A contact tank, here a settling step, lies between the two points."""
    train = [
        plant.dosed(*HYPO),
        {"id": "tank", "step": "settle"},
        plant.dosed("acid", "sulfuric_acid", 3, "mg/L"),
    ]
    assert not raised(with_train(plant, *train), "chlorine_gas")


def test_a_dose_of_nothing_meets_nothing(plant):
    """Acid at zero dose is not there."""
    train = [plant.dosed(*HYPO), plant.dosed("acid", "sulfuric_acid", 0, "mg/L")]
    assert not raised(with_train(plant, *train), "chlorine_gas")


@pytest.mark.parametrize(
    ("chlorine", "fires"), [(4.5, False), (4.9, False), (5.2, True), (7.4, True), (8.5, False)]
)
def test_chlorine_to_nitrogen_beyond_five(plant, chlorine, fires):
    """1 mg/L of ammonia nitrogen: chloramine to 5:1, destroyed to 7.6:1, free chlorine beyond."""
    scenario = with_train(
        plant, plant.dosed("hypo", "sodium_hypochlorite", chlorine, "mg/L as Cl2"),
        ammonia={"value": 1, "unit": "mg/L as N"},
    )  # fmt: skip
    assert bool(raised(scenario, "chloramine_ratio")) == fires


def test_the_ratio_counts_what_both_waters_bring():
    """Harbor blend: chlorine and nitrogen of import and wells together; hand arithmetic."""
    scenario = opened("harbor")
    (note,) = raised(scenario, "chloramine_ratio")
    chlorine = 0.6 * 2.3 + 0.4 * 0.9
    nitrogen = 0.6 * (0.06 + 2.3 * 14.007 / 70.9)
    assert note.where == "blend"
    assert f"chlorine to nitrogen {chlorine / nitrogen:.1f} by mass" in note.text
