"""Targets edited on the tiles, without a browser."""

import pytest

from explorer.app.files import Shelf
from explorer.app.main import build
from explorer.app.shell import Shell
from explorer.scenario.files import dumps
from explorer.scenario.shipped import shipped
from explorer.scenario.targets import targets_of


@pytest.fixture
def shell() -> Shell:
    """The page of the shipped river and wellfield."""
    return build(shipped()["amber"], shelf=Shelf())


def test_target_entered_on_a_tile_is_one_undo_step(shell: Shell) -> None:
    """Both bounds and the basis of one opening of the form are undone together."""
    before, order = dumps(shell.session.scenario), shell.tiles.chosen
    shell.tiles.report("edit:buffer_intensity")
    shell.tiles.report("target:buffer_intensity:0:low", "0,7")
    shell.tiles.report("target:buffer_intensity:0:high", "2")
    shell.tiles.report("target:buffer_intensity:0:basis", "operators")
    target = targets_of(shell.session.scenario, "buffer_intensity")[0]
    assert (target.low, target.high, target.basis) == (0.7, 2, "operators")
    assert "▼ below" in shell.tiles.shown("tile:buffer_intensity").words()
    assert shell.tiles.chosen == order
    shell.session.undo()
    assert dumps(shell.session.scenario) == before


def test_the_next_opening_is_another_step(shell: Shell) -> None:
    """What was entered before stays when it is undone."""
    for bound in ("0.1", "0.2"):
        shell.tiles.report("edit:buffer_intensity")
        shell.tiles.report("target:buffer_intensity:0:low", bound)
    shell.session.undo()
    assert targets_of(shell.session.scenario, "buffer_intensity")[0].low == 0.1


def test_refusal_stands_beside_the_field_and_changes_nothing(shell: Shell) -> None:
    """Lowest above highest, an emptied last bound, and no number."""
    before = dumps(shell.session.scenario)
    for text in ("x", ""):
        shell.tiles.report("edit:ccpp")
        shell.tiles.report("target:ccpp:0:low", text)
        assert shell.tiles.entries.refusal("target:ccpp:0:low")
    shell.tiles.report("target:ccpp:0:high", "-9")
    assert "above highest" in shell.tiles.entries.refusal("target:ccpp:0:high")
    assert dumps(shell.session.scenario) == before


def test_target_is_taken_away(shell: Shell) -> None:
    """The tile then has none."""
    shell.tiles.report("target:ccpp:0:remove")
    assert "no target" in shell.tiles.shown("tile:ccpp").words()
