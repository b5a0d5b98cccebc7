"""The report: everything a reader of the minutes needs, with the digits of the screen, in one file."""

import json
import re
from xml.etree.ElementTree import Element

import pytest

from explorer import cli
from explorer.report import report_html
from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.readouts import READOUTS, format_value, in_words
from explorer.scenario.shipped import shipped
from explorer.scenario.version import method
from explorer.studies.finding import finding
from explorer.studies.hand_checks import hand_checks
from explorer.studies.outside_checks import outside_checks
from explorer.studies.sweep import sweep
from tests.report.conftest import every, rows, tree, words


def sections(page: Element) -> list[str]:
    return [section.get("id") for section in page.iter("section")]


def visible(page: Element) -> str:
    """What a reader sees: without style and data."""
    return words(page.find("body")).split("{", 1)[0]


@every
def test_the_finding_is_that_of_the_screen(name, shipped_report):
    """The same sentence from the same function; season and temperature above it."""
    scenario = open_scenario(shipped()[name])
    outcome = evaluate(scenario)
    page = tree(shipped_report(name))
    said = words(page.find(".//p[@class='season']"))
    assert scenario.season in said
    assert in_words(outcome.readout("temperature"), READOUTS["temperature"]) in said
    verdict = finding(outcome, sweep(scenario))
    found = next(p for p in page.iter("p") if (p.get("class") or "").startswith("finding"))
    assert f"{verdict.lead} {verdict.rest}" in words(found)


@every
def test_every_result_has_the_digits_of_the_command_line(name, shipped_report, capsys):
    """What ``solve --json`` gives, formatted once more, is what the page shows."""
    assert cli.main(["solve", str(shipped()[name]), "--json"]) == 0
    solved = json.loads(capsys.readouterr().out)["readouts"]
    shown = {row[0]: row[1] for row in rows(tree(shipped_report(name)), "results") if len(row) > 1}
    seen = 0
    for key, found in solved.items():
        readout = READOUTS[key]
        if found["value"] is None or readout.label not in shown:
            assert not found["value"], key
            continue
        text = shown[readout.label]
        if readout.sign_words:
            assert text == in_words(found["value"], readout).removesuffix(readout.unit_text)
        else:
            assert text == format_value(found["value"], readout)
        seen += 1
    assert seen > 25


@every
def test_nothing_is_promised(name, shipped_report):
    """Neither "safe" nor "compliant"; lead and copper only as what is not predicted."""
    said = visible(tree(shipped_report(name))).lower()
    assert not re.search(r"\bsafe\b|complian|guaranteed", said)
    assert "lead and copper" in said and "none predicted" in said
    assert "local codes come first" in said and "regulator" in said


def test_the_sections_of_a_complete_report(shipped_report):
    """Decision first, basis last."""
    assert sections(tree(shipped_report("moss"))) == [
        "targets", "alarms", "sweep", "options", "seasons", "entered", "stages", "ledger", "checks",
        "tolerance", "quantities", "cautions", "excluded", "tests", "assumptions", "data", "results",
        "method", "constants", "outside",
    ]  # fmt: skip
    contents = [link.get("href") for link in tree(shipped_report("moss")).find(".//nav")]
    assert contents == [f"#{name}" for name in sections(tree(shipped_report("moss")))]


def test_targets_come_with_value_margin_basis_and_state(shipped_report):
    """In words and with a sign, not by colour alone."""
    heading, *found = rows(tree(shipped_report("amber")), "targets")
    assert heading == ["Result", "Value", "Unit", "Entered target and its basis", "Margin", "State"]
    outcome = evaluate(open_scenario(shipped()["amber"]))
    for row, (target, value, met, margin) in zip(found, outcome.targets(), strict=True):
        readout = READOUTS[target.readout]
        assert row[0].startswith(readout.label)
        assert row[1] in in_words(float(value), readout)
        assert row[3].endswith(target.basis)
        assert row[4] == format_value(float(margin), readout)
        assert row[5] == ("● meets the entered target" if met else "▼ below the entered target")


def test_five_places_along_the_sweep_and_the_operating_point(shipped_report):
    """Ten results at least, targets first, with a mark where one is missed; computed doses below."""
    scenario = open_scenario(shipped()["juniper"])
    heading, *found = rows(tree(shipped_report("juniper")), "sweep")
    assert heading == ["", "now, 50 %", "0 %", "25 %", "50 %", "75 %", "100 %"]
    assert [row[0] for row in found[:3]] == ["pH", "Chloride to sulfate ratio", "Larson ratio"]
    assert len(found) >= 10
    ratio = sweep(scenario, points=5).outcome.readout("chloride_sulfate_ratio")
    texts = [format_value(value, READOUTS["chloride_sulfate_ratio"]) for value in ratio]
    assert [cell.split(" ")[0] for cell in found[1][2:]] == texts
    assert [cell.endswith("▲") for cell in found[1][2:]] == [value > 1.49 for value in ratio]
    assert found[-1][0] == "Dose of Final caustic, mg/L"


def test_figures_show_the_sweep(shipped_report):
    """pH, species, buffer intensity, precipitation potential, and targets, the missed ones first."""
    page = tree(shipped_report("cinder"))
    titles = [words(figure.find("figcaption/strong")) for figure in page.iter("figure")]
    assert titles[:4] == ["pH", "Carbonate species", "Buffer intensity", "CaCO₃ precipitation potential"]
    assert "Free ammonia" in titles


def test_figures_may_be_chosen(plant):
    """By readout; the species follow the first."""
    html = report_html(plant({"river": 60, "well": 40}), figures=["nitrate"], family="phosphate")
    titles = [words(figure.find("figcaption/strong")) for figure in tree(html).iter("figure")]
    assert titles == ["Nitrate", "Phosphate species"]
    with pytest.raises(ScenarioError, match='figures: "nitrat" is not a readout'):
        report_html(plant({"river": 60, "well": 40}), figures=["nitrat"])
    with pytest.raises(ScenarioError, match='family: "iodine" is not a family of species'):
        report_html(plant({"river": 60, "well": 40}), family="iodine")


def test_options_are_drawn_beside_the_scenario(shipped_report):
    """In every figure of a readout, with a legend."""
    page = tree(shipped_report("juniper"))
    figures = [figure for figure in page.iter("figure") if "species" not in words(figure.find("figcaption"))]
    for figure in figures:
        assert [part.get("class") for part in figure.iter("path")].count("option") == 1
        assert "A" in [words(part) for part in figure.iter("text")]
    assert "Thin lines: options" in words(page.find(".//section[@id='sweep']"))


def test_what_was_entered_is_echoed_with_its_basis(shipped_report):
    """Values and units as entered, the same in moles beside them; doses with what they are counted as."""
    page = tree(shipped_report("dune"))
    waters = {row[0]: row[1:] for row in rows(page, "entered")}
    assert waters["Alkalinity, mg/L as CaCO₃"] == ["3 (0.0599)", "245 (4.9)"]
    assert waters["pH"] == ["5.9 at 24 °C", "7.35 at 22 °C"]
    assert waters["Boron, mg/L"][0] == "0.75 (0.0694)"
    assert waters["Nitrate, mg/L as NO₃"] == ["—", "18 (0.29)"]
    train = [row[:2] for row in rows(page, "entered", 1)]
    assert train[1:] == [
        ["Dune permeate, before the blend"],
        ["Limestone contactor", "Fraction 50 %"],
        ["› Carbon dioxide", "90.5 mg/L as CO₂"],
        ["› Limestone contactor", "Approach to saturation 90 %, Solid calcite"],
        ["Sodium hydroxide", "15.05 mg/L as NaOH"],
        ["After the blend"],
        ["Sodium hypochlorite", "0.8 mg/L as Cl₂"],
    ]


def test_a_computed_dose_says_what_it_holds(shipped_report):
    """Readout, value and ceiling, with the dose that came out."""
    train = {row[0]: row[1] for row in rows(tree(shipped_report("juniper")), "entered", 1) if len(row) > 1}
    assert train["Final caustic"] == (
        "Sodium hydroxide, 5.644 mg/L as NaOH, computed to hold pH 8, at most 40 mg/L"
    )


def test_options_and_seasons_show_only_what_differs(shipped_report):
    """Options lettered, with their notes; the season that is shown first."""
    heading, *found = rows(tree(shipped_report("juniper")), "options")
    assert heading[1] == "As it stands" and heading[2].startswith("A Ferric chloride")
    assert all(len(set(row[1:])) > 1 for row in found if len(row) > 1)
    assert "seasons" not in sections(tree(shipped_report("juniper")))
    assert rows(tree(shipped_report("amber")), "seasons")[0][1:] == ["As it stands", "summer"]


def test_the_ledger_adds_up_on_paper(shipped_report):
    """The printed amounts of sources, doses and solids sum to the printed finished water."""
    page = tree(shipped_report("moss"))
    for number in range(len(page.findall(".//section[@id='ledger']//table"))):
        heading, *lines = rows(page, "ledger", number)
        for column in range(1, len(heading)):
            amounts = [
                float(line[column].replace("−", "-"))
                for line in lines
                if line[column][:1] in "+−" and line[column]
            ]
            total = float(lines[-1][column])
            decimals = len(lines[-1][column].partition(".")[2])
            assert sum(amounts) == pytest.approx(total, abs=0.6 * len(amounts) * 10**-decimals)


def test_three_checks_by_hand(shipped_report):
    """Those of the ledger view."""
    scenario = open_scenario(shipped()["amber"])
    made = [check.text() for check in hand_checks(scenario, evaluate(scenario))]
    shown = [words(item) for item in tree(shipped_report("amber")).findall(".//section[@id='checks']/ol/li")]
    assert shown == made and len(made) == 3


def test_the_tolerance_statement_ends_without_a_promise(shipped_report):
    """The value as it stands lies within the extremes, and it is no guarantee."""
    said = [words(item) for item in tree(shipped_report("moss")).findall(".//section[@id='tolerance']/ul/li")]
    assert len(said) == 4
    value, low, high = re.fullmatch(
        r"pH ([\d.]+); ([\d.]+) to ([\d.]+) at the extremes of all tolerances; not a guarantee\.", said[0]
    ).groups()
    assert float(low) < float(value) < float(high)
    chances = rows(tree(shipped_report("moss")), "tolerance")
    assert chances[0][-1] == "Meets the entered target" and chances[-1][0] == "All entered targets together"


def test_without_tolerances_the_report_says_so(plant):
    """Instead of a certainty that is not there."""
    page = tree(report_html(plant({"river": 60, "well": 40})))
    section = page.find(".//section[@id='tolerance']")
    assert "No tolerances are entered" in words(section)
    assert page.find(".//polygon") is None


def test_every_page_says_when_and_by_what_it_was_made(shipped_report):
    """Date and time with their zone; version and constants."""
    said = visible(tree(shipped_report("amber")))
    assert "2026-03-04 05:06 (UTC+0000)" in said
    assert method() in said


def test_a_water_not_for_drinking_is_marked(shipped_report):
    """On top, and nothing is said of certified products."""
    page = tree(shipped_report("cinder"))
    assert words(page.find(".//p[@class='banner']")).startswith("▲ Not drinking water")
    assert tree(shipped_report("amber")).find(".//p[@class='banner']") is None
    assert "certified for drinking water" not in visible(page)


def test_constants_name_their_sources_and_what_was_left_out(shipped_report):
    """Only reactions whose species occur; a source from memory says so."""
    found = rows(tree(shipped_report("amber")), "constants")
    by_reaction = {row[0]: row[1:] for row in found if len(row) > 1}
    assert by_reaction["HCO₃⁻ = H⁺ + CO₃²⁻"][0] == "−10.329"
    assert "Plummer & Busenberg 1982" in by_reaction["HCO₃⁻ = H⁺ + CO₃²⁻"][2]
    assert "(from memory)" in by_reaction["HOCl = H⁺ + OCl⁻"][2]
    assert not any("PO₄" in reaction for reaction in by_reaction)
    assert ["Left out"] in found


def test_a_point_without_an_answer_still_has_a_report(plant):
    """The reason stands where the finding would be, and no result is a number."""
    raw = plant.dict({"river": 60, "well": 40}, targets=[{"readout": "ph", "low": 7}])
    del raw["flow"]
    for water in raw["waters"]:
        del water["share"]
        water["flow"] = {"value": 0, "unit": "m³/h"}
    page = tree(report_html(plant.read(raw)))
    assert "No result at this setting: no water flows." in visible(page)
    assert rows(page, "targets")[1][1] == "—" and rows(page, "targets")[1][-1] == "no value"
    assert "There is no answer here, so there is no ledger." in visible(page)
    assert {"stages", "tests", "method"} <= set(sections(page))
    assert "results" not in sections(page)


def test_the_outside_checks_stand_in_the_report(shipped_report):
    """Every published case with printed and engine's figure, what is allowed and why, and its source."""
    heading, *found = rows(tree(shipped_report("amber")), "outside")
    assert heading == ["Published case", "Printed", "Engine", "Difference", "Allowed", "Reason", "Source"]
    lines = [row for row in found if len(row) == len(heading)]
    assert len(lines) == len(outside_checks())
    for row, check in zip(lines, outside_checks(), strict=True):
        assert row[0].startswith(check.case) and row[2:] == [
            check.numbers[1], ("▲ " if check.parts else "") + check.numbers[2], check.numbers[3], check.why,
            check.source,
        ]  # fmt: skip


def test_holds_say_what_they_take_and_whether_they_are_reached(plant):
    """The dose in a step and the dial of the scenario in one table."""
    caustic = plant.held("caustic", "sodium_hydroxide", "ph", 8.2, 0.5, "mg/L")
    holds = {"waters.well.share": {"readout": "nitrate", "value": 18, "stage": "blend"}}
    page = tree(report_html(plant({"river": 60, "well": 40}, [caustic], holds=holds)))
    heading, dose, share = rows(page, "holds")
    assert heading[:2] == ["Computed", "Takes"]
    assert dose[0] == "Dose of Sodium hydroxide" and dose[-1].startswith("▲ cannot be reached:")
    assert share[0] == "Share of Well" and share[4:] == ["Nitrate 18.0 mg/L", "blend", "met"]
