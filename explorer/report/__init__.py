"""The report: one HTML page that needs nothing beside it, for the minutes of a meeting.

It shows what was entered, what comes out and what that rests on, with the digits of the screen, and carries
its scenario: opened like a scenario file, it is one. Nothing in it runs and nothing is loaded.
"""

import os
from collections.abc import Sequence
from datetime import datetime

from explorer.report.case import Case
from explorer.report.page import page
from explorer.scenario.embedded import read_embedded
from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.files import write_text
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import READOUTS

__all__ = ["read_embedded", "report_html", "write_report"]


def report_html(
    scenario: Scenario,
    *,
    season: str | None = None,
    figures: Sequence[str] = (),
    family: str | None = None,
    written: datetime | None = None,
) -> str:
    """The report on a scenario as it stands.

    season: whose analyses count, the scenario's own where None; the scenario in the page is set to it.
    figures: readouts drawn along the sweep; the usual ones and those with targets where empty. family: of the
    species drawn, that of the scenario's sweep where None. written: time of the report, now where None.

    Raises ScenarioError where the scenario cannot be evaluated, and for an unknown season, readout or family.
    """
    for key in figures:
        if key not in READOUTS:
            raise ScenarioError("figures", unknown(key, "a readout", READOUTS))
    if season is not None and season != scenario.season:
        if season not in scenario.seasons:
            raise ScenarioError("season", unknown(season, "one of the seasons", scenario.seasons))
        scenario = scenario.copy()
        scenario.season = season
    written = datetime.now().astimezone() if written is None else written
    wanted = scenario.sweep.family if scenario.sweep is not None else None
    return page(Case(scenario), figures, family or wanted or "carbonate", written)


def write_report(scenario: Scenario, path: str | os.PathLike[str], *, season: str | None = None) -> None:
    """Write the report to a file, whole or not at all. Raises ScenarioError as :func:`report_html`."""
    write_text(report_html(scenario, season=season), path)
