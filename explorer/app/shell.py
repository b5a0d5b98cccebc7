"""The page: own template, views in their places, theme."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import panel as pn
from panel.theme.native import Native

from explorer.app.bar import Bar
from explorer.app.files import FileDesk, examples
from explorer.app.help import FirstHint, Help
from explorer.app.look import FOLDER, THEMES, Palette, page_css
from explorer.app.meeting import MeetingSwitch, Strip, in_meeting
from explorer.app.options import Options
from explorer.app.rail import Rail
from explorer.app.runner import Conflate
from explorer.app.state import Session
from explorer.app.summary import Foot, Message, Summary
from explorer.app.theme import ThemeSwitch
from explorer.app.tiles import Tiles
from explorer.app.view_tabs import KINDS, ViewTabs

TITLE = "Blendwright"


class Shell:
    """Everything on the page of one session. ``template`` is what is served.

    tab: name of the working copy that a reload of the browser tab asks for, "" for none.
    """

    def __init__(self, session: Session, tab: str = "") -> None:
        self.session = session
        self.theme = ThemeSwitch()
        self.options = Options(session, Conflate(pn.state.curdoc))
        self.files = FileDesk(session, tab=tab)
        self.rail = Rail(session)
        self.bar = Bar(session, examples(), self.files.open_example, self._new)
        self.tiles = Tiles(session)
        self.summary = Summary(session)
        self.message = Message(session)
        self.views = ViewTabs(session)
        self.foot = Foot(session)
        self.help = Help(self._open_view, session.step_along)
        self.hint = FirstHint()
        self.meeting = MeetingSwitch(session)
        self.strip = Strip(session)
        session.param.watch(self._meet, "choices")
        self._meet()
        self.template = self._page()

    @property
    def places(self) -> Mapping[str, pn.viewable.Viewable]:
        """Views by their place in the page."""
        return {
            "bar": self.bar,
            "files": self.files,
            "theme": self.theme,
            "help": self.help,
            "hint": self.hint,
            "meeting": self.meeting,
            "strip": self.strip,
            "rail": self.rail.view,
            "message": self.message,
            "tiles": self.tiles,
            "summary": self.summary,
            "views": self.views.view,
            "foot": self.foot,
        }

    def _new(self) -> None:
        """A scenario with one water, whose analysis is open to be filled in."""
        self.files.new()
        self.rail.desk.open(f"waters.{self.session.scenario.waters[0].id}")
        self.rail.refresh()

    def _meet(self, *events: Any) -> None:
        """In the meeting view the sweep is open, and its plots are large."""
        meeting = in_meeting(self.session)
        if meeting and self.views.shown != "sweep":
            self.views.open("sweep")
        self.views.bar.visible = not meeting

    def _open_view(self, number: int) -> None:
        """Open the view with a number, 1 for the first; others there are not, and the meeting has one."""
        if 0 < number <= len(KINDS) and not in_meeting(self.session):
            self.views.open(KINDS[number - 1].key)

    def _page(self) -> pn.Template:
        markup = (FOLDER / "page.html").read_text(encoding="utf-8")
        template = pn.Template(markup, design=Native)
        template.add_variable("page_css", page_css())
        for name, view in self.places.items():
            template.add_panel(name, view)
        return template

    def dress(self) -> None:
        """Take on the theme now and whenever it is switched; to be called inside the session's document."""
        document = pn.state.curdoc

        def restyle(palette: Palette) -> None:
            with pn.io.hold():
                if document is not None:
                    document.theme = THEMES[palette.scheme]
                self.views.restyle(palette)

        self.theme.follow(restyle)
        # Panel sets a theme of its own while it builds the page; ours has to come after it.
        pn.state.onload(lambda: restyle(self.theme.palette))
