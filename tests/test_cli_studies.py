"""Commands of the studies: the same figures as the studies give, as text, JSON or CSV."""

import csv
import io
import json

import pytest

from explorer.cli import main
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped
from explorer.studies.quantities import quantities

MOSS, AMBER = (str(shipped()[name]) for name in ("moss", "amber"))


@pytest.fixture
def run(capsys):
    """Runs a command on a file with further arguments in one text; returns status, stdout, stderr."""

    def command(name, file, more=""):
        status = main([name, file, *more.split()])
        return status, *capsys.readouterr()

    return command


def answered(answer):
    status, out, err = answer
    assert (status, err) == (0, "")
    return out


def refused(answer):
    status, out, err = answer
    assert (status, out, err.count("\n")) == (2, "", 1)
    return err.strip()


def test_the_ledger_is_printed_with_its_checks(run):
    """Lines in flow order, total and finished water, that it closes, three hand checks."""
    out = answered(run("ledger", MOSS))
    lines = out.splitlines()
    assert any("Aluminium sulfate (alum), 32 mg/L" in line for line in lines)
    assert any("aluminium hydroxide forms" in line for line in lines)
    assert "  The ledger closes." in lines
    assert len(lines[lines.index("Hand checks") + 1 :]) == 3


def test_the_ledger_as_json_ends_in_the_finished_water(run):
    """Figures of the evaluation, dials turned first."""
    data = json.loads(answered(run("ledger", MOSS, "--set train.alum.dose=20 --json")))
    outcome = evaluate(open_scenario(MOSS), {"train.alum.dose": 20.0})
    assert data["finished"]["alkalinity"] == pytest.approx(float(outcome.readout("alkalinity")))
    assert data["closed"] is True
    assert len(data["hand_checks"]) == 3


def test_the_ledger_shows_the_columns_asked_for(run):
    """And refuses one it does not have."""
    out = answered(run("ledger", MOSS, "--columns phosphate,fluoride"))
    assert "Phosphate" in out
    assert "Calcium" not in out
    assert refused(run("ledger", MOSS, "--columns gold")).startswith('columns: "gold" is not a column')


def test_a_titration_is_a_table_of_doses(run):
    """As many rows as points, from the first dose to the last."""
    asked = "--stage well --chemical hydrochloric_acid --to 100"
    out = answered(run("titrate", AMBER, f"{asked} --points 3"))
    assert out.splitlines()[0] == "Granite Wellfield, 11 °C, with hydrochloric_acid"
    assert out.splitlines()[4].split()[:2] == ["0", "7.25"]
    rows = list(csv.reader(io.StringIO(answered(run("titrate", AMBER, f"{asked} --csv")))))
    assert rows[0][:2] == ["Dose [mg/L]", "pH"]
    assert len(rows) == 22


def test_acid_and_base_in_one_titration(run):
    """Negative doses of the opposite chemical, in meq/L."""
    asked = "--chemical sodium_hydroxide --opposite sulfuric_acid --unit meq/L --from -1 --to 1 --points 3"
    data = json.loads(answered(run("titrate", AMBER, f"{asked} --season summer --json")))
    assert data["x"] == [-1, 0, 1]
    assert data["ph"][0] < data["own_ph"] < data["ph"][2]


def test_what_differs_is_compared(run):
    """Cases with their season, inputs, results with their status."""
    out = answered(run("compare", AMBER, "--readouts ph,ccpp"))
    assert "Granite Wellfield off (winter)" in out
    assert "7.26 (below)" in out
    data = json.loads(answered(run("compare", AMBER, "--json")))
    assert [case["kind"] for case in data["cases"]] == ["current", "season", "source off", "source off"]
    assert answered(run("compare", AMBER, "--csv")).startswith("Section,What,Unit,As it stands,summer")


def test_a_comparison_needs_something_to_compare(run, tmp_path, plant):
    """One water, one season, no option."""
    path = tmp_path / "plant.json"
    path.write_text(json.dumps(plant.dict({"well": 100})), encoding="utf-8")
    assert refused(run("compare", str(path))).startswith("there is nothing to compare; allowed with")


def test_quantities_are_those_of_the_study(run):
    """Flow range in the scenario's own unit, tanks by step."""
    asked = "--tank hypo=5 --low-flow 6 --high-flow 14"
    data = json.loads(answered(run("quantities", MOSS, f"{asked} --json")))
    made = quantities(open_scenario(MOSS), tanks={"hypo": 5}, low_flow=250, high_flow=14 / 0.024)
    assert data == json.loads(json.dumps(made.to_dict()))
    assert "Aluminium hydroxide" in answered(run("quantities", MOSS, asked))


def test_costs_are_shown_where_there_are_prices(run, tmp_path):
    """Amber has a price for its hypochlorite, in its own currency; without one there is nothing of cost."""
    assert "credits per day" in answered(run("quantities", AMBER))
    raw = open_scenario(AMBER).to_dict()
    for step in raw["train"]:
        step.pop("price", None)
    path = tmp_path / "unpriced.json"
    path.write_text(json.dumps(raw), encoding="utf-8")
    assert " per ML" not in answered(run("quantities", str(path)))


@pytest.mark.parametrize(
    ("command", "file", "more", "sentence"),
    [
        ("titrate", MOSS, "--chemical soap --to 3", 'chemical: "soap" is not a chemical'),
        ("titrate", MOSS, "--chemical ammonia --to much", "argument --to: 'much' is not a finite number"),
        ("titrate", MOSS, "--to 3", "the following arguments are required: --chemical"),
        ("titrate", MOSS, "--chemical ammonia --from -2 --to 3", "start: -2 is negative"),
        ("quantities", MOSS, "--tank loft=3", 'tanks: "loft" is not a dose step in service'),
        ("quantities", MOSS, "--tank hypo", "argument --tank: 'hypo' is not of the form STEP=M3"),
        ("quantities", MOSS, "--low-flow 60", "flow: 2500 to 541.7 m³/h does not hold the flow"),
        ("compare", MOSS, "--readouts taste", 'readouts: "taste" is not a readout'),
        ("ledger", "nowhere.json", "", "nowhere.json: cannot be opened: there is no such file"),
        ("ledger", MOSS, "--season spring", 'season: "spring" is not one of the seasons'),
    ],
)
def test_what_is_wrong_is_one_sentence(run, command, file, more, sentence):
    """Status 2, on stderr, no traceback."""
    assert refused(run(command, file, more)).startswith(sentence)


def test_a_range_of_flows_needs_a_flow(run, tmp_path, plant):
    """Without one there is no unit to read it in."""
    path = tmp_path / "plant.json"
    path.write_text(json.dumps(plant.dict({"well": 100}, flow=None)), encoding="utf-8")
    assert refused(run("quantities", str(path), "--low-flow 3")).startswith("the scenario has no flow")
