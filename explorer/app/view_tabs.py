"""The tabs under the verdict, and the view that is open. A view costs nothing until it is first opened."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import panel as pn

from explorer.app.basis_view import BasisView
from explorer.app.compare_view import CompareView
from explorer.app.ledger_view import LedgerView
from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import LIGHT, VIEW_HOST_CSS, VIEW_STYLES, Palette
from explorer.app.quantities_view import QuantitiesView
from explorer.app.state import Session
from explorer.app.sweep_view import SweepView
from explorer.app.titration_view import TitrationView
from explorer.app.tolerance_view import ToleranceView
from explorer.app.view import View
from explorer.app.window_view import WindowView


@dataclass(frozen=True)
class Kind:
    """A view there is: its key and title, and what makes it."""

    key: str
    title: str
    build: Callable[[Session], View]


KINDS = (
    Kind("sweep", "Sweep", SweepView),
    Kind("window", "Window", WindowView),
    Kind("tolerance", "Tolerance", ToleranceView),
    Kind("titration", "Titration", TitrationView),
    Kind("compare", "Compare", CompareView),
    Kind("ledger", "Ledger", LedgerView),
    Kind("quantities", "Quantities", QuantitiesView),
    Kind("basis", "Basis", BasisView),
)
"""Views in the order of their tabs; the first is open at first.

Their modules are loaded with this one: a component whose class is made while a page is connected is sent to
it with its class, which that page cannot send back.
"""


class TabBar(LiveView):
    """The row of tabs."""

    css = VIEW_STYLES

    def __init__(self, chosen: str, choose: Callable[[str], None], **settings: Any) -> None:
        self.chosen, self.choose = chosen, choose
        super().__init__(sizing_mode="stretch_width", **settings)
        self.refresh()

    def describe(self) -> Node:
        return node("div", "tabs", *map(self._tab, KINDS), role="tablist", aria_label="Views")

    def _tab(self, kind: Kind) -> Node:
        chosen = kind.key == self.chosen
        return node(
            "button", "", text=kind.title, key=f"tab:{kind.key}", type="button", role="tab",
            aria_selected=str(chosen).lower(), tabindex="0" if chosen else "-1",
            on=lambda value: self.choose(kind.key),
        )  # fmt: skip


class ViewTabs:
    """Tab bar and the open view below it. ``view`` is the Panel object for the page."""

    def __init__(self, session: Session) -> None:
        self.session = session
        self.palette = LIGHT
        self.built: dict[str, View] = {}
        remembered = session.choices.get("view")
        self.shown = remembered if remembered in {kind.key for kind in KINDS} else KINDS[0].key
        self.bar = TabBar(self.shown, self.open)
        self.view = pn.Column(
            self.bar, sizing_mode="stretch_both", margin=0, stylesheets=[VIEW_HOST_CSS]
        )  # fmt: skip
        self._open()

    def __getitem__(self, key: str) -> View:
        """The view of this kind, built if it has not been opened yet. Raises KeyError for an unknown one."""
        if key not in self.built:
            kind = {kind.key: kind for kind in KINDS}[key]
            view = self.built[key] = kind.build(self.session)
            view.view.visible = False
            view.restyle(self.palette)
            self.view.append(view.view)
        return self.built[key]

    def open(self, key: str) -> None:
        """Show another view in place of the open one."""
        if key == self.shown:
            return
        before = self[self.shown]
        before.closed()
        before.view.visible = False
        self.shown = self.bar.chosen = key
        # Before it is opened, so that the new view follows once and not twice.
        self.session.choose(view=key)
        self._open()
        self.bar.refresh()

    def restyle(self, palette: Palette) -> None:
        """Take the colours of another palette, in all views that have been built."""
        self.palette = palette
        for view in self.built.values():
            view.restyle(palette)

    def _open(self) -> None:
        view = self[self.shown]
        view.opened()
        view.view.visible = True
