"""The logarithmic diagram: species against pH, each named on its curve, and the choice of their families."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from bokeh.models import ColumnDataSource
from bokeh.plotting import figure

from explorer.app.line_plot import LinePlot
from explorer.app.live_view import Node, node
from explorer.app.look import Palette
from explorer.app.plot_heads import Head
from explorer.app.plot_parts import lettered, put
from explorer.app.state import Session
from explorer.app.text import plain
from explorer.studies.titration import WATER, Diagram
from explorer.studies.titration_pictures import Name, names_along

USUAL = (WATER, "carbonate")
"""Families shown at first."""


class DiagramPlot(LinePlot):
    """A plot whose curves are named on the curves instead of at their ends; ``mark``: place of its upright
    line, which names keep away from."""

    mark = float("nan")

    def _build(self, *arguments: Any) -> figure:
        fig = super()._build(*arguments)
        self.end.visible = False
        self.names = ColumnDataSource(data={key: [] for key in ("x", "y", "text", "colour")})
        self.name_text = lettered(
            fig, self.names, size=12, text_color="colour", text_align="center", text_baseline="bottom",
            y_offset=-3, background_fill_alpha=0.75, padding=1, border_radius=3, level="annotation",
        )  # fmt: skip
        return fig

    def written(self) -> list[Name]:
        return names_along(self.picture, self.mark)

    def restyle(self, palette: Palette) -> None:
        self.name_text.glyph.background_fill_color = palette.card
        super().restyle(palette)

    def _draw(self) -> None:
        super()._draw()
        found, colours = names_along(self.picture, self.mark), self.lines.data["colour"]
        columns = {
            "x": [name.x for name in found],
            "y": [name.y for name in found],
            "text": [name.text for name in found],
            "colour": [colours[name.line] for name in found],
        }
        put(self.names, columns)


def chosen_families(session: Session, found: Diagram) -> tuple[str, ...]:
    """Families that are shown: those chosen by the user, else the usual ones, if the water has them."""
    kept = session.choices.get("diagram", USUAL)
    return tuple(family.key for family in found.families if family.key in kept)


class FamiliesHead(Head):
    """Chooses the families of species. found: the diagram shown, None before there is one."""

    def __init__(self, session: Session, found: Callable[[], Diagram | None], **settings: Any) -> None:
        self.found = found
        super().__init__(session, **settings)

    def extras(self) -> list[Node]:
        found = self.found()
        if found is None:
            return []
        chosen = chosen_families(self.session, found)
        lines = [
            node("label", "",
                 node("input", key=f"family:{family.key}", type="checkbox", checked=family.key in chosen,
                      on=self._toggle(family.key, chosen)),
                 node("span", text=plain(family.label, 60)))
            for family in found.families
        ]  # fmt: skip
        button = node(
            "button", "button small", text="Families ▾", key="families-button", type="button",
            popovertarget="families", aria_haspopup="dialog", aria_expanded="false",
            title="Families of species shown",
        )  # fmt: skip
        sheet = node("div", "", *lines, key="families", id="families", popover="auto", role="dialog",
                     aria_label="Families of species shown")  # fmt: skip
        return [button, sheet]

    def _toggle(self, key: str, chosen: tuple[str, ...]) -> Callable[[Any], None]:
        def take(on: Any) -> None:
            others = [other for other in chosen if other != key]
            self.session.choose(diagram=[*others, key] if on else others)

        return take
