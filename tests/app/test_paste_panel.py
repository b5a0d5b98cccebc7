"""A laboratory sheet pasted on the rail, without a browser."""

import pytest

from explorer.app.files import Shelf
from explorer.app.main import build
from explorer.app.shell import Shell
from explorer.scenario.files import dumps
from explorer.scenario.shipped import shipped
from explorer.treatment.analysis import Measured

SHEET = (
    "Parameter;Value;Unit\npH;7,9;\nAlkalinity;150;mg/L CaCO3\nKalk;60;mg/L\nTurbidity;0.4;NTU\n"
    "Iron;<0,02;mg/L"
)


@pytest.fixture
def shell() -> Shell:
    """The page of the shipped river and wellfield."""
    return build(shipped()["amber"], shelf=Shelf())


def test_new_water_from_a_pasted_sheet_is_one_undo_step(shell: Shell) -> None:
    """It opens with what was understood; lines that were not are left out until somebody says so."""
    before, rail = dumps(shell.session.scenario), shell.rail
    rail.report("waters:add:paste:")
    rail.report("paste::text", SHEET)
    assert "this parameter is not known" in rail.shown("paste::3:line").words()
    rail.report("paste::2", "calcium")
    rail.report("paste::take")
    water = shell.session.scenario.waters[-1]
    for analysis in water.analyses.values():
        assert analysis.entries["ph"] == Measured(7.9, unit="")
        assert analysis.entries["calcium"] == Measured(60.0, unit="mg/L")
        assert analysis.entries["iron"] == Measured(None, 0.02, "mg/L")
        assert analysis.entries["temperature"].assumed
        assert "sodium" not in analysis.entries
    assert rail.desk.opened == f"waters.{water.id}" and "paste::text" not in rail
    shell.session.undo()
    assert dumps(shell.session.scenario) == before


def test_sheet_replaces_the_analysis_of_the_season_shown(shell: Shell) -> None:
    """Other seasons and the other water stay; the file is noted as provenance."""
    rail = shell.rail
    summer = shell.session.scenario.waters[0].analyses["summer"].to_dict()
    rail.report("waters.river:open")
    rail.report("waters.river.analysis:paste")
    rail.report("paste:river:file", {"name": "river.csv", "text": SHEET})
    rail.report("paste:river:take")
    river = shell.session.scenario.waters[0]
    assert river.analyses["winter"].entries["ph"].value == 7.9
    assert river.analyses["winter"].entries["temperature"] == Measured(4, unit="°C", assumed=True)
    assert river.analyses["winter"].provenance["file"] == "river.csv"
    assert river.analyses["summer"].to_dict() == summer


def test_text_without_an_analysis_is_refused_and_nothing_changes(shell: Shell) -> None:
    """The sentence stands at the panel, which can be left."""
    before, rail = dumps(shell.session.scenario), shell.rail
    rail.report("waters:add:paste:")
    rail.report("paste::text", "nothing of use")
    assert "allowed" in rail.shown("paste:").words()
    rail.report("paste::cancel")
    assert "paste:" not in rail
    assert dumps(shell.session.scenario) == before


def test_panel_goes_with_its_water(shell: Shell) -> None:
    """A removed water is not pasted into."""
    rail = shell.rail
    rail.report("waters.river:open")
    rail.report("waters.river.analysis:paste")
    rail.report("waters.river:remove")
    assert rail.desk.pasting is None
