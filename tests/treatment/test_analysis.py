"""From laboratory sheet to conserved totals."""

from dataclasses import replace

import numpy as np
import pytest

from explorer.chemistry import System, WeakAcid
from explorer.treatment.analysis import AnalysisError, Measured, analysis_totals


def in_other_units(entries, units):
    """The same water with some entries rewritten: key -> (factor, unit)."""
    return entries | {
        key: replace(entries[key], value=entries[key].value * factor, unit=unit)
        for key, (factor, unit) in units.items()
    }


CACO3, HCO3, CAO = 100.086, 61.016, 56.077
SAME_WATER = {
    "American sheet": {
        "calcium": (CACO3 / 40.078, "mg/L as CaCO3"),
        "magnesium": (CACO3 / 24.305, "mg/L as CaCO3"),
        "nitrate": (14.007 / 62.004, "mg/L as N"),
    },
    "German sheet": {
        "alkalinity": (2 / CACO3, "mmol/L"),
        "calcium": (CAO / 40.078 / 10, "°dH"),
        "magnesium": (CAO / 24.305 / 10, "°dH"),
        "silica": (28.085 / 60.083, "mg/L as Si"),
    },
    "French sheet": {
        "alkalinity": (1 / 10, "°fH"),
        "calcium": (CACO3 / 40.078 / 10, "°fH"),
        "magnesium": (CACO3 / 24.305 / 10, "°fH"),
        "sulfate": (32.06 / 96.056, "mg/L as S"),
    },
    "chemist's sheet": {
        "alkalinity": (2 * HCO3 / CACO3, "mg/L as HCO3"),
        "calcium": (2 / 40.078, "meq/L"),
        "magnesium": (1 / 24.305, "mmol/L"),
        "sodium": (1 / 22.98976928, "meq/L"),
        "chloride": (1 / 35450, "eq/L"),
        "potassium": (1000, "µg/L"),
        "silica": (1 / 60083, "mol/L"),
    },
}


@pytest.mark.parametrize("units", SAME_WATER.values(), ids=SAME_WATER)
def test_the_same_water_in_other_units_has_the_same_totals(system, granite, units):
    """The sheet's units do not change the water: 1e-12 relative in every total."""
    expected = analysis_totals(granite, system).totals
    found = analysis_totals(in_other_units(granite, units), system).totals
    np.testing.assert_allclose(found, expected, rtol=1e-12)


def test_every_good_water_reads_back_its_ph_and_alkalinity(system, good_water):
    """The totals, solved at the reading temperature, give the pH and alkalinity that were entered."""
    intake = analysis_totals(good_water, system)
    solution = system.solve(intake.totals, intake.temperature)
    assert intake.possible
    assert solution.ph == pytest.approx(good_water["ph"].value, abs=1e-8)
    assert intake.totals[system.index["alkalinity"]] * 50_043 == pytest.approx(good_water["alkalinity"].value)


def test_ph_read_warm_is_higher_in_the_cold_water(system, granite):
    """A pH read at 25 °C belongs to the totals; at its own 11 °C the water has another pH."""
    granite["ph"] = replace(granite["ph"], read_at=25.0)
    intake = analysis_totals(granite, system)
    assert system.solve(intake.totals, 25.0).ph == pytest.approx(7.25, abs=1e-8)
    assert system.solve(intake.totals, intake.temperature).ph > 7.30
    assert not [note for note in intake.notes if note.where == "ph"]


def test_a_ph_without_reading_temperature_is_taken_at_the_water_temperature_and_says_so(system, granite):
    """Nothing is assumed in silence."""
    notes = analysis_totals(granite, system).notes
    assert [note.text for note in notes if note.where == "ph"] == [
        "reading temperature not given: 11 °C, that of the water, is used;"
        " enter the one at which the pH was read"
    ]


def test_turning_the_temperature_warms_the_water_and_keeps_the_reading(system, granite):
    """A temperature dial changes the water's temperature, not the totals."""
    intake = analysis_totals(granite, system, overrides={"temperature": [5.0, 11.0, 20.0]})
    np.testing.assert_allclose(intake.totals, np.repeat(intake.totals[:, 1:2], 3, axis=1))
    np.testing.assert_array_equal(intake.temperature, [5.0, 11.0, 20.0])


@pytest.mark.parametrize(
    "pair",
    [("ph", "dic"), ("alkalinity", "dic"), ("ph", "co2"), ("alkalinity", "co2"), ("dic", "co2")],
)
def test_any_two_of_ph_alkalinity_dic_and_co2_give_the_same_water(system, granite, pair):
    """Two of the four fix the carbonate system; which two does not matter."""
    expected = analysis_totals(granite, system)
    solution = system.solve(expected.totals, 11.0)
    amounts = {
        "ph": Measured(7.25, read_at=11.0),
        "alkalinity": granite["alkalinity"],
        "dic": Measured(float(expected.totals[system.index["dic"]]), unit="mol/L"),
        "co2": Measured(float(solution.concentration("CO2(aq)")), unit="mol/L"),
    }
    other = {key: entry for key, entry in granite.items() if key not in amounts}
    found = analysis_totals(other | {key: amounts[key] for key in pair}, system)
    np.testing.assert_allclose(found.totals, expected.totals, rtol=1e-7)


def test_a_third_carbonate_entry_that_agrees_is_accepted_without_a_word(system, granite):
    """Redundant entries are checked, not used."""
    dic = float(analysis_totals(granite, system).totals[system.index["dic"]]) * 12_011
    notes = analysis_totals(granite | {"dic": Measured(dic * 1.03, unit="mg/L as C")}, system).notes
    assert not [note for note in notes if note.where == "dic"]


@pytest.mark.parametrize(
    ("key", "entry"), [("dic", Measured(40, unit="mg/L")), ("co2", Measured(5, unit="mg/L"))]
)
def test_a_third_carbonate_entry_that_contradicts_is_named(system, granite, key, entry):
    """The caution says what the other two give."""
    (note,) = [n for n in analysis_totals(granite | {key: entry}, system).notes if n.where == key]
    assert note.level == "caution"
    assert note.text.startswith("ph and alkalinity give ")


def test_a_non_detect_counts_as_half_its_limit(system, granite):
    """'<0.02' is neither missing nor zero."""
    intake = analysis_totals(granite | {"iron": Measured(below=0.02, unit="mg/L")}, system)
    assert intake.totals[system.index["iron"]] == pytest.approx(0.01 / 55_845)
    assert "below 0.02 mg/L: half the limit is used" in [note.text for note in intake.notes]


def test_magnesium_may_come_from_the_total_hardness(system, granite):
    """Magnesium = total hardness − calcium, and the note says so."""
    magnesium = granite.pop("magnesium")
    hardness = 1000 * (116 / 40_078 + magnesium.value / 24_305)
    intake = analysis_totals(granite | {"total_hardness": Measured(hardness, unit="mmol/L")}, system)
    assert intake.totals[system.index["magnesium"]] == pytest.approx(magnesium.value / 24_305)
    assert ("magnesium", "total hardness less calcium") in [(n.where, n.text) for n in intake.notes]


def test_calcium_may_come_from_the_total_hardness_too(system, granite):
    """Either of the two completes the hardness."""
    del granite["calcium"]
    intake = analysis_totals(granite | {"total_hardness": Measured(3.5, unit="mmol/L")}, system)
    assert intake.totals[system.index["calcium"]] == pytest.approx(3.5e-3 - 12.5 / 24_305)


def test_a_hardness_below_its_calcium_is_refused(system, granite):
    """The sentence names the entry to look at."""
    del granite["magnesium"]
    with pytest.raises(AnalysisError, match=r"^total_hardness: is less than the calcium alone"):
        analysis_totals(granite | {"total_hardness": Measured(200, unit="mg/L as CaCO3")}, system)


def test_a_hardness_that_calcium_and_magnesium_do_not_add_up_to_is_a_caution(system, granite):
    """Three entries for two unknowns are compared."""
    notes = analysis_totals(granite | {"total_hardness": Measured(17, unit="°dH")}, system).notes
    assert ("total_hardness", "calcium and magnesium add up to 19.1 °dH, not to this value") in [
        (note.where, note.text) for note in notes
    ]


def test_toc_is_the_organic_carbon(system, granite):
    """TOC is carried as mol C."""
    intake = analysis_totals(granite | {"toc": Measured(6.0, unit="mg/L")}, system)
    assert intake.totals[system.index["organic_carbon"]] == pytest.approx(6.0 / 12_011)


def test_an_acid_of_the_user_is_entered_by_its_id(granite):
    """Its mg/L are those of the protonated acid."""
    system = System(acids=(WeakAcid("benzoic", "Benzoic acid", 122.12, (4.20,)),))
    intake = analysis_totals(granite | {"benzoic": Measured(12.212, unit="mg/L")}, system)
    assert intake.totals[system.index["benzoic"]] == pytest.approx(1e-4)


@pytest.mark.parametrize("ion", ["sodium", "chloride"])
def test_a_balance_is_closed_with_one_ion_only_when_asked_and_logged(system, granite, ion):
    """The charge is zero afterwards, the pH as entered, and the change is written down."""
    intake = analysis_totals(granite, system, close_with=ion)
    solution = system.solve(intake.totals, intake.temperature)
    assert abs(solution.charge) < 1e-12
    assert solution.ph == pytest.approx(7.25, abs=1e-8)
    assert any(note.where == ion and "to close the charge balance" in note.text for note in intake.notes)
    untouched = analysis_totals(granite, system)
    changed = {
        key for key in system.keys if intake.totals[system.index[key]] != untouched.totals[system.index[key]]
    }
    assert changed <= {ion, "dic"}


def test_a_closed_balance_stays_closed_when_dic_was_entered(system, granite):
    """The alkalinity that follows from pH and DIC shifts a little with the closing ion; that is followed."""
    del granite["alkalinity"]
    intake = analysis_totals(granite | {"dic": Measured(70, unit="mg/L")}, system, close_with="sodium")
    assert abs(system.solve(intake.totals, intake.temperature).charge) < 1e-12


def test_an_open_balance_does_not_reach_the_ph(system, granite):
    """Doubling the chloride upsets the balance and leaves the pH at the reading."""
    granite["chloride"] = replace(granite["chloride"], value=76.0)
    intake = analysis_totals(granite, system)
    assert system.solve(intake.totals, intake.temperature).ph == pytest.approx(7.25, abs=1e-8)


def test_a_closing_ion_cannot_fall_below_zero(system, sheet):
    """Too much sodium to take away: the sentence offers the other ion."""
    entries = sheet(temperature=10, ph=7.5, alkalinity=50, calcium=60, sodium=1)
    with pytest.raises(
        AnalysisError, match=r"^close_with: sodium would have to fall below zero .* none, chloride$"
    ):
        analysis_totals(entries, system, close_with="sodium")


def test_dials_of_any_shape_give_totals_of_that_shape(system, granite):
    """Overrides broadcast together; each point is the water that a scalar run gives."""
    ph, calcium = np.array([7.0, 7.25, 7.5])[:, None], np.array([100.0, 116.0])
    intake = analysis_totals(granite, system, overrides={"ph": ph, "calcium": calcium})
    assert intake.totals.shape == (len(system.keys), 3, 2)
    assert intake.possible.all()
    one = analysis_totals(granite, system, overrides={"ph": 7.5, "calcium": 100.0})
    np.testing.assert_allclose(intake.totals[:, 2, 0], one.totals, rtol=1e-11)


def test_a_dial_of_something_that_was_not_measured_is_refused(system, granite):
    """Only an entry can be turned."""
    with pytest.raises(AnalysisError, match="boron: is not in this analysis"):
        analysis_totals(granite, system, overrides={"boron": 1.0})


def test_more_hydroxide_than_alkalinity_is_impossible_and_names_the_entry(system, sheet):
    """pH 11 needs 50 mg/L of alkalinity as hydroxide alone; 20 cannot be."""
    intake = analysis_totals(sheet(temperature=25, ph=11, alkalinity=20), system)
    (note,) = [note for note in intake.notes if note.level == "error"]
    assert not intake.possible
    assert note.where == "alkalinity"
    assert "exceed the alkalinity" in note.text


def test_only_the_impossible_points_of_a_range_are_marked(system, sheet):
    """A tolerance that reaches into the impossible loses those points only."""
    intake = analysis_totals(
        sheet(temperature=25, ph=10.5, alkalinity=20), system, overrides={"ph": [9.0, 10.0, 11.0]}
    )
    np.testing.assert_array_equal(intake.possible, [True, True, False])
    assert any("(1 of 3 points)" in note.text for note in intake.notes)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"ph": Measured(15.0)}, "ph: 15 is not a pH; allowed 0 to 14"),
        ({"ph": Measured(7.0, read_at=90.0)}, "ph: read at 90 °C is out of range; allowed 0 to 60 °C"),
        ({"calcium": Measured(-1.0, unit="mg/L")}, "calcium: -1 mg/L is negative; allowed 0 or more"),
        (
            {"temperature": Measured(70.0, unit="°C")},
            "temperature: 70 °C is out of range; allowed 0 to 60 °C",
        ),
        ({"sodium": Measured(float("nan"), unit="mg/L")}, "sodium: is not a finite number"),
        ({"sodium": Measured(1.0, unit="ppm")}, "sodium: 'ppm' is not a unit for sodium; allowed: mg/L, "),
        (
            {"strontium": Measured(1.0, unit="mg/L")},
            "strontium: there is no such entry in an analysis; allowed: ",
        ),
        ({"temperature": None}, "temperature: the temperature of the water is missing"),
        (
            {"alkalinity": None},
            "alkalinity: two of ph, alkalinity, dic and co2 fix the carbonate system; only ph",
        ),
        (
            {"ph": None, "alkalinity": None},
            "ph: two of ph, alkalinity, dic and co2 fix the carbonate system; none",
        ),
        (
            {"calcium": None, "magnesium": None, "total_hardness": Measured(10, unit="°dH")},
            "total_hardness: does not say how calcium and magnesium share it; enter one",
        ),
    ],
    ids=lambda value: value if isinstance(value, str) else None,
)
def test_an_analysis_that_cannot_be_used_is_refused_in_one_sentence(system, granite, change, message):
    """The sentence names the entry, what is wrong and what is allowed."""
    entries = {key: entry for key, entry in (granite | change).items() if entry is not None}
    with pytest.raises(AnalysisError) as refused:
        analysis_totals(entries, system)
    assert str(refused.value).startswith(message)
    assert refused.value.key == message.partition(":")[0]


def test_only_the_points_out_of_range_are_marked_and_named(system, granite):
    """Calcium above the hardness leaves no magnesium: those points are lost, with the entry named."""
    del granite["magnesium"]
    granite["total_hardness"] = Measured(19.0, unit="°dH")
    intake = analysis_totals(granite, system, overrides={"calcium": [100.0, 116.0, 150.0]})
    np.testing.assert_array_equal(intake.possible, [True, True, False])
    assert [(n.where, n.text) for n in intake.notes if n.level == "error"] == [
        ("magnesium", "is out of range; allowed 0 or more (1 of 3 points)")
    ]


def test_acid_water_may_have_less_than_no_alkalinity(system, sheet):
    """pH 4 with −4.9 mg/L of alkalinity is a water."""
    intake = analysis_totals(sheet(temperature=15, ph=4.0, alkalinity=-4.9, chloride=20), system)
    assert intake.possible


def test_an_unknown_way_to_close_the_balance_is_refused(system, granite):
    """Only sodium or chloride may be adjusted."""
    with pytest.raises(
        AnalysisError, match="close_with: 'calcium' cannot close a balance; allowed: none, sodium"
    ):
        analysis_totals(granite, system, close_with="calcium")


@pytest.mark.parametrize("both", [{}, {"value": 1.0, "below": 2.0}])
def test_an_entry_is_a_value_or_a_limit(both):
    """Neither or both is a mistake."""
    with pytest.raises(ValueError, match="either a value or the limit"):
        Measured(**both)
