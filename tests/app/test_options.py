"""Kept options and seasons in the top bar, on tiles and in plots, without a browser."""

import pytest

from explorer.app.files import Shelf
from explorer.app.main import build
from explorer.app.options import difference
from explorer.app.shell import Shell
from explorer.scenario.editing import add_step
from explorer.scenario.files import dumps
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import READOUTS
from explorer.scenario.shipped import shipped

WELL = "waters.well.share"


@pytest.fixture
def shell() -> Shell:
    """The page of the shipped river and wellfield."""
    return build(shipped()["amber"], shelf=Shelf())


def keep(shell: Shell, name: str) -> None:
    shell.bar.report("option:keep")
    shell.bar.report("option:new", name)


def change(shell: Shell, key: str) -> str:
    """What the tile says of the difference to the chosen option."""
    tile = shell.tiles.shown(f"tile:{key}")
    found = [part for part in tile.walk() if part.properties.get("class") == "change"]
    return found[0].words() if found else ""


def test_kept_option_is_compared_with_at_once(shell: Shell) -> None:
    """The name is asked in place; afterwards the tiles say how far the water is from the option."""
    keep(shell, "Base")
    assert [option.name for option in shell.session.scenario.options] == ["Base"]
    assert change(shell, "ph") == "±0 vs A"
    before = float(shell.session.point.readout("ph"))
    shell.session.turn(WELL, 10)
    rise = float(shell.session.point.readout("ph")) - before
    assert change(shell, "ph") == f"+{rise:.2f} vs A"


def test_name_starts_as_where_the_swept_dial_stands(shell: Shell) -> None:
    """Enter takes it; Escape takes back the question and keeps nothing."""
    shell.bar.report("option:keep")
    assert shell.bar.shown("option:new").properties["value"] == "40 % Granite Wellfield"
    shell.bar.report("option:new", None)
    assert "option:new" not in shell.bar and not shell.session.scenario.options


def test_keeping_is_one_undo_step(shell: Shell) -> None:
    """Undo takes the option and its comparison away."""
    keep(shell, "Base")
    shell.session.undo()
    assert not shell.session.scenario.options and change(shell, "ph") == ""


def test_second_option_needs_another_name(shell: Shell) -> None:
    """The refusal stands beside the field, which stays."""
    keep(shell, "Base")
    keep(shell, "Base")
    assert "there twice" in shell.bar.entries.refusal("option:new")
    assert len(shell.session.scenario.options) == 1


def test_going_back_renaming_and_deleting(shell: Shell) -> None:
    """What was kept comes back as one step; letters follow the order."""
    keep(shell, "Base")
    shell.session.turn(WELL, 80)
    keep(shell, "More wellfield")
    shell.bar.report("option:A")
    shell.bar.report("option:back")
    assert shell.session.value(WELL) == 40
    assert len(shell.session.scenario.options) == 2
    shell.session.undo()
    assert shell.session.value(WELL) == 80
    shell.bar.report("option:rename")
    shell.bar.report("option:name", "Agreed")
    assert shell.session.choices["option"] == "Agreed" and change(shell, "ph")
    shell.bar.report("option:drop")
    assert [option.name for option in shell.session.scenario.options] == ["More wellfield"]
    assert change(shell, "ph") == ""


def test_curves_of_options_lie_in_the_plots_and_can_be_hidden(shell: Shell) -> None:
    """Each has its letter, a dash of its own and the range of the present sweep."""
    keep(shell, "Base")
    shell.session.choose_season("summer")
    shell.session.set_sweep(start=0, stop=50)
    plot = shell.views["sweep"].plots.plots["ph"]
    assert plot.others.data["label"] == ["A"] and plot.others.data["dash"][0]
    assert plot.others.data["xs"][0][-1] == 50
    curve = plot.others.data["ys"][0]
    assert plot.y_range.start <= min(curve) and max(curve) <= plot.y_range.end
    shell.bar.report("option:line")
    assert plot.others.data["label"] == []
    assert change(shell, "ph")


def test_option_without_the_swept_dial_has_no_curve(shell: Shell) -> None:
    """Its results are still compared."""
    keep(shell, "Base")
    shell.session.edit("Add", _add_caustic)
    shell.session.set_sweep(dial="train.sodium_hydroxide.dose", start=0, stop=20)
    assert shell.session.kept[0].swept is None and change(shell, "ph")


def _add_caustic(scenario: Scenario) -> None:
    add_step(scenario, "", "dose", "sodium_hydroxide")


def test_difference_has_the_decimals_of_the_value() -> None:
    """A change below the last decimal is none."""
    assert difference(7.471, 7.36, READOUTS["ph"]) == "+0.11"
    assert difference(148.0, 172.4, READOUTS["alkalinity"]) == "−24"
    assert difference(7.471, 7.4709, READOUTS["ph"]) == "±0"
    assert difference(float("nan"), 7.0, READOUTS["ph"]) == ""


def test_seasons_are_added_renamed_and_removed_in_the_bar(shell: Shell) -> None:
    """A new one starts as the present one and is shown; removing asks first."""
    before = dumps(shell.session.scenario)
    shell.bar.report("season:add")
    shell.bar.report("season:new", "spring")
    assert shell.session.season == "spring"
    waters = shell.session.scenario.waters
    assert all(water.analyses["spring"].to_dict() == water.analyses["winter"].to_dict() for water in waters)
    shell.bar.report("season:rename")
    shell.bar.report("season:name", "thaw")
    assert shell.session.scenario.seasons == ["winter", "summer", "thaw"]
    shell.bar.report("season:remove")
    assert "thaw" in shell.session.scenario.seasons
    shell.bar.report("season:yes")
    assert shell.session.scenario.seasons == ["winter", "summer"]
    for _ in range(3):
        shell.session.undo()
    assert dumps(shell.session.scenario) == before


def test_season_name_that_is_there_is_refused(shell: Shell) -> None:
    """The sentence stands beside the field."""
    shell.bar.report("season:add")
    shell.bar.report("season:new", "summer")
    assert "there already" in shell.bar.entries.refusal("season:new")
