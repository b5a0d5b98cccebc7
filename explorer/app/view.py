"""What the views under the tabs have in common: they watch the session while they are open."""

from __future__ import annotations

from typing import Any, ClassVar

import panel as pn

from explorer.app.look import LIGHT, Palette
from explorer.app.state import Session


class View:
    """One way of looking at the session. Built when it is first opened, and at rest while it is closed.

    A subclass builds ``view``, the Panel object for the page, in ``__init__``, says in ``watched`` which of
    the session's parameters it depends on, and brings itself up to date in :meth:`follow`. While it is closed
    nothing is called; what it has missed it hears when it is opened. Its key and the title of its tab are
    in the list of ``view_tabs``.
    """

    watched: ClassVar[tuple[str, ...]] = ("point", "structure")
    view: pn.viewable.Viewable

    def __init__(self, session: Session) -> None:
        self.session = session
        self.palette = LIGHT
        self.is_open = False
        self._missed: set[str] = set(self.watched)
        session.param.watch(self._heard, list(self.watched))

    def follow(self, changed: set[str]) -> None:
        """Show the session as it is now; ``changed``: parameters that have changed, all at the first time."""
        raise NotImplementedError

    def restyle(self, palette: Palette) -> None:
        """Take the colours of another palette. Texts and HTML follow the page by themselves."""
        self.palette = palette

    def opened(self) -> None:
        """The view is seen from now on."""
        self.is_open = True
        missed, self._missed = self._missed, set()
        self.follow(missed)

    def closed(self) -> None:
        """The view is seen no longer: work under way ends here."""
        self.is_open = False

    def _heard(self, *events: Any) -> None:
        names = {event.name for event in events}
        if self.is_open:
            self.follow(names)
        else:
            self._missed |= names
