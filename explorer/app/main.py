"""What is served: one page a browser tab, each with a session of its own."""

from __future__ import annotations

import logging
from collections.abc import Callable
from pathlib import Path

import panel as pn

from explorer.app.files import Shelf, tab_name
from explorer.app.history import Work
from explorer.app.runner import Conflate
from explorer.app.shell import TITLE, Shell
from explorer.app.state import Session
from explorer.scenario.files import ScenarioError, open_scenario
from explorer.scenario.shipped import default_scenario_path

logger = logging.getLogger(__name__)

SHELF = Shelf()
"""Working copies of all tabs of this server."""


def build(path: Path | None = None, asked: str = "", shelf: Shelf = SHELF) -> Shell:
    """The page for one tab.

    path: scenario file to start with, a shipped one where None. asked: name of the working copy the tab asks
    for; unknown names start afresh. A file that cannot be read is said so on the page, which then shows the
    shipped demo.
    """
    work, trouble = shelf.take(asked), ""
    # a name that is not known is not taken over: whoever made a link with it would know the copy
    tab = tab_name() if work is None else asked
    if work is None:
        work, trouble = _opened(path)
    session = Session(work, runner=Conflate(pn.state.curdoc))
    shelf.keep(tab, session.work)
    session.solve_now()
    session.message = trouble or session.message
    return Shell(session, tab)


def _opened(path: Path | None) -> tuple[Work, str]:
    trouble = ""
    if path is not None:
        try:
            return Work(open_scenario(path), path.name), ""
        except ScenarioError as error:
            trouble = f"{path.name} was not opened: {error}"
    start = default_scenario_path()
    return Work(open_scenario(start)), trouble


def create_app(path: Path | None = None) -> Callable[[], pn.viewable.Viewable | pn.Template]:
    """The factory Panel calls for every page load, starting with the scenario at ``path``."""

    def page() -> pn.viewable.Viewable | pn.Template:
        asked = (pn.state.session_args or {}).get("copy", [b""])[0].decode("ascii", "ignore")
        pn.state.curdoc.title = TITLE
        try:
            shell = build(path, asked)
            shell.dress()
        except Exception:
            # Panel's own page for errors loads fonts from elsewhere and prints the traceback.
            logger.exception("the page could not be built")
            return pn.pane.HTML("<p>The page could not be built; the log of the server says why.</p>")
        return shell.template

    return page
