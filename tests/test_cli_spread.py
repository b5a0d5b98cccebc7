"""Commands window, tolerance and allowed: the same figures as the studies give, as text, JSON or CSV."""

import csv
import io
import json

import pytest

from explorer.cli import main
from explorer.scenario.files import open_scenario
from explorer.scenario.readouts import MINUS
from explorer.scenario.shipped import shipped
from explorer.studies.ranking import allowed_tolerance
from explorer.studies.tolerance import tolerance
from explorer.studies.window import window

DUNE, AMBER, MOSS = (str(shipped()[name]) for name in ("dune", "amber", "moss"))
CAUSTIC, WELLS = "waters.permeate.train.caustic.dose", "waters.wells.share"
MAP = f"--x {CAUSTIC} --x-from 5 --x-to 25 --y {WELLS} --y-to 40 --points 9"
WELL = "waters.well.share"


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


# ---- window ------------------------------------------------------------------------------------------------


def test_a_window_says_how_much_of_the_map_meets_all_targets(run):
    """Both dials with their ranges, the part that meets all targets, and each target that is missed first."""
    out = answered(run("window", DUNE, MAP))
    assert out.splitlines()[:2] == [
        "x: Dose of Sodium hydroxide, 5 to 25 mg/L",
        "y: Share of Cobble Wellfield, 0 to 40 %",
    ]
    *_, made = window(open_scenario(DUNE), CAUSTIC, WELLS, (5, 25), (0, 40), points=9)
    line = next(line for line in out.splitlines() if "all targets are met" in line)
    assert line.endswith(f"{100 * made.part_met:.1f} %")
    assert "the first that is missed is: pH up to 8.5" in out


def test_a_window_as_json_and_csv(run):
    """The study's own plain data and table."""
    *_, made = window(open_scenario(DUNE), CAUSTIC, WELLS, (5, 25), (0, 40), ["co2"], 9)
    assert json.loads(answered(run("window", DUNE, f"{MAP} --readouts co2 --json"))) == made.to_dict()
    rows = list(csv.reader(io.StringIO(answered(run("window", DUNE, f"{MAP} --readouts co2 --csv")))))
    assert rows[0] == made.table()[0]
    assert len(rows) == 1 + 81


def test_dials_can_be_set_before_a_window(run):
    """The map is of the plant with them."""
    plain = json.loads(answered(run("window", DUNE, f"{MAP} --json")))
    off = json.loads(
        answered(run("window", DUNE, f"{MAP} --set waters.permeate.train.contactor.fraction=30 --json"))
    )
    assert off["missed"] != plain["missed"]


# ---- tolerance ---------------------------------------------------------------------------------------------


def test_a_tolerance_study_says_what_spreads_and_why(run):
    """Percentiles and extremes of every target's readout, chances, and the inputs ranked."""
    out = answered(run("tolerance", AMBER, "--points 3 --samples 256"))
    lines = out.splitlines()
    assert lines[0] == "Amber: river and wellfield (winter): 256 samples of 18 inputs, seed 20"
    *_, made = tolerance(open_scenario(AMBER), points=3, samples=256)
    chance = float(made.here.chance_of_all()[0])
    assert next(line for line in lines if "all of them" in line).endswith(f"{100 * chance:.1f} %")
    heading = next(place for place, line in enumerate(lines) if line.endswith("alone  less if halved"))
    assert lines[heading + 1].startswith("  pH of Granite Wellfield")
    assert len(lines[heading + 1 :]) == 18


def test_a_tolerance_study_as_json_can_be_repeated(run):
    """Fan, chances, extremes and ranking; the same seed gives the same digits."""
    arguments = "--points 3 --samples 64 --seed 5 --rank ph --json"
    text = answered(run("tolerance", AMBER, arguments))
    assert answered(run("tolerance", AMBER, arguments)) == text
    data = json.loads(text)
    assert (data["dial"], data["seed"], len(data["x"])) == (WELL, 5, 3)
    assert data["extremes"]["ccpp"]["low"]["value"] < data["here"]["ccpp"]["percentiles"][0]
    assert data["ranking"]["readout"] == "ph"
    assert data["ranking"]["inputs"][0]["label"] == "pH of Granite Wellfield"


def test_the_worst_anywhere_is_printed_when_asked_for(run):
    """With its place along the dial and its season; never less extreme than at the operating point."""
    lines = answered(run("tolerance", AMBER, "--points 3 --samples 64 --anywhere")).splitlines()
    heading = next(place for place, line in enumerate(lines) if "Anywhere along the dial" in line)
    words = lines[heading + 1].split()
    assert words[-3:] == ["100", "%", "winter"]
    assert words[-5] == "winter"
    assert 40 < float(words[-7]) < 47
    at_point = next(line for line in lines if line.startswith("  Calcium carbonate")).split()[-2]
    assert float(words[-8].replace(MINUS, "-")) <= float(at_point.replace(MINUS, "-"))


def test_a_fan_as_csv(run):
    """The study's own table, along the dial asked for."""
    arguments = f"--dial {WELL} --start 10 --stop 30 --points 3 --samples 64 --readouts co2 --csv"
    rows = list(csv.reader(io.StringIO(answered(run("tolerance", AMBER, arguments)))))
    assert [row[0] for row in rows] == ["Share of Granite Wellfield [%]", "10.0", "20.0", "30.0"]
    assert "CO2, percentile 97.5" in rows[0]


# ---- allowed -----------------------------------------------------------------------------------------------


def test_the_allowed_tolerance_is_one_sentence(run):
    """Moss: what the final caustic may be off for a pH within 0.2."""
    found = allowed_tolerance(open_scenario(MOSS), ["train.last_caustic.dose"], "ph", 0.2)
    arguments = "--dials train.last_caustic.dose --readout ph --within 0.2"
    out = answered(run("allowed", MOSS, arguments))
    assert out == f"pH 8.20 ± 0.2 is kept within ± {found.half_width:.4g} %\n"
    assert json.loads(answered(run("allowed", MOSS, f"{arguments} --json")))["half_width"] == found.half_width


def test_a_dial_without_limit_says_what_was_tried(run):
    """Nothing up to ± 100 % matters."""
    out = answered(run("allowed", MOSS, "--dials train.hypo.dose --readout calcium --within 1"))
    assert out == "Calcium 3.6 ± 1 mg/L is kept with anything up to ± 100 %\n"


# ---- what is refused ---------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "arguments", "sentence"),
    [
        ("window", f"--x {WELLS} --y waters.wells.shar", "y: "),
        ("window", f"--x {WELLS}", "the following arguments are required: --y"),
        ("window", f"{MAP} --readouts acidity", 'readouts: "acidity" is not a readout'),
        ("tolerance", "--samples 1000000", "samples: 1000000 is out of range; allowed 1 to 65536"),
        ("tolerance", "--season spring", 'season: "spring" is not one of the seasons'),
        ("tolerance", "--set waters.wells.share=400", "waters.wells.share: "),
        ("allowed", f"--dials {CAUSTIC} --readout ph --within 0", "within: 0 is no distance"),
    ],
)
def test_a_mistake_is_one_sentence_and_status_2(run, name, arguments, sentence):
    """On stderr, and nothing on stdout."""
    assert refused(run(name, DUNE, arguments)).startswith(sentence)


def test_percentiles_of_ten_times_the_samples_stand_beside(run):
    """As text with how far they moved, and as numbers."""
    few = "--points 3 --samples 256 --converge"
    text = answered(run("tolerance", shipped()["amber"].as_posix(), few))
    assert "With 4096 samples" in text and "moved by at most" in text
    found = json.loads(answered(run("tolerance", shipped()["amber"].as_posix(), f"{few} --json")))
    settled = found["convergence"]["ph"]
    assert (settled["samples"], settled["more"]) == (256, 4096)
    assert settled["many"] == pytest.approx(settled["few"], abs=0.01)
