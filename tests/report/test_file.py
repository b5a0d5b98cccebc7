"""The report as a file: it needs nothing, carries its scenario, and no text in it is more than text."""

import re
from datetime import UTC, datetime

import pytest

from explorer import cli
from explorer.report import read_embedded, report_html, write_report
from explorer.scenario.errors import ScenarioError
from explorer.scenario.files import dumps, open_scenario, read_scenario
from explorer.scenario.shipped import shipped
from tests.report.conftest import HOSTILE, WRITTEN, every, hostile_plant, tree, words


@every
def test_every_shipped_scenario_yields_a_report_that_needs_nothing(name, shipped_report):
    """Well-formed, without script, and without a reference to anything outside."""
    html = shipped_report(name)
    page = tree(html)
    assert [script.get("type") for script in page.iter("script")] == ["application/json"]
    assert not re.search(r"https?:|//[a-z]|@import|url\((?!#)", html.replace(dumps_of(name), ""))
    assert {part.tag for part in page.iter()}.isdisjoint({"img", "link", "iframe", "object", "form", "base"})
    links = [link.get("href") for link in page.iter("a")]
    assert all(link.startswith(("#", "data:text/csv;charset=utf-8,")) for link in links)
    ids = [part.get("id") for part in page.iter() if part.get("id")]
    assert len(ids) == len(set(ids))


def dumps_of(name: str) -> str:
    return dumps(open_scenario(shipped()[name])).strip()


@every
def test_a_report_opens_as_the_scenario_it_was_made_from(name, shipped_report, tmp_path, capsys):
    """Same values, units and order; solved again, the same digits."""
    path = tmp_path / "report.html"
    path.write_text(shipped_report(name), encoding="utf-8")
    assert dumps(open_scenario(path)) == dumps(open_scenario(shipped()[name]))
    assert dumps(read_scenario(read_embedded(shipped_report(name)))) == dumps(open_scenario(path))
    answers = []
    for file in (path, shipped()[name]):
        assert cli.main(["solve", str(file), "--json"]) == 0
        answers.append(capsys.readouterr().out)
    assert answers[0] == answers[1]


def test_another_season_is_that_of_the_page_and_of_the_file_in_it():
    """The scenario given stays as it was."""
    scenario = open_scenario(shipped()["amber"])
    html = report_html(scenario, season="summer", written=WRITTEN)
    assert words(tree(html).find(".//p[@class='season']")).startswith("Season summer")
    assert read_scenario(html).season == "summer"
    assert scenario.season == "winter"
    with pytest.raises(ScenarioError, match='season: "autumn" is not one of the seasons'):
        report_html(scenario, season="autumn")


def test_hostile_names_are_text_everywhere(plant):
    """Title, notes, waters, steps, bases, laboratories, own chemicals: nothing becomes an element."""
    scenario = hostile_plant(plant)
    page = tree(report_html(scenario))
    assert {part.tag for part in page.iter()}.isdisjoint({"img", "b", "i"})
    assert len(list(page.iter("script"))) == len(list(page.iter("style"))) == 1
    assert not any(name.startswith("on") for part in page.iter() for name in part.attrib)
    assert words(page.find(".//h1")) == words(page.find(".//title")) == HOSTILE
    assert HOSTILE not in page.find(".//style").text and "onerror=" not in page.find(".//style").text
    assert dumps(read_scenario(report_html(scenario))) == dumps(scenario)


def test_the_time_of_a_report_is_now_unless_it_is_given(plant):
    """With the offset of the local clock."""
    before = datetime.now(UTC).replace(second=0, microsecond=0)
    said = re.search(
        r"Made (\d{4}-\d\d-\d\d \d\d:\d\d) \(UTC([+-]\d{4})\)", report_html(plant({"river": 100}))
    )
    assert datetime.strptime(" ".join(said.groups()), "%Y-%m-%d %H:%M %z") >= before


def test_writing_takes_the_place_of_an_old_file_in_one_step(plant, tmp_path):
    """Whole or not at all; what the system refuses is one sentence."""
    path = tmp_path / "report.html"
    path.write_text("old", encoding="utf-8")
    write_report(plant({"river": 100}), path)
    assert path.read_text(encoding="utf-8").startswith("<!DOCTYPE html>")
    assert list(tmp_path.iterdir()) == [path]
    with pytest.raises(ScenarioError, match=r"cannot be saved: there is no such file or folder$"):
        write_report(plant({"river": 100}), tmp_path / "nowhere" / "report.html")
