"""Whether an analysis hangs together, and what is said when it does not."""

from dataclasses import replace

import pytest

from explorer.treatment.analysis import Balance, Measured, balance_percent, dissolved_solids, examine
from explorer.treatment.analysis.examination import MAJOR_IONS


def notes_on(examination, where):
    return [note.text for note in examination.notes if note.where == where]


def test_every_good_water_balances(system, good_water):
    """No water in order is accused."""
    examination = examine(good_water, system)
    assert examination.balance.acceptable
    assert examination.likely_cause == ""
    assert not notes_on(examination, "charge balance")


@pytest.mark.parametrize(
    ("name", "percent"),
    [
        # Worked out by hand from the sheets, without activity or pairs, to 0.1 %.
        ("Fern River, winter", -1.0),
        ("Granite Wellfield", -0.9),
        ("Cobble Wellfield", -0.4),
        ("Quartz Wellfield", 1.0),
        ("Cinder Reclaimed", 0.5),
        ("Ember Brackish Well", -1.1),
        ("Slate Wellfield", -1.2),
        ("Wicker Transfer", 0.6),
    ],
)
def test_the_balance_agrees_with_a_hand_count(system, waters, name, percent):
    """100 (cations − anions) / (cations + anions) in meq/L."""
    assert examine(waters[name], system).balance.percent == pytest.approx(percent, abs=0.1)


def test_the_sums_are_those_of_the_sheet(system, granite):
    """Ca 5.79 + Mg 1.03 + Na 0.91 + K 0.06 against alkalinity 5.44 + Cl 1.07 + SO4 0.96 + NO3 0.47 meq/L."""
    balance = examine(granite, system).balance
    assert balance.cations == pytest.approx(7.79, abs=0.01)
    assert balance.anions == pytest.approx(7.93, abs=0.01)


def test_calcium_entered_as_hardness_is_found_out(system, calcium_as_hardness):
    """35 % too many cations; the balance would close if the 290 were mg/L as CaCO3."""
    examination = examine(calcium_as_hardness, system)
    assert not examination.balance.acceptable
    assert examination.balance.percent == pytest.approx(35, abs=0.5)
    assert examination.likely_cause == ("calcium 290 may be mg/L as CaCO3: that would close the balance")
    assert notes_on(examination, "charge balance")[0].startswith(
        "+35.0 %, cations exceed anions (allowed ±2 %"
    )


def test_a_missing_sulfate_is_found_out_with_the_amount(system, sulfate_missing):
    """6.4 % too few anions in a water of 11 meq/L; the true water held 78 mg/L."""
    examination = examine(sulfate_missing, system)
    assert examination.balance.percent == pytest.approx(6.4, abs=0.1)
    assert examination.missing == ("sulfate",)
    assert examination.likely_cause == ("sulfate may be missing, about 73 mg/L: that would close the balance")


@pytest.mark.parametrize(
    ("name", "key", "factor", "slip"),
    [
        ("Granite Wellfield", "alkalinity", 1.219, "alkalinity 332 may be mg/L as HCO3"),
        ("Cinder Reclaimed", "nitrate", 14.007 / 62.004, "nitrate 8.58 may be mg/L as N"),
        ("Quartz Wellfield", "sulfate", 32.06 / 96.056, "sulfate 34.7 may be mg/L as S"),
    ],
)
def test_other_slips_of_unit_are_found_out(system, waters, name, key, factor, slip):
    """A number in one basis entered under another is among the causes named."""
    entry = waters[name][key]
    entries = waters[name] | {key: replace(entry, value=float(f"{entry.value * factor:.3g}"))}
    assert slip in examine(entries, system).likely_cause


def test_a_measured_conductivity_decides_between_slips(system, waters):
    """Without it two slips would close the balance; the conductivity leaves the one that it fits."""
    entry = waters["Quartz Wellfield"]["sulfate"]
    entries = waters["Quartz Wellfield"] | {"sulfate": replace(entry, value=34.7)}
    assert "; or " in examine(entries, system).likely_cause
    measured = entries | {"conductivity": Measured(982, unit="µS/cm")}
    assert (
        examine(measured, system).likely_cause
        == "sulfate 34.7 may be mg/L as S: that would close the balance"
    )


def test_chloride_left_out_is_not_called_sulfate(system, waters):
    """The missing ion named is one that the sheet does not list."""
    entries = {key: entry for key, entry in waters["Cobble Wellfield"].items() if key != "chloride"}
    assert examine(entries, system).likely_cause == (
        "chloride may be missing, about 206 mg/L: that would close the balance"
    )


def test_a_mess_has_no_single_cause(system, granite):
    """Nothing is guessed where no slip explains the difference."""
    granite["sodium"] = replace(granite["sodium"], value=400.0)
    assert examine(granite, system).likely_cause.startswith("no single slip explains it")


def test_organic_anions_are_counted_in_coloured_water(system, waters):
    """The humic charge at the water's pH beyond that at the end point of the titration is an anion."""
    moss = waters["Moss Reservoir, winter"]
    without = {key: entry for key, entry in moss.items() if key != "toc"}
    assert examine(moss, system).balance.anions > examine(without, system).balance.anions + 0.03


@pytest.mark.parametrize(
    ("cations", "anions", "acceptable"),
    [
        (2.79, 2.6, True),
        (2.81, 2.6, False),
        (5.2, 5.0, True),
        (5.21, 5.0, False),
        (22, 20, True),
        (22.2, 20, False),
    ],
)
def test_the_limit_depends_on_the_sum_of_anions(cations, anions, acceptable):
    """±0.2 meq/L below 3, ±2 % to 10, ±5 % above (Standard Methods 1030E, common practice)."""
    assert Balance(cations, anions).acceptable is acceptable


def test_conductivity_and_solids_that_agree_pass_in_silence(system, waters):
    """1307 µS/cm and 760 mg/L for Cobble Wellfield: within the usual tolerance of the sums."""
    entries = waters["Cobble Wellfield"] | {
        "conductivity": Measured(1307, unit="µS/cm", read_at=25.0),
        "tds": Measured(760, unit="mg/L"),
    }
    examination = examine(entries, system)
    assert examination.conductivity == pytest.approx(1307, rel=0.1)
    assert examination.tds == pytest.approx(717, abs=1)
    assert not notes_on(examination, "conductivity") + notes_on(examination, "tds")


def test_a_conductivity_that_the_ions_do_not_reach_says_so(system, waters):
    """An entry far above the sum of the ions points to something missing."""
    examination = examine(waters["Cobble Wellfield"] | {"conductivity": Measured(170, unit="mS/m")}, system)
    assert examination.conductivity_entered == 1700
    (text,) = notes_on(examination, "conductivity")
    assert text.endswith("µS/cm, 1700 was entered: an ion is missing or too low")


def test_solids_below_the_sum_of_the_ions_say_so(system, waters):
    """An entry far below the sum points to an ion that is too high."""
    examination = examine(waters["Cobble Wellfield"] | {"tds": Measured(500, unit="mg/L")}, system)
    assert notes_on(examination, "tds") == ["the ions give 717 mg/L, 500 was entered: an ion is too high"]


def test_conductivity_refers_to_the_temperature_it_was_read_at(system, granite):
    """At 20 °C the same water conducts about a tenth less than at 25 °C."""
    warm = examine(granite, system)
    cool = examine(granite | {"conductivity": Measured(700, unit="µS/cm", read_at=20.0)}, system)
    assert (warm.conductivity_at, cool.conductivity_at) == (25.0, 20.0)
    assert cool.conductivity == pytest.approx(0.9 * warm.conductivity, rel=0.02)


def test_dissolved_solids_weigh_bicarbonate_as_carbonate(system, sheet):
    """100 mg/L of alkalinity dries to 60 mg/L (Standard Methods 1030E, from memory)."""
    examination = examine(sheet(temperature=25, ph=8.0, alkalinity=100), system)
    assert examination.tds == pytest.approx(60.0, rel=0.01)


def test_what_was_assumed_and_what_is_missing_is_listed(system, sheet):
    """An incomplete sheet is taken, and says what it lacks."""
    entries = sheet(temperature=10, ph=7.5, alkalinity=50, calcium=20)
    entries["sodium"] = Measured(3.0, unit="mg/L", assumed=True)
    examination = examine(entries, system)
    assert examination.assumed == ("sodium",)
    assert examination.missing == tuple(key for key in MAJOR_IONS if key not in ("calcium", "sodium"))
    assert notes_on(examination, "sodium") == ["assumed, not measured"]


def test_hardness_stands_for_calcium_and_magnesium(system, granite):
    """Magnesium from the hardness is not missing."""
    del granite["magnesium"]
    examination = examine(granite | {"total_hardness": Measured(19.1, unit="°dH")}, system)
    assert "magnesium" not in examination.missing


def test_an_impossible_analysis_is_reported_not_balanced(system, sheet):
    """No likely cause is offered where there is no water to examine."""
    examination = examine(sheet(temperature=25, ph=11, alkalinity=20), system)
    assert any(note.level == "error" and note.where == "alkalinity" for note in examination.notes)
    assert examination.likely_cause == ""


def test_sums_work_for_many_waters_at_once(system, stream):
    """Balance and solids take any shape."""
    granite = stream("Granite Wellfield")
    solution = system.solve(granite.totals[:, None], [5.0, 25.0])
    assert balance_percent(solution).shape == dissolved_solids(solution).shape == (2,)
