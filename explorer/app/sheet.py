"""Views that are read: texts and tables in the place under the tabs."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, ClassVar

from explorer.app.entry import Entries
from explorer.app.live_view import LiveView, Node
from explorer.app.look import VIEW_STYLES
from explorer.app.state import Session
from explorer.app.view import View


class Sheet(LiveView):
    """Fills its place with what ``describe`` says, and scrolls inside of it."""

    css: ClassVar[tuple[str, ...]] = (*VIEW_STYLES, "sheet.css")

    def __init__(self, describe: Callable[[], Node], **settings: Any) -> None:
        self._describe = describe
        super().__init__(**({"sizing_mode": "stretch_both", "margin": 0} | settings))

    def describe(self) -> Node:
        return self._describe()


class Strip(Sheet):
    """A row of controls over the parts of a view."""

    css: ClassVar[tuple[str, ...]] = (*VIEW_STYLES, "measured.css", "study.css")

    def __init__(self, describe: Callable[[], Node], **settings: Any) -> None:
        super().__init__(describe, **({"sizing_mode": "stretch_width"} | settings))


class SheetView(View):
    """A view that is a :class:`Sheet` and nothing else; a subclass says in :meth:`describe` what is on it."""

    watched = ("point", "stale")

    def __init__(self, session: Session) -> None:
        super().__init__(session)
        self.entries = Entries()
        self.view = Sheet(self.describe)

    def describe(self) -> Node:
        """What the sheet shows now."""
        raise NotImplementedError

    def follow(self, changed: set[str]) -> None:
        self.view.refresh()
