"""The analysis on an opened water card: correcting entries, units, non-detects, findings."""

import pytest

from explorer.app.other_units import in_unit
from explorer.app.rail import Rail
from explorer.app.state import Session
from explorer.scenario.files import open_scenario
from explorer.scenario.model import Analysis, Measured, Scenario, Tolerance
from explorer.scenario.shipped import shipped
from explorer.treatment.units import to_base

SHEET = "waters.well.analysis"


@pytest.fixture
def rail() -> Rail:
    """Amber with the card of the wellfield open, in winter."""
    session = Session(open_scenario(shipped()["amber"]))
    rail = Rail(session)
    session.calculate()
    rail.report("waters.well:open")
    return rail


def analysis(rail: Rail) -> Analysis:
    return rail.desk.scenario.water("well").analyses["winter"]


def entry(rail: Rail, key: str) -> Measured:
    return analysis(rail).entries[key]


def shown(rail: Rail, key: str) -> str:
    return rail.shown(f"{SHEET}.{key}").properties["value"]


def refusal(rail: Rail, key: str) -> str:
    return rail.desk.entries.refusal(f"{SHEET}.{key}")


def test_sheet_lists_what_was_entered(rail: Rail) -> None:
    """Every entry of the season has its line, in the order of a laboratory sheet, with its unit."""
    lines = [item.key for item in rail.nodes if item.key.startswith(SHEET) and item.key.endswith(":row")]
    assert lines[:4] == [f"{SHEET}.{key}:row" for key in ("temperature", "ph", "alkalinity", "calcium")]
    assert len(lines) == len(analysis(rail).entries)
    assert "winter analysis" in rail.shown("waters.well").words()
    assert rail.shown(f"{SHEET}.alkalinity.unit").properties["value"] == "mg/L as CaCO3"


def test_typed_value_changes_the_water(rail: Rail) -> None:
    """A corrected value reaches the scenario and the results."""
    before = rail.desk.words("calcium", "well")
    rail.report(f"{SHEET}.calcium", "120,5")
    assert entry(rail, "calcium").value == 120.5
    assert rail.desk.words("calcium", "well") != before


@pytest.mark.parametrize(
    ("key", "typed", "said"),
    [
        ("ph", "15", "0 to 14"),
        ("temperature", "-3", "0 to 60"),
        ("calcium", "-1", "at least 0"),
        ("calcium", "many", "is not a number"),
        ("ph", "<7", "limit of detection"),
        ("calcium", "<", "a number is needed"),
    ],
)
def test_bad_value_is_refused_beside_its_field(rail: Rail, key: str, typed: str, said: str) -> None:
    """What no water can have is refused in words; the entry stays as it was."""
    before = entry(rail, key)
    rail.report(f"{SHEET}.{key}", typed)
    assert entry(rail, key) == before
    assert said in refusal(rail, key)
    assert shown(rail, key) == typed


def test_result_below_the_limit_of_detection(rail: Rail) -> None:
    """A leading "<" makes a non-detect; a plain number makes a value of it again."""
    rail.report(f"{SHEET}.nitrate", "< 0,05")
    assert (entry(rail, "nitrate").value, entry(rail, "nitrate").below) == (None, 0.05)
    assert shown(rail, "nitrate") == "<0.05"
    rail.report(f"{SHEET}.nitrate", "0.2")
    assert (entry(rail, "nitrate").value, entry(rail, "nitrate").below) == (0.2, None)


def test_other_unit_keeps_the_water(rail: Rail) -> None:
    """Choosing another unit converts the number; what is in the water stays the same."""
    before = float(to_base(272, "mg/L as CaCO3", "alkalinity"))
    rail.report(f"{SHEET}.alkalinity.unit", "mmol/L")
    changed = entry(rail, "alkalinity")
    assert changed.unit == "mmol/L"
    assert float(to_base(changed.value, "mmol/L", "alkalinity")) == pytest.approx(before, rel=1e-12)
    assert shown(rail, "alkalinity") == f"{changed.value:.7g}"


def test_unit_changed_back_gives_the_entered_number(rail: Rail) -> None:
    """Through any units and back the entered number returns digit for digit."""
    before = entry(rail, "alkalinity")
    for unit in ("°dH", "mg/L as HCO3", "meq/L", "mg/L as CaCO3"):
        rail.report(f"{SHEET}.alkalinity.unit", unit)
    assert entry(rail, "alkalinity") == before


def test_number_typed_in_another_unit_is_the_new_entry(rail: Rail) -> None:
    """Once a number is typed in the new unit, the old one is forgotten."""
    rail.report(f"{SHEET}.alkalinity.unit", "mmol/L")
    rail.report(f"{SHEET}.alkalinity", "5")
    rail.report(f"{SHEET}.alkalinity.unit", "mg/L as CaCO3")
    assert entry(rail, "alkalinity").value == pytest.approx(5 * 50.043, rel=1e-4)


def test_sweep_and_tolerance_change_their_unit_with_the_entry(rail: Rail) -> None:
    """What is stated in the unit of an entry stays true when that unit changes."""
    session = rail.desk.session
    session.set_sweep(dial=f"{SHEET}.calcium", start=40.078, stop=80.156)

    def tolerate(scenario: Scenario) -> None:
        scenario.tolerances = {f"{SHEET}.calcium": Tolerance(plus_minus=4.0078)}

    session.edit("Tolerance", tolerate)
    rail.report(f"{SHEET}.calcium.unit", "mmol/L")
    sweep = rail.desk.scenario.sweep
    assert (sweep.start, sweep.stop) == (pytest.approx(1, rel=1e-4), pytest.approx(2, rel=1e-4))
    assert rail.desk.scenario.tolerances[f"{SHEET}.calcium"].plus_minus == pytest.approx(0.1, rel=1e-4)


def test_value_changed_elsewhere_is_the_new_entry(rail: Rail) -> None:
    """A dial turned outside the sheet counts: changing the unit back does not bring the old number back."""
    rail.report(f"{SHEET}.alkalinity.unit", "mmol/L")
    rail.desk.session.turn(f"{SHEET}.alkalinity", 5.0)
    rail.report(f"{SHEET}.alkalinity.unit", "mg/L as CaCO3")
    assert entry(rail, "alkalinity").value == pytest.approx(250.2, rel=1e-3)


def test_half_width_and_limit_are_converted_too() -> None:
    """A width has no zero point: ±1 °C is ±1.8 °F while 10 °C is 50 °F."""
    warm = in_unit(Measured(10, unit="°C", plus_minus=1), "°F", "temperature")
    assert (warm.value, warm.plus_minus) == (pytest.approx(50), pytest.approx(1.8))
    below = in_unit(Measured(below=1, unit="mg/L as N"), "mg/L", "nitrate")
    assert below.below == pytest.approx(4.427, rel=1e-3)
    assert below.value is None


def test_half_width_note_and_assumed_mark(rail: Rail) -> None:
    """±, note and the assumed mark belong to the entry; an emptied ± is none."""
    rail.report(f"{SHEET}.calcium.plus_minus", "5")
    rail.report(f"{SHEET}.calcium:unfold")
    rail.report(f"{SHEET}.calcium.note", "  two samples ")
    rail.report(f"{SHEET}.calcium.assumed", True)
    changed = entry(rail, "calcium")
    assert (changed.plus_minus, changed.note, changed.assumed) == (5, "two samples", True)
    assert "assumed two samples" in rail.shown(f"{SHEET}.calcium:row").words()
    rail.report(f"{SHEET}.calcium.plus_minus", "")
    assert entry(rail, "calcium").plus_minus is None


def test_reading_temperature_of_the_ph(rail: Rail) -> None:
    """The pH may have been read at another temperature than that of the water."""
    rail.report(f"{SHEET}.ph:unfold")
    rail.report(f"{SHEET}.ph.read_at", "22")
    assert entry(rail, "ph").read_at == 22
    rail.report(f"{SHEET}.ph.read_at", "99")
    assert "0 to 60 °C" in refusal(rail, "ph.read_at")
    assert f"{SHEET}.calcium.read_at" not in rail


def test_adding_and_removing_an_entry(rail: Rail) -> None:
    """The list offers what the sheet does not have; what the water needs cannot be taken out."""
    offered = {item.key.rpartition(":")[2] for item in rail.nodes if item.key.startswith(f"{SHEET}:add:")}
    assert "fluoride" in offered
    assert "calcium" not in offered
    rail.report(f"{SHEET}:add:fluoride")
    assert entry(rail, "fluoride") == Measured(0.0, unit="mg/L")
    rail.report(f"{SHEET}.fluoride:unfold")
    rail.report(f"{SHEET}.fluoride:remove")
    assert "fluoride" not in analysis(rail).entries
    rail.report(f"{SHEET}.ph:unfold")
    rail.report(f"{SHEET}.ph:remove")
    assert "carbonate system" in refusal(rail, "ph")
    assert entry(rail, "ph").value == 7.25


def test_findings_follow_the_entries(rail: Rail) -> None:
    """The ion balance is told as good or poor, and a poor one with its likely cause, while values change."""
    card = rail.shown("waters.well").words()
    assert "−0.9 % good" in card
    rail.report(f"{SHEET}.calcium", "290")
    card = rail.shown("waters.well").words()
    assert "▲ poor" in card
    assert "may be mg/L as CaCO3" in card


def test_entered_conductivity_is_compared(rail: Rail) -> None:
    """Computed and entered conductivity stand side by side."""
    rail.report(f"{SHEET}:add:conductivity")
    rail.report(f"{SHEET}.conductivity", "780")
    assert "780 entered" in rail.shown("waters.well").words()


def test_closing_the_ion_balance_and_provenance(rail: Rail) -> None:
    """The closing ion and where the analysis comes from are kept with it."""
    rail.report(f"{SHEET}.close_with", "sodium")
    rail.report(f"{SHEET}:provenance.lab", "works laboratory")
    assert analysis(rail).close_with == "sodium"
    assert analysis(rail).provenance["lab"] == "works laboratory"


def test_edit_belongs_to_the_season_shown(rail: Rail) -> None:
    """Correcting the winter analysis leaves the summer one alone."""
    summer = rail.desk.scenario.water("well").analyses["summer"].entries
    rail.report(f"{SHEET}.calcium.plus_minus", "5")
    assert rail.desk.scenario.water("well").analyses["summer"].entries == summer
