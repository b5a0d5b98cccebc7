"""Tables on the page and as files."""

import csv
import io
from typing import Any

import pytest

from explorer.app.live_view import node
from explorer.app.state import Session
from explorer.app.tables import Group, Row, csv_button, table
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped


@pytest.fixture
def session() -> Session:
    return Session(open_scenario(shipped()["amber"]))


def drawn() -> Any:
    rows = [Group("Ions"), Row(["Calcium", "26", node("strong", text="low")], "low")]
    return table("What is in it", ["Ion", "mg/L", "State"], rows, foot=[Row(["Sum", "26", ""])], words=(0, 2))


def test_a_table_has_a_caption_and_headers_with_their_scope() -> None:
    """Screen readers are told what a table is about and which header belongs to a cell."""
    found = list(drawn().walk())
    assert next(part.words() for part in found if part.tag == "caption") == "What is in it"
    scopes = [(part.words(), part.properties["scope"]) for part in found if part.tag == "th"]
    assert scopes[:3] == [("Ion", "col"), ("mg/L", "col"), ("State", "col")]
    assert scopes[3:] == [("Ions", "rowgroup"), ("Calcium", "row"), ("Sum", "row")]


def test_figures_and_words_are_set_apart() -> None:
    """Columns of words are named; all others are figures."""
    cells = [part for part in drawn().walk() if part.tag == "td"]
    assert [cell.properties["class"] for cell in cells] == ["figures", "text"] * 2


def test_a_group_spans_all_columns() -> None:
    """A line that names the lines below it."""
    group = next(part for part in drawn().walk() if part.properties.get("scope") == "rowgroup")
    assert group.properties["colspan"] == 3


def test_saved_table_is_a_csv_file_named_after_scenario_and_table(session: Session) -> None:
    """Numbers stay numbers; a text that a spreadsheet would take for a formula does not stay one."""
    button = csv_button(session, "ledger", lambda: [["What", "mg/L"], ["=1+1", -2.5], ["Well", None]])
    button.on(None)
    assert session.offered.name == "amber-river-and-wellfield-ledger.csv"
    assert session.offered.kind == "text/csv"
    rows = list(csv.reader(io.StringIO(session.offered.text.lstrip("\ufeff"))))
    assert rows == [["What", "mg/L"], ["'=1+1", "-2.5"], ["Well", ""]]
