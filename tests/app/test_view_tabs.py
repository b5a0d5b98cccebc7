"""Tabs under the verdict: one view at a time, and the others cost nothing."""

import pytest

from explorer.app.files import Shelf
from explorer.app.history import Work
from explorer.app.look import DARK
from explorer.app.main import build
from explorer.app.shell import Shell
from explorer.app.state import Session
from explorer.app.view_tabs import KINDS, ViewTabs
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped
from tests.app.later import Later

KEYS = [kind.key for kind in KINDS]


@pytest.fixture
def shell() -> Shell:
    return build(shipped()["dune"], shelf=Shelf())


def test_only_the_first_view_is_built_with_the_page(shell: Shell) -> None:
    """The others come when they are first opened."""
    assert list(shell.views.built) == ["sweep"]
    shell.views.open("window")
    assert set(shell.views.built) == {"sweep", "window"}


def test_tabs_are_named_and_one_is_chosen(shell: Shell) -> None:
    """Screen readers hear a list of tabs; arrow keys reach those that Tab passes over."""
    tabs = [node for node in shell.views.bar.nodes if node.properties.get("role") == "tab"]
    assert [tab.properties["text"] for tab in tabs] == [kind.title for kind in KINDS]
    assert [tab.properties["aria-selected"] for tab in tabs] == ["true"] + ["false"] * (len(KINDS) - 1)
    assert [tab.properties["tabindex"] for tab in tabs] == ["0"] + ["-1"] * (len(KINDS) - 1)
    shell.views.bar.report("tab:window")
    assert shell.views.bar.shown("tab:window").properties["aria-selected"] == "true"


@pytest.mark.parametrize("key", KEYS)
def test_every_view_of_the_list_opens(shell: Shell, key: str) -> None:
    """The open view is the visible one."""
    shell.views.open(key)
    visible = [name for name, view in shell.views.built.items() if view.view.visible]
    assert visible == [key] and shell.views[key].is_open


def test_closed_view_does_nothing_and_catches_up_when_opened(shell: Shell) -> None:
    """Turning a dial calls a closed view not even once."""
    sweep, heard = shell.views["sweep"], []
    shell.views.open("ledger")
    follow = sweep.follow
    sweep.follow = lambda changed: (heard.append(changed), follow(changed))
    address = "train.hypo.dose"
    before = list(sweep.plots.plots["ph"].lines.data["ys"][0])
    shell.session.turn(address, 3.0)
    assert heard == []
    assert list(sweep.plots.plots["ph"].lines.data["ys"][0]) == before
    shell.views.open("sweep")
    assert len(heard) == 1 and {"point", "swept"} <= heard[0]
    assert list(sweep.plots.plots["ph"].lines.data["ys"][0]) != before


def test_open_view_is_remembered() -> None:
    """A reload of the tab comes back to it; a name that is no view falls back to the first."""
    work = Work(open_scenario(shipped()["amber"]), choices={"view": "window"})
    session = Session(work)
    session.solve_now()
    tabs = ViewTabs(session)
    assert tabs.shown == "window" and list(tabs.built) == ["window"]
    tabs.open("sweep")
    assert session.choices["view"] == "sweep"
    session.choose(view="fly")
    assert ViewTabs(session).shown == "sweep"


def test_view_built_in_the_dark_is_dark(shell: Shell) -> None:
    """The palette reaches views that come later."""
    shell.views.restyle(DARK)
    assert shell.views["window"].palette is DARK


@pytest.mark.parametrize("key", KEYS)
def test_a_view_is_opened_while_the_results_of_an_opened_file_are_on_their_way(key: str) -> None:
    """The results still there are of a scenario whose dials have gone; the view waits for its own."""
    shell = build(shipped()["amber"], shelf=Shelf())
    runner = shell.session.runner = Later()
    shell.session.replace(open_scenario(shipped()["moss"]), "moss.json")
    shell.views.open(key)
    before = shell.session.scenario.to_dict()
    shell.session.turn_along(50)
    assert shell.session.scenario.to_dict() == before
    runner.work()
    assert shell.views.shown == key and shell.session.swept_here is shell.session.swept
