"""Measured points: read from what people paste, kept in the file, compared with the model."""

import numpy as np
import pytest

from explorer.scenario.editing import remove_step, remove_water
from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import dumps, read_scenario
from explorer.studies.measured import all_compared, compared, read_points

SHARE = "waters.well.share"


# ---- pasted text -------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "text",
    [
        "10\t8.1\n20\t7.65",
        "10,8.1\n20,7.65",
        "10;8.1\n20;7.65",
        "10;8,1\n20;7,65",
        "10\t8,1\n20\t7,65",
        "10 8.1\n20 7.65",
        "10 8,1\n20  7,65\n",
        "\ufeff10, 8.1\r\n20, 7.65\r\n",
        "share,pH\n10,8.1\n20,7.65",
        "share [%]\tpH [-]\n\n10\t8.1\n\n20\t7.65\n",
        '"10","8.1"\n"20","7.65"',
        "10;8.1;;\n20;7.65;;",
    ],
    ids=[
        "tabs", "commas", "semicolons", "semicolons and decimal comma", "tabs and decimal comma", "blanks",
        "blanks and decimal comma", "byte order mark and CRLF", "heading", "heading, units, empty lines",
        "quotes", "empty cells of a spreadsheet",
    ],
)  # fmt: skip
def test_two_columns_are_read_however_they_are_parted(text):
    """Tab, comma, semicolon or blanks; the comma as decimal sign where it parts nothing."""
    assert read_points(text, "ph") == {"ph": [[10, 8.1], [20, 7.65]]}


def test_signs_and_powers_are_numbers():
    """The true minus sign of a report, and exponents."""
    assert read_points("−5; −1,5e-1\n+2; 3", "ccpp") == {"ccpp": [[-5, -0.15], [2, 3]]}


def test_a_heading_names_the_readout():
    """Key, label or short name, whatever the case, without its unit; it counts before the usual one."""
    for name in ("alkalinity", "Alkalinity [mg/L as CaCO3]", "ALK"):
        assert read_points(f"dose;{name}\n1;2", "ph") == {"alkalinity": [[1, 2]]}


def test_a_heading_that_names_no_readout_is_passed_over():
    """The usual readout holds."""
    assert read_points("x;reading\n1;2", "ph") == {"ph": [[1, 2]]}


def test_three_columns_name_the_readout_in_the_middle():
    """Points of several readouts in one go."""
    assert read_points("10;pH;8,1\n10;ccpp;-3\n20;pH;7,6") == {
        "ph": [[10, 8.1], [20, 7.6]],
        "ccpp": [[10, -3]],
    }


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        ("", "points: there are no points"),
        (" \n\t\n", "points: there are no points"),
        ("dose;pH", "line 1: there are no points below the heading"),
        ("10;8.1\n20;lots", 'line 2: "lots" is not a number; allowed figures such as 8.25 or 8,25'),
        ("10;8.1\n20", "line 2: 1 column found; allowed two columns"),
        ("1,5,8,1", "line 1: 4 columns found; allowed two columns"),
        ("10;soap;3", r'line 1: "soap" is not a readout'),
        ("10;8.1\n;7", "line 2: a number is missing"),
        ("10;nan", 'line 1: "nan" is not a number'),
        ("10;1e400", 'line 1: "1e400" is not a number'),
        ("10;1e13", 'line 1: "1e13" is not a number'),
        ("10;<0.1", 'line 1: "<0.1" is not a number'),
        ("10;1.234,5", 'line 1: "1.234,5" is not a number'),
        ("10;1_0", 'line 1: "1_0" is not a number'),
        ("\n\n10;8\n11;x", 'line 4: "x" is not a number'),
        ("1;2\n" * 2001, "line 2001: there are too many points; allowed 2000"),
    ],
)
def test_what_cannot_be_read_is_one_sentence_with_the_line(text, sentence):
    """The line as the user counts it, what is wrong, what is allowed."""
    with pytest.raises(ScenarioError) as caught:
        read_points(text, "ph")
    assert str(caught.value).startswith(sentence)
    assert "\n" not in str(caught.value)


def test_a_readout_has_to_be_named_somewhere():
    """Neither heading, nor column, nor usual readout."""
    with pytest.raises(ScenarioError, match="line 1: the readout is not named"):
        read_points("1;2")


# ---- in the scenario file ----------------------------------------------------------------------------------


def bench(**changed):
    points = {"name": "Bench", "dial": SHARE, "readout": "ph", "points": [[0, 8.6], [40, 7.5], [100, 7.25]]}
    return {key: value for key, value in {**points, **changed}.items() if value is not None}


TITRATION = {"chemical": "hydrochloric_acid", "unit": "meq/L"}


def test_points_come_back_from_a_file_as_they_were_written(plant):
    """Order, integers and explicit parts included."""
    sets = [bench(note="May 2026"), bench(name="Acid", dial=None, titration=TITRATION, stage="well")]
    raw = plant.dict({"river": 60, "well": 40}, measured=sets)
    scenario = plant.read(raw)
    assert scenario.to_dict() == raw
    assert read_scenario(dumps(scenario)).to_dict() == raw
    assert scenario.copy().to_dict() == raw


@pytest.mark.parametrize(
    ("changed", "sentence"),
    [
        ({"dial": "waters.sea.share"}, r'measured\[0\].dial: "waters.sea.share" is not a dial'),
        ({"dial": None}, r"measured\[0\].dial: missing; allowed one of dial, titration"),
        ({"titration": TITRATION}, r"measured\[0\].dial: stands beside titration"),
        ({"readout": "taste"}, r'measured\[0\].readout: "taste" is not a readout'),
        ({"stage": "loft"}, r'measured\[0\].stage: "loft" is not a stage'),
        ({"points": []}, r"measured\[0\].points: the list has 0 parts; allowed a list of 1 to 2000 pairs"),
        ({"points": [[1, 2, 3]]}, r"measured\[0\].points\[0\]: the list has 3 parts; allowed two numbers"),
        ({"points": [[1, 2], [3, "x"]]}, r'measured\[0\].points\[1\]\[1\]: "x" is not a number'),
        ({"points": 3}, r"measured\[0\].points: 3 is not a list"),
        ({"colour": 1}, r"measured\[0\].colour: not known here"),
        ({"name": None}, r"measured\[0\].name: missing"),
        (
            {"dial": None, "titration": {**TITRATION, "chemical": "soap"}},
            r'measured\[0\].titration.chemical: "soap" is not a chemical',
        ),
        (
            {"dial": None, "titration": {**TITRATION, "unit": "cups"}},
            r'measured\[0\].titration.unit: "cups" is not a unit of hydrochloric acid',
        ),
        (
            {"dial": None, "titration": TITRATION, "points": [[-1, 9]]},
            r"measured\[0\].titration.opposite: missing; allowed the chemical that negative doses stand for",
        ),
    ],
)
def test_a_faulty_set_is_refused_with_its_path(plant, changed, sentence):
    """One sentence: path, fault, what is allowed."""
    with pytest.raises(ScenarioError, match=f"^{sentence}"):
        plant({"river": 60, "well": 40}, measured=[bench(**changed)])


def test_two_sets_of_one_name_are_refused(plant):
    """A name tells them apart on a plot."""
    with pytest.raises(ScenarioError, match=r'measured\[1\].name: "Bench" is there twice'):
        plant({"river": 60, "well": 40}, measured=[bench(), bench()])


def test_points_go_with_what_they_are_about(plant):
    """Removing the dial's water or the step's stage removes the set; others stay."""
    dose = plant.dosed("caustic", "sodium_hydroxide", 5, "mg/L")
    sets = [
        bench(),
        bench(name="Dosed", dial="train.caustic.dose", stage="caustic"),
        bench(name="River", dial="waters.river.analysis.ph", stage="blend"),
    ]
    scenario = plant({"river": 60, "well": 40}, [dose], measured=sets)
    remove_step(scenario, "caustic")
    assert [part.name for part in scenario.measured] == ["Bench", "River"]
    remove_water(scenario, "well")
    assert [part.name for part in scenario.measured] == ["River"]


# ---- against the model -------------------------------------------------------------------------------------


def test_points_of_the_model_itself_have_no_bias(plant):
    """Measured where the model is: differences of rounding only."""
    scenario = plant({"river": 60, "well": 40})
    x = np.array([0.0, 25.0, 100.0])
    y = evaluate(scenario, {SHARE: x}).readout("ph")
    scenario = plant({"river": 60, "well": 40}, measured=[bench(points=np.column_stack([x, y]).tolist())])
    found = compared(scenario, scenario.measured[0])
    assert found.bias == pytest.approx(0, abs=1e-9)
    assert found.scatter == pytest.approx(0, abs=1e-9)
    assert found.brief() == "3 measured, model level, scatter 0.00"
    assert "the model is level with 3 measured points on average" in found.sentence()


def test_bias_scatter_and_the_worst_point(plant):
    """Model 0.3, 0.1 and 0.2 high: bias 0.2, standard deviation 0.1, worst the first; hand arithmetic."""
    scenario = plant({"river": 60, "well": 40})
    x = np.array([0.0, 25.0, 100.0])
    y = evaluate(scenario, {SHARE: x}).readout("ph") - [0.3, 0.1, 0.2]
    scenario = plant({"river": 60, "well": 40}, measured=[bench(points=np.column_stack([x, y]).tolist())])
    found = compared(scenario, scenario.measured[0])
    assert found.count == 3
    assert found.bias == pytest.approx(0.2, abs=1e-9)
    assert found.scatter == pytest.approx(0.1, abs=1e-9)
    assert found.worst == 0
    assert found.sentence() == (
        "Bench: the model is 0.20 above 3 measured points on average, scatter 0.10;"
        " the largest difference is 0.30 at 0 %"
    )
    assert found.brief() == "3 measured, model 0.20 above, scatter 0.10"


def test_points_at_a_stage_are_compared_there(plant):
    """The blend before the caustic, not the finished water."""
    dose = plant.dosed("caustic", "sodium_hydroxide", 12, "mg/L")
    scenario = plant({"river": 60, "well": 40}, [dose], measured=[bench(stage="blend")])
    before = compared(scenario, scenario.measured[0]).model
    assert before == pytest.approx(
        evaluate(plant({"river": 60, "well": 40}), {SHARE: [0, 40, 100]}).readout("ph")
    )


def test_a_measured_titration_lies_on_the_curve_of_its_stage(plant):
    """Acid equal to the alkalinity, negative doses of the opposite chemical."""
    axis = {"chemical": "hydrochloric_acid", "opposite": "sodium_hydroxide", "unit": "meq/L"}
    points = bench(dial=None, titration=axis, stage="well", points=[[0, 7.25], [5.44, 4.5], [-1, 9]])
    scenario = plant({"river": 60, "well": 40}, measured=[points])
    found = compared(scenario, scenario.measured[0])
    assert found.model[0] == pytest.approx(7.25, abs=1e-6)
    assert 4.0 < found.model[1] < 4.8
    assert found.model[2] > 8
    assert (found.x_label, found.x_unit) == ("Dose of hydrochloric acid", "meq/L")


def test_a_point_without_an_answer_does_not_count(plant):
    """Alum beyond the alkalinity: the model is silent there, and the sentence says so."""
    dose = plant.dosed("alum", "aluminium_sulfate", 5, "mg/L")
    points = bench(dial="train.alum.dose", points=[[5, 6.3], [40, 4.2]])
    scenario = plant({"moor": 100}, [dose], measured=[points])
    found = compared(scenario, scenario.measured[0])
    assert found.count == 1
    assert np.isnan(found.scatter)
    assert found.sentence().endswith("; 1 without an answer of the model")
    assert found.to_dict()["model"][1] is None
    assert found.to_dict()["scatter"] is None


def test_a_set_without_any_answer_says_so(plant):
    """No bias out of nothing."""
    dose = plant.dosed("alum", "aluminium_sulfate", 5, "mg/L")
    scenario = plant({"moor": 100}, [dose], measured=[bench(dial="train.alum.dose", points=[[40, 4.2]])])
    found = compared(scenario, scenario.measured[0])
    assert found.worst is None
    assert found.sentence() == "Bench: the model has no answer at any measured point"


def test_a_set_that_waits_for_its_water_is_left_out(plant):
    """With the well off, its share cannot be turned; the set stays in the file."""
    raw = plant.dict(
        {"river": 60, "well": 40}, measured=[bench(), bench(name="River", dial="waters.river.analysis.ph")]
    )
    raw["waters"][1]["on"] = False
    assert [found.name for found in all_compared(plant.read(raw))] == ["River"]
