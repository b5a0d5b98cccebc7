"""Tables and their CSV."""

import csv
import io
from urllib.parse import unquote

from explorer.report.markup import element
from explorer.report.tables import Group, table
from tests.report.conftest import rows, tree


def read(text: str) -> list[list[str]]:
    return list(csv.reader(io.StringIO(text.removeprefix("\ufeff"))))


def test_the_csv_of_a_table_is_what_the_page_shows():
    """Without markup; what stands on a line of its own is set off."""
    under = element("small", "a & b", class_="under")
    made = tree(table("sheet", ["Result", "Value"], [Group("Ions"), [["=pH", under], "−8.5"]]))
    link = made.find(".//a")
    assert link.get("download") == "sheet.csv"
    assert unquote(link.get("href")).split(",", 1)[1].startswith("\ufeff")
    assert read(unquote(link.get("href").split(",", 1)[1])) == [
        ["Result", "Value"],
        ["Ions"],
        ["'=pH; a & b", "-8.5"],
    ]


def test_headings_repeat_on_paper_and_say_what_they_head():
    """A head of its own, and the scope of every heading."""
    made = tree(table("sheet", ["Result", "Value"], [Group("Ions"), ["Calcium", "62"]]))
    assert [[cell.get("scope") for cell in row] for row in made.iter("tr")] == [
        ["col", "col"],
        ["rowgroup"],
        ["row", None],
    ]
    assert len(made.findall("./table/thead/tr")) == 1


def test_a_table_without_rows_is_none():
    """A heading over nothing says nothing."""
    assert table("sheet", ["Result"], []) is None


def test_rows_of_the_conftest_read_a_table():
    """The helper of these specifications sees headings and cells."""
    page = tree(f'<body><section id="a">{table("sheet", ["x", "y"], [["1", "2"]])}</section></body>')
    assert rows(page, "a") == [["x", "y"], ["1", "2"]]
