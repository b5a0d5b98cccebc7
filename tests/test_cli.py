"""The command line as a specification: what is printed, and one sentence for whatever is wrong."""

import json
import subprocess
import sys

import pytest

from explorer.cli import main
from explorer.scenario.readouts import READOUTS

NOTE_LEVELS = {"info", "caution", "error"}


@pytest.fixture
def raw(plant):
    """A plant with two waters, a fixed and a held dose, and a target."""
    train = [
        plant.dosed("hypo", "sodium_hypochlorite", 1.2, "mg/L as Cl2"),
        plant.held("caustic", "sodium_hydroxide", "ph", 8.0, 40, "mg/L"),
    ]
    return plant.dict(
        {"river": 60, "well": 40},
        train,
        title="Amber",
        targets=[{"readout": "ph", "low": 7.4, "high": 8.5}, {"readout": "nitrate", "high": 10}],
        sweep={"dial": "waters.well.share", "start": 0, "stop": 100, "points": 5},
    )


@pytest.fixture
def written(tmp_path):
    """Writes a scenario (or any text) to a file and returns its path."""

    def write(content):
        path = tmp_path / "plant.json"
        path.write_text(content if isinstance(content, str) else json.dumps(content), encoding="utf-8")
        return str(path)

    return write


@pytest.fixture
def run(capsys):
    """Runs a command; returns exit status, stdout, stderr."""

    def command(*arguments):
        status = main(list(arguments))
        out, err = capsys.readouterr()
        return status, out, err

    return command


def refused(answer):
    """The sentence of a refusal, once it is found to be one: status 2, one line, nothing on stdout."""
    status, out, err = answer
    assert status == 2
    assert out == ""
    assert err.count("\n") == 1
    assert "Traceback" not in err
    return err.strip()


# ---- solve -------------------------------------------------------------------------------------------------


def test_solve_prints_json_of_the_agreed_shape(run, written, raw):
    """Title, season, every readout with unit and status, every stage, every dose, every note."""
    status, out, err = run("solve", written(raw), "--json")
    assert (status, err) == (0, "")
    answer = json.loads(out)
    assert list(answer) == ["title", "season", "readouts", "stages", "doses", "notes"]
    assert (answer["title"], answer["season"]) == ("Amber", "winter")
    assert answer["readouts"].keys() == READOUTS.keys()
    ph = answer["readouts"]["ph"]
    assert ph == {
        "value": pytest.approx(8.0, abs=1e-6),
        "unit": "",
        "status": "in range",
        "low": 7.4,
        "high": 8.5,
    }
    assert answer["readouts"]["nitrate"]["status"] == "above"
    assert answer["readouts"]["calcium"]["status"] is None
    assert [stage["id"] for stage in answer["stages"]] == ["river", "well", "blend", "hypo", "caustic"]
    assert all(stage.keys() == {"id", "name", "readouts"} for stage in answer["stages"])
    assert answer["stages"][0]["readouts"]["ph"] == {"value": pytest.approx(8.6, abs=1e-6), "unit": ""}
    assert answer["doses"]["hypo"] == {"value": 1.2, "unit": "mg/L as Cl2", "held": False}
    assert answer["doses"]["caustic"]["held"] is True
    assert all(note.keys() == {"level", "where", "text"} for note in answer["notes"])
    assert {note["level"] for note in answer["notes"]} <= NOTE_LEVELS


def test_a_value_without_a_solution_is_null_with_a_note(run, written, raw):
    """No fluoride, no fluorite index: null, and a note that names it with the reason."""
    _, out, _ = run("solve", written(raw), "--json")
    answer = json.loads(out)
    assert answer["readouts"]["si_fluorite"]["value"] is None
    assert any(
        note["where"] == "caustic"
        and "si_fluorite" in note["text"]
        and "no calcium or fluoride" in note["text"]
        for note in answer["notes"]
    )


def test_solve_prints_a_table_for_people(run, written, raw):
    """Values with units, targets in words, doses with their basis, stages."""
    status, out, _ = run("solve", written(raw))
    assert status == 0
    table, rest = out.split("Doses")
    lines = {line.split("  ")[1]: line for line in table.splitlines() if line.startswith("  ")}
    assert lines["pH"].split()[1:] == ["8.00", "7.4", "to", "8.5", "in", "range"]
    assert lines["Nitrate"].split()[-2:] == ["10", "above"]
    assert rest.splitlines()[1].split() == ["Sodium", "hypochlorite", "1.2", "mg/L", "as", "Cl2"]
    assert "precipitates" in lines["Calcium carbonate precipitation potential"]
    assert "nan" not in out


def test_set_turns_dials_by_the_share_rule(run, written, raw):
    """The other water gives way; several dials can be set."""
    _, out, _ = run(
        "solve", written(raw), "--json", "--set", "waters.well.share=25", "--set", "train.hypo.dose = 0.5"
    )
    answer = json.loads(out)
    assert answer["readouts"]["calcium"]["value"] == pytest.approx(0.75 * 26 + 0.25 * 116)
    assert answer["doses"]["hypo"]["value"] == 0.5


def test_season_chooses_the_analyses(run, written, raw, plant):
    """Another season, another water."""
    raw["seasons"] = ["winter", "summer"]
    for water in raw["waters"]:
        water["analyses"]["summer"] = plant.sheet(water["id"], temperature=19)
    _, out, _ = run("solve", written(raw), "--season", "summer", "--json")
    answer = json.loads(out)
    assert answer["season"] == "summer"
    assert answer["readouts"]["temperature"]["value"] == pytest.approx(19)


# ---- sweep, check, report, serve ---------------------------------------------------------------------------


def test_sweep_prints_json_of_the_agreed_shape(run, written, raw):
    """Dial, unit, x, readouts as lists, notes."""
    status, out, _ = run(
        "sweep", written(raw), "--dial", "waters.well.share", "--start", "0", "--stop", "50", "--points", "3",
        "--readouts", "ph,calcium", "--json",
    )  # fmt: skip
    assert status == 0
    answer = json.loads(out)
    assert list(answer) == ["dial", "unit", "x", "readouts", "notes"]
    assert (answer["dial"], answer["unit"], answer["x"]) == ("waters.well.share", "%", [0, 25, 50])
    assert answer["readouts"]["calcium"] == pytest.approx([26, 48.5, 71])


def test_a_sweep_can_look_at_any_stage(run, written, raw):
    """The blend and the source waters have readouts as the finished water has."""
    asked = ("sweep", written(raw), "--start", "0", "--stop", "100", "--points", "2", "--readouts", "ph")
    found = {}
    for stage in ("river", "well", "blend", "finished"):
        status, out, _ = run(*asked, "--stage", stage, "--json")
        assert status == 0
        found[stage] = json.loads(out)["readouts"]["ph"]
    assert found["blend"] == pytest.approx([found["river"][0], found["well"][1]], abs=1e-9)
    assert found["finished"][0] > found["blend"][0]


def test_sweep_writes_csv(run, written, raw, tmp_path):
    """A heading with units and a row a point; without readouts asked for, those of the targets."""
    target = tmp_path / "out.csv"
    status, out, _ = run("sweep", written(raw), "--csv", str(target))
    assert (status, out) == (0, "")
    heading, *rows = target.read_text(encoding="utf-8").splitlines()
    assert heading == "Share of Well [%],pH,Nitrate [mg/L],Dose of Sodium hydroxide [mg/L],No answer because"
    assert len(rows) == 5


def test_sweep_prints_a_table_for_people(run, written, raw):
    """The same without a file."""
    status, out, _ = run("sweep", written(raw))
    assert status == 0
    assert " ".join(out.splitlines()[0].split()) == "Share of Well pH NO3 Dose of Sodium hydroxide"
    assert len(out.splitlines()) == 2 + 5


def test_check_says_whether_analyses_balance_and_what_is_assumed(run, written, raw):
    """Charge balance of every water, assumed entries and missing ions."""
    raw["waters"][1]["analyses"]["winter"]["potassium"]["assumed"] = True
    del raw["waters"][0]["analyses"]["winter"]["sulfate"]
    status, out, _ = run("check", written(raw))
    assert status == 0
    assert "the file is valid" in out
    assert "charge balance −0.9 %" in out
    assert "not acceptable" in out
    assert "assumed, not measured" in out
    assert "sulfate" in out


def test_report_writes_a_page_that_opens_like_the_scenario(run, written, raw, plant, tmp_path):
    """Silently; the page solves to the same digits, in the season it was made for."""
    raw["seasons"] = ["winter", "summer"]
    for water in raw["waters"]:
        water["analyses"]["summer"] = plant.sheet(water["id"], temperature=19)
    path, page = written(raw), tmp_path / "report.html"
    assert run("report", path, "-o", str(page), "--season", "summer") == (0, "", "")
    assert page.read_text(encoding="utf-8").startswith("<!DOCTYPE html>")
    assert run("solve", str(page), "--json") == run("solve", path, "--season", "summer", "--json")


def test_a_report_does_not_take_the_place_of_its_scenario(run, written, raw):
    """The file stays as it was."""
    path = written(raw)
    assert "is the scenario itself" in refused(run("report", path, "-o", path))
    assert run("check", path)[0] == 0


def test_without_a_command_the_file_is_served(run, written, raw, monkeypatch):
    """A file that cannot be opened is refused before the page is even imported."""
    assert "page" in refused(run("no-such-page.json"))
    assert refused(run("serve", "no-such-page.json")) == refused(run("no-such-page.json"))


def test_solve_needs_no_page(written, raw):
    """Neither Panel nor Bokeh is imported by solve; stdout of a real process is plain JSON."""
    probe = (
        "import sys; from explorer.cli import main; status = main(sys.argv[1:]);"
        "sys.exit(status or bool({'panel', 'bokeh'} & set(sys.modules)))"
    )
    done = subprocess.run(
        [sys.executable, "-c", probe, "solve", written(raw), "--json"],
        capture_output=True,
        text=True,
        check=False,
    )
    assert (done.returncode, done.stderr) == (0, "")
    assert json.loads(done.stdout)["title"] == "Amber"


def test_the_package_runs_as_a_module(written, raw):
    """python -m explorer is the command."""
    done = subprocess.run(
        [sys.executable, "-m", "explorer", "solve", written(raw), "--set", "nothing=1"],
        capture_output=True, text=True, check=False,
    )  # fmt: skip
    assert done.returncode == 2
    assert done.stderr.count("\n") == 1


# ---- what can be wrong with a file -------------------------------------------------------------------------


def changed(raw, *path_and_value):
    """The scenario with one part replaced; the last argument is the value."""
    *path, last, value = path_and_value
    part = raw
    for key in path:
        part = part[key]
    part[last] = value
    return raw


RIVER, WELL = (("waters", position, "analyses", "winter") for position in (0, 1))

BAD_FILES = {
    "wrong format": (("format", "something"), "format: "),
    "wrong version": (("version", 2), "version: 2"),
    "unknown key": (("colour", "blue"), "colour: "),
    "unknown key of a step": (("train", 0, "doze", 1), "train[0].doze: "),
    "unknown kind of step": (("train", 0, "step", "dance"), "train[0].step: "),
    "unknown unit": (("flow", {"value": 1, "unit": "buckets/d"}), "flow.unit: "),
    "unknown unit of a dose": (("train", 0, "dose", "unit", "mg/L as Fe"), "train[0].dose.unit: "),
    "unknown chemical": (("train", 0, "chemical", "sodium_hypo"), "train[0].chemical: "),
    "negative dose": (("train", 0, "dose", "value", -1), "train[0].dose.value: "),
    "negative amount": ((*RIVER, "calcium", "value", -3), "waters[0].analyses.winter.calcium.value: "),
    "text for a number": ((*RIVER, "calcium", "value", "26"), "waters[0].analyses.winter.calcium.value: "),
    "pH of 15": ((*WELL, "ph", "value", 15), "waters[1].analyses.winter.ph.value: 15 is not a pH"),
    "impossible pair": ((*WELL, "ph", "value", 12.5), "waters[1].analyses.winter."),
    "shares not 100": (("waters", 0, "share", 50), "shares add to 90 %"),
    "duplicate id": (("waters", 1, "id", "river"), "waters[1].id: "),
    "missing analysis": (("waters", 1, "analyses", {}), "waters[1].analyses"),
    "unknown readout": (("targets", 0, "readout", "redness"), "targets[0].readout: "),
    "unknown dial": (("sweep", "dial", "waters.wel.share"), "sweep.dial: "),
}


@pytest.mark.parametrize("case", BAD_FILES)
@pytest.mark.parametrize("command", ["solve", "check", "sweep"])
def test_a_faulty_file_is_answered_with_the_path_of_the_field(run, written, raw, case, command):
    """Whatever the command: status 2 and one sentence that starts from the field."""
    change, words = BAD_FILES[case]
    assert words in refused(run(command, written(changed(raw, *change))))


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "not JSON"),
        ("{", "not JSON"),
        ("[1, 2]", "allowed a scenario object"),
        ('{"format": "blendwright-scenario"}', "version: missing"),
        ("\x00\x01", "not JSON"),
    ],
)
def test_what_is_no_scenario_is_refused(run, written, text, words):
    """Empty, torn or foreign files."""
    assert words in refused(run("solve", written(text)))


@pytest.mark.parametrize("number", ["NaN", "Infinity", "1e400"])
def test_numbers_that_are_not_finite_are_refused(run, written, raw, number):
    """JSON readers let them through; a scenario does not."""
    text = json.dumps(changed(raw, "waters", 0, "analyses", "winter", "calcium", "value", "HERE"))
    sentence = refused(run("solve", written(text.replace('"HERE"', number))))
    assert sentence.startswith("waters[0].analyses.winter.calcium.value: ")


def test_missing_files_and_folders_are_refused(run, tmp_path):
    """Named, with what the system says, in words."""
    assert "missing.json" in refused(run("solve", str(tmp_path / "missing.json")))
    assert "not a file" in refused(run("solve", str(tmp_path)))


# ---- what can be wrong with a command ----------------------------------------------------------------------


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["solve"], "FILE"),
        (["solve", "FILE", "--set", "waters.well.share"], "not of the form DIAL=VALUE"),
        (["solve", "FILE", "--set", "waters.well.share=much"], "'much' is not a finite number"),
        (["solve", "FILE", "--set", "waters.well.share=inf"], "'inf' is not a finite number"),
        (["solve", "FILE", "--set", "waters.well.share=150"], "waters.well.share: 150"),
        (["solve", "FILE", "--set", "waters.wel.share=15"], "perhaps waters.well.share"),
        (["solve", "FILE", "--set", "waters.well.analysis.ph=15"], "waters.well.analysis.ph: 15 is not a pH"),
        (["solve", "FILE", "--season", "autumn"], "season: "),
        (["solve", "FILE", "--quickly"], "--quickly"),
        (["sweep", "FILE", "--dial", "train.hypo.dos"], "perhaps train.hypo.dose"),
        (["sweep", "FILE", "--points", "1"], "points: 1 is out of range"),
        (["sweep", "FILE", "--points", "many"], "--points"),
        (["sweep", "FILE", "--start", "5", "--stop", "5"], "no range"),
        (["sweep", "FILE", "--readouts", "ph,redness"], '"redness" is not a readout'),
        (["sweep", "FILE", "--stage", "hypoo"], '"hypoo" is not a stage'),
        (["sweep", "FILE", "--json", "--csv", "x.csv"], "not allowed with"),
        (["sweep", "FILE", "--csv", "no/such/folder/x.csv"], "no such file"),
        (["sweep", "FILE", "--set", "waters.well.share=5", "--dial", "waters.well.share"], "swept and set"),
        (["serve", "FILE", "--port", "99999"], "allowed 0 to 65535"),
        (["report", "FILE"], "-o"),
        (["report", "FILE", "-o", "no/such/folder/x.html"], "cannot be saved: there is no such file"),
        (["report", "FILE", "-o", "x.html", "--season", "autumn"], "season: "),
    ],
)
def test_a_faulty_command_is_answered_in_one_sentence(run, written, raw, arguments, words):
    """Usage errors too: status 2, one line on stderr, nothing else."""
    path = written(raw)
    assert words in refused(run(*(path if argument == "FILE" else argument for argument in arguments)))
