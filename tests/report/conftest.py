"""Reports as trees, made once for each shipped scenario."""

from collections.abc import Callable
from datetime import UTC, datetime
from functools import cache
from typing import Any
from xml.etree.ElementTree import Element, fromstring

import pytest

from explorer.report import report_html
from explorer.scenario.files import open_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.shipped import shipped

WRITTEN = datetime(2026, 3, 4, 5, 6, tzinfo=UTC)
HOSTILE = "<img src=x onerror=alert(1)>\"'&</style></script><!--{{7*7}}"

every = pytest.mark.parametrize("name", shipped())
"""Every shipped scenario by its name."""


def tree(html: str) -> Element:
    """The page as a tree: it is well-formed XML as well."""
    return fromstring(html)


def words(part: Element) -> str:
    """All text of an element."""
    return "".join(part.itertext())


def rows(page: Element, section: str, number: int = 0) -> list[list[str]]:
    """Texts of a table of a section, the heading first."""
    table = page.findall(f".//section[@id='{section}']//table")[number]
    return [[words(cell) for cell in row] for row in table.iter("tr")]


@pytest.fixture(scope="session")
def shipped_report() -> Callable[[str], str]:
    """The report on a shipped scenario by its name."""
    return cache(lambda name: report_html(open_scenario(shipped()[name]), written=WRITTEN))


def hostile_plant(plant: Any) -> Scenario:
    """A scenario with markup in every text that a file may hold."""
    own = {
        "id": "brew", "name": HOSTILE, "formula": "NaOH", "adds": {"sodium": 1, "alkalinity": 1},
        "hazards": [HOSTILE],
    }  # fmt: skip
    raw = plant.dict(
        {"river": 60, "well": 40},
        [plant.dosed("brew", "brew", 2, "mg/L", name="=" + HOSTILE, note=HOSTILE)],
        title=HOSTILE,
        note=HOSTILE,
        chemicals=[own],
        currency=HOSTILE[:12],
        targets=[{"readout": "ph", "low": 7, "basis": HOSTILE}],
        sweep={"dial": "train.brew.dose", "start": 0, "stop": 4, "points": 11},
    )
    raw["waters"][0]["name"] = HOSTILE
    raw["waters"][0]["analyses"]["winter"]["provenance"] = {"lab": HOSTILE, "file": HOSTILE, "note": HOSTILE}
    raw["waters"][0]["analyses"]["winter"]["iron"] = {"below": 0.02, "unit": "mg/L", "note": HOSTILE}
    return plant.read(raw)
