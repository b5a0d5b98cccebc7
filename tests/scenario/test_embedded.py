"""A page that carries a scenario opens like the file."""

import json

import pytest

from explorer.scenario.embedded import embedded, read_embedded
from explorer.scenario.errors import ScenarioError
from explorer.scenario.files import dumps, open_scenario, read_scenario
from explorer.scenario.shipped import shipped


def page(block: str) -> str:
    return f"<!doctype html>\n<html><body><p>A report.</p>{block}</body></html>"


@pytest.mark.parametrize("name", shipped())
def test_a_shipped_scenario_comes_back_from_a_page_unchanged(name):
    """Every value, unit and order, in text and in bytes."""
    text = dumps(open_scenario(shipped()[name]))
    carried = page(embedded(text))
    assert dumps(read_scenario(carried)) == text
    assert dumps(read_scenario(carried.encode())) == text


@pytest.mark.parametrize(
    "hostile", ["</script><script>alert(1)</script>", "<!--<script>", "]]>", "&lt;/script&gt;"]
)
def test_no_text_closes_the_block(plant, hostile):
    """Whatever a title holds, the page has the one block that was written, and the title comes back."""
    scenario = plant({"river": 100}, title=hostile)
    carried = page(embedded(dumps(scenario)))
    assert carried.count("</script") == carried.count("<script") == 1
    assert "<!--" not in carried
    assert "&" not in embedded(dumps(scenario))
    assert read_scenario(carried).title == hostile


def test_the_block_is_data_that_no_browser_runs():
    """Its type is that of JSON."""
    assert embedded("{}").startswith('<script type="application/json" ')


@pytest.mark.parametrize(
    "broken",
    ["<html></html>", page(""), '<script id="blendwright-scenario">{}', page("<script>{}</script>")],
)
def test_a_page_without_a_scenario_is_refused_in_one_sentence(broken):
    """It says what may be opened."""
    with pytest.raises(ScenarioError, match="a page without a scenario; allowed"):
        read_scenario(broken)


def test_what_is_wrong_inside_is_said_as_for_a_file(plant):
    """The path of the field, as if the file had been opened."""
    text = (
        dumps(plant({"river": 100})).replace('"potable"', '"portable"').replace('"share": 100', '"share": 99')
    )
    with pytest.raises(ScenarioError, match="shares"):
        read_scenario(page(embedded(text)))


def test_the_json_of_a_page_is_that_of_the_file_but_for_escapes(plant):
    """Taking it out by hand works too."""
    text = dumps(plant({"river": 100}, title="a < b"))
    taken = read_embedded(page(embedded(text)))
    assert taken == text.strip().replace("<", "\\u003c")
    assert json.loads(taken) == json.loads(text)
