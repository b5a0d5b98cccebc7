"""The sweep view: four linked plots over one dial, and the operating point that turns it."""

from __future__ import annotations

import panel as pn

from explorer.app.look import PLOT_CARD_CSS, PLOT_GRID_CSS, VIEW_HOST_CSS, Palette
from explorer.app.options import option_curves
from explorer.app.plot_heads import (
    Head,
    ReadoutHead,
    SpeciesHead,
    family_choice,
    family_names,
    readout_choice,
)
from explorer.app.plots import LinkedPlots
from explorer.app.state import Session
from explorer.app.sweep_controls import SweepControls
from explorer.app.view import View
from explorer.studies.pictures import Axis, Memory, Picture
from explorer.studies.sweep_pictures import picture_of, picture_of_species, swept_axis, with_options

PLOTS = ("ph", "species", "buffer", "chosen")
"""Plots in reading order; the second column carries the labels of the species at its right."""


class SweepView(View):
    """Control row and plots."""

    watched = ("swept", "point", "choices", "structure", "kept")

    def __init__(self, session: Session) -> None:
        super().__init__(session)
        self.controls = SweepControls(session)
        self.plots = LinkedPlots(list(PLOTS), self._turned)
        kinds = {"species": SpeciesHead, "chosen": ReadoutHead}
        self.heads: dict[str, Head] = {name: kinds.get(name, Head)(session) for name in PLOTS}
        self._memory = Memory()
        cards = [
            pn.Column(
                self.heads[name],
                pn.pane.Bokeh(plot.figure, sizing_mode="stretch_both", margin=0),
                sizing_mode="stretch_both", margin=0, css_classes=["plot"], stylesheets=[PLOT_CARD_CSS],
            )
            for name, plot in self.plots.plots.items()
        ]  # fmt: skip
        grid = pn.Column(*cards, sizing_mode="stretch_both", margin=0, stylesheets=[PLOT_GRID_CSS])
        self.view = pn.Column(
            self.controls, grid, sizing_mode="stretch_both", margin=0, stylesheets=[VIEW_HOST_CSS]
        )

    def restyle(self, palette: Palette) -> None:
        super().restyle(palette)
        self.plots.restyle(palette)

    def closed(self) -> None:
        super().closed()
        self.session.want("sweep", ())

    def show(self) -> None:
        """Bring the plots to the session's sweep."""
        swept = self.session.swept
        if swept is None or swept.address not in self.session.dials:
            return  # another scenario: its sweep is on the way
        pictures, along = self.pictures()
        self.plots.set_axis(along)
        self.plots.show(pictures, along)
        for name, picture in pictures.items():
            self.heads[name].say(picture)
        self.plots.set_point(self.session.value(swept.address), swept.dial.step)

    def pictures(self) -> tuple[dict[str, Picture], Axis]:
        """What the plots show, from the session's sweep and choices alone."""
        pictures = {
            "ph": self._readout("ph"),
            "species": self._species(),
            "buffer": self._readout("buffer_intensity"),
            "chosen": self._readout(readout_choice(self.session)),
        }
        return pictures, swept_axis(self.session.swept)

    def _readout(self, key: str) -> Picture:
        targets, previous = self.session.scenario.targets, self._memory.limits.get(key)
        picture = picture_of(self.session.swept, key, targets, previous)
        curves = option_curves(self.session)
        if curves:
            picture = with_options(picture, key, curves, previous)
        return self._memory.keep(key, picture)

    def _species(self) -> Picture:
        family, logarithmic = family_choice(self.session), bool(self.session.choices.get("log"))
        name = family_names(self.session)[family].removesuffix(" species")
        slot = f"{family} log" if logarithmic else family
        previous = self._memory.limits.get(slot)
        picture = picture_of_species(self.session.swept, family, name, logarithmic, previous)
        return self._memory.keep(slot, picture)

    def _want(self) -> None:
        self.session.want("sweep", ["ph", "buffer_intensity", readout_choice(self.session)])

    def _turned(self, x: float) -> None:
        """The operating point was moved to ``x``: turn the dial to its nearest step within its bounds."""
        swept = self.session.swept
        if swept is None:
            return
        dial = swept.dial
        value = round(round(x / dial.step) * dial.step, 10)
        value = max(value, dial.low) if dial.high is None else min(max(value, dial.low), dial.high)
        refused = self.session.turn(swept.address, value)
        if refused:
            self.session.message = refused

    def follow(self, changed: set[str]) -> None:
        self._want()
        if "structure" in changed:
            self._memory.limits.clear()
        if changed & {"swept", "point", "choices", "kept"}:
            self.show()
        if changed & {"structure", "choices"}:
            for head in self.heads.values():
                head.refresh()
