"""What is served: one page a browser tab, each with a session of its own."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import panel as pn

from explorer.app.files import Shelf, tab_name
from explorer.app.runner import Conflate
from explorer.app.shell import TITLE, Shell
from explorer.app.state import Session, Work
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import default_scenario_path

SHELF = Shelf()
"""Working copies of all tabs of this server."""


def build(path: Path | None = None, asked: str = "", shelf: Shelf = SHELF) -> Shell:
    """The page for one tab.

    path: scenario file to start with, a shipped one where None. asked: name of the working copy the tab asks
    for; unknown names start afresh. Raises ScenarioError where the file cannot be read.
    """
    tab = tab_name(asked)
    work = shelf.take(tab)
    if work is None:
        start = path or default_scenario_path()
        work = Work(open_scenario(start), file_name=start.name)
    session = Session(work, runner=Conflate())
    shelf.keep(tab, session.work)
    session.solve_now()
    return Shell(session, tab)


def create_app(path: Path | None = None) -> Callable[[], pn.Template]:
    """The factory Panel calls for every page load, starting with the scenario at ``path``."""

    def page() -> pn.Template:
        asked = (pn.state.session_args or {}).get("copy", [b""])[0].decode("ascii", "ignore")
        shell = build(path, asked)
        pn.state.curdoc.title = TITLE
        shell.dress()
        return shell.template

    return page
