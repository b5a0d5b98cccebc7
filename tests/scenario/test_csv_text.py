"""Tables as CSV, safe to open in a spreadsheet."""

import csv
import io

import pytest

from explorer.scenario.csv_text import csv_text


def read(text: str) -> list[list[str]]:
    return list(csv.reader(io.StringIO(text, newline="")))


@pytest.mark.parametrize("text", ["=1+1", "+cmd", "-2+3", "@SUM(A1)", "\tx", "\r=1", "-", "--1"])
def test_a_text_that_looks_like_a_formula_gets_an_apostrophe(text):
    """A spreadsheet then shows it instead of working it out."""
    assert read(csv_text([[text]])) == [[f"'{text}"]]


@pytest.mark.parametrize(
    ("value", "cell"),
    [("−8.5", "-8.5"), ("-8.5", "-8.5"), ("+0.27", "+0.27"), ("1e-3", "1e-3"), (-8.5, "-8.5"), (None, "")],
)
def test_numbers_stay_numbers(value, cell):
    """The printed minus becomes the plain one."""
    assert read(csv_text([[value]])) == [[cell]]


def test_quotes_commas_and_lines_come_back():
    """RFC 4180 quoting."""
    row = ['a "b"', "c, d", "e\nf", "°C"]
    assert read(csv_text([row])) == [row]
