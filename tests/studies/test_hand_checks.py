"""Hand checks: the arithmetic a sceptic does on paper comes out."""

import re

import pytest

from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped
from explorer.studies.hand_checks import figure, hand_checks

AGREES = 1.0
"""Percent within which figures rounded to three or four digits come out."""


def checks(scenario, most=9, **dials):
    return {check.key: check for check in hand_checks(scenario, evaluate(scenario, dials), most)}


@pytest.mark.parametrize("name", shipped())
def test_three_checks_of_every_shipped_plant_come_out(name):
    """Each agrees with the engine within one percent."""
    scenario = open_scenario(shipped()[name])
    found = hand_checks(scenario, evaluate(scenario))
    assert len(found) == 3
    for check in found:
        assert abs(check.percent) < AGREES, check.text()


@pytest.mark.parametrize("name", shipped())
def test_the_printed_arithmetic_gives_the_printed_result(name):
    """What stands before "=" is evaluated as written, with nothing but the printed figures."""
    scenario = open_scenario(shipped()[name])
    for check in hand_checks(scenario, evaluate(scenario), 9):
        sentence = check.text().split(";")
        words = sentence[1] if check.key == "hocl" else sentence[0]
        formula = words.rsplit(" = ", 1)[0].split(": ")[-1]
        formula = re.sub(r"\(\d[^()]* eq × [^()]*\)", "", formula)
        for sign, code in (("×", "*"), ("−", "-"), ("^", "**")):
            formula = formula.replace(sign, code)
        formula = re.sub(r"(mg/L|m³/h|kg/L)( as \w+| of \w+ left dissolved)?", "", formula)
        assert re.fullmatch(r"[\d.+\-*/() ]+", formula), formula
        assert eval(formula) == pytest.approx(check.hand, rel=1e-9), check.text()


def test_alum_takes_half_its_weight_in_alkalinity(plant):
    """30 mg/L × 0.505 = 15.15 mg/L as CaCO3 (six equivalents over 594 g/mol) less what stays dissolved."""
    scenario = plant({"well": 100}, [plant.dosed("alum", "aluminium_sulfate", 30, "mg/L")])
    check = checks(scenario)["dose_alkalinity"]
    assert "30 mg/L × 0.505 (6 eq × 50.04 / 594.3)" in check.text()
    dissolved = float(evaluate(scenario).readout("dissolved_aluminium"))
    assert f"{figure(dissolved, 3)} mg/L of Al left dissolved × 5.56" in check.text()
    assert check.engine == pytest.approx(15.15 - 5.564 * dissolved, rel=2e-3)


@pytest.mark.parametrize(
    ("chemical", "unit", "factor"),
    [
        ("sodium_hydroxide", "mg/L", 1.25),
        ("calcium_hydroxide", "mg/L", 1.35),
        ("sodium_bicarbonate", "mg/L", 0.596),
        ("sulfuric_acid", "mg/L", 1.02),
        ("hydrochloric_acid", "mg/L", 1.37),
        ("sodium_hypochlorite", "mg/L as Cl2", 0.706),
        ("phosphoric_acid", "mg/L as P", 1.62),
        ("ferric_chloride", "mg/L as Fe", 2.69),
    ],
)
def test_the_factor_of_a_dose_is_the_one_of_the_trade(plant, chemical, unit, factor):
    """mg/L as CaCO3 for each mg/L in the entered basis, to three digits; exact molar masses."""
    check = checks(plant({"well": 100}, [plant.dosed("dose", chemical, 8, unit)]))["dose_alkalinity"]
    assert f"8 {unit} × {figure(factor)} (" in check.text()
    assert abs(check.percent) < AGREES


def test_the_dose_with_the_largest_effect_is_checked(plant):
    """Caustic moves the alkalinity more than the hypochlorite does."""
    train = [
        plant.dosed("hypo", "sodium_hypochlorite", 1, "mg/L as Cl2"),
        plant.dosed("caustic", "sodium_hydroxide", 10, "mg/L"),
    ]
    assert checks(plant({"well": 100}, train))["dose_alkalinity"].sentence.startswith(
        "Sodium hydroxide gives"
    )


def test_chlorine_that_reacts_is_not_checked_as_a_plain_dose(plant):
    """Hypochlorite into ammonia changes alkalinity by its reaction too; no paper factor says that."""
    raw = plant.dict({"well": 100}, [plant.dosed("hypo", "sodium_hypochlorite", 1, "mg/L as Cl2")])
    raw["waters"][0]["analyses"]["winter"]["ammonia"] = {"value": 1, "unit": "mg/L as N"}
    assert "dose_alkalinity" not in checks(plant.read(raw))


def test_the_blend_of_the_most_different_conservative_ion(plant):
    """Nitrate differs fivefold between river and well: 0.6 × 6.2 + 0.4 × 29 = 15.32."""
    check = checks(plant({"river": 60, "well": 40}))["blend"]
    assert check.text().startswith("Nitrate of the blend: 0.6 × 6.2 + 0.4 × 29 = 15.32 mg/L")
    assert check.percent == pytest.approx(0, abs=1e-6)


def test_an_ion_dosed_before_the_blend_is_not_taken_from_the_analysis(plant):
    """Chloride and sodium changed on the way do not fit a sum over analyses; another ion is taken."""
    raw = plant.dict({"river": 60, "transfer": 40})
    for water in raw["waters"]:
        water["analyses"]["winter"] = plant.sheet(water["id"], nitrate=None, potassium=None)
    raw["waters"][0]["train"] = [plant.dosed("salt", "sodium_chloride", 50, "mg/L")]
    assert checks(plant.read(raw))["blend"].sentence.startswith("Sulfate")


def test_an_entry_in_another_unit_is_converted(plant):
    """Nitrate entered as N is printed as NO3, the basis of the readout."""
    raw = plant.dict({"river": 60, "well": 40})
    raw["waters"][1]["analyses"]["winter"]["nitrate"] = {"value": 10, "unit": "mg/L as N"}
    assert "0.4 × 44.27" in checks(plant.read(raw))["blend"].sentence


def test_turned_dials_are_the_current_case(plant):
    """The share and the nitrate of the outcome, not those of the file."""
    dials = {"waters.well.share": 50.0, "waters.well.analysis.nitrate": 20.0}
    assert "0.5 × 6.2 + 0.5 × 20" in checks(plant({"river": 60, "well": 40}), **dials)["blend"].sentence


def test_the_rate_of_the_largest_pump(plant):
    """1.2 mg/L × 1000 m³/h / (0.104 × 1.2 kg/L × 1000) = 9.615 L/h."""
    check = checks(plant({"well": 100}, [plant.dosed("hypo", "sodium_hypochlorite", 1.2, "mg/L as Cl2")]))[
        "pump"
    ]
    assert "1.2 mg/L × 1000 m³/h / (0.104 × 1.2 kg/L × 1000) = 9.615 L/h" in check.text()


def test_without_flow_there_is_no_pump_to_check(plant):
    """The other checks stand."""
    scenario = plant(
        {"well": 100}, [plant.dosed("hypo", "sodium_hypochlorite", 1.2, "mg/L as Cl2")], flow=None
    )
    assert "pump" not in checks(scenario)
    assert len(hand_checks(scenario, evaluate(scenario))) == 3


def test_a_check_says_hand_engine_and_difference(plant):
    """One sentence, with the percent and no minus before a zero."""
    text = checks(plant({"river": 60, "well": 40}))["blend"].text()
    assert text.endswith("; the engine has 15.32 (0.0 %)")
