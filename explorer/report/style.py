"""The style sheets of the report and of its drawings."""

from functools import cache
from importlib.resources import files


@cache
def _sheet(name: str) -> str:
    return files("explorer.report").joinpath(name).read_text(encoding="utf-8")


def report_style() -> str:
    """Style of the page, without that of its drawings."""
    return _sheet("report.css")


def svg_style(alone: bool = False) -> str:
    """Style of drawings. ``alone``: for a file that is nothing but one, where no rule has to say so."""
    sheet = _sheet("svg.css")
    return sheet.replace("svg ", "") if alone else sheet
