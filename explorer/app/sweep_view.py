"""The sweep view: four linked plots over one dial, and the operating point that turns it."""

from __future__ import annotations

from typing import Any

import numpy as np
import panel as pn

from explorer.app.look import PLOT_CARD_CSS, PLOT_GRID_CSS, VIEW_HOST_CSS, Palette
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
from explorer.app.text import compact, plain, unit_text
from explorer.scenario.readouts import READOUTS, Readout
from explorer.studies.pictures import (
    Axis,
    Memory,
    Missing,
    Picture,
    Quantity,
    axis,
    readout_picture,
    rising,
    species_picture,
)
from explorer.studies.sweep import Sweep

PLOTS = ("ph", "species", "buffer", "chosen")
"""Plots in reading order; the second column carries the labels of the species at its right."""


def quantity_of(readout: Readout) -> Quantity:
    """A readout as the plots name it."""
    return Quantity(
        compact(readout.label),
        unit_text(readout.unit),
        readout.digits,
        readout.significant,
        readout.sign_words is not None,
    )


def missing(swept: Sweep, key: str | None = None) -> Missing:
    """Stretches of a sweep without a result, as the plots draw them: half a step beyond their points."""
    half = abs(float(swept.x[1] - swept.x[0])) / 2
    low, high = sorted((float(swept.x[0]), float(swept.x[-1])))
    return tuple(
        (max(min(gap.start, gap.stop) - half, low), min(max(gap.start, gap.stop) + half, high), gap.reason)
        for gap in swept.gaps(key)
    )


class SweepView:
    """Control row and plots. ``view`` is the Panel object for the page."""

    def __init__(self, session: Session) -> None:
        self.session = session
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
        self._want()
        session.param.watch(self._changed, ["swept", "point", "choices", "structure"])
        self.show()

    def restyle(self, palette: Palette) -> None:
        """Take the colours of another palette."""
        self.plots.restyle(palette)

    def show(self) -> None:
        """Bring the plots to the session's sweep."""
        swept = self.session.swept
        if swept is None:
            return
        pictures, along = self.pictures()
        self.plots.set_axis(along)
        self.plots.show(pictures, along)
        for name, picture in pictures.items():
            self.heads[name].say(picture)
        self.plots.set_point(self.session.value(swept.address), swept.dial.step)

    def pictures(self) -> tuple[dict[str, Picture], Axis]:
        """What the plots show, from the session's sweep and choices alone."""
        swept = self.session.swept
        x = rising(swept.x, swept.x)
        along = axis(plain(swept.dial.label, 60), unit_text(swept.dial.unit), x)
        pictures = {
            "ph": self._readout("ph", x, along),
            "species": self._species(x, along),
            "buffer": self._readout("buffer_intensity", x, along),
            "chosen": self._readout(readout_choice(self.session), x, along),
        }
        return pictures, along

    def _readout(self, key: str, x: np.ndarray, along: Axis) -> Picture:
        readout, swept = READOUTS[key], self.session.swept
        targets = [(t.low, t.high) for t in self.session.scenario.targets if t.readout == key]
        y = rising(swept.x, swept.outcome.readout(key))
        previous = self._memory.limits.get(key)
        picture = readout_picture(
            quantity_of(readout), x, y, along, targets, missing(swept, key), previous, readout.slack
        )
        return self._memory.keep(key, picture)

    def _species(self, x: np.ndarray, along: Axis) -> Picture:
        swept = self.session.swept
        family, logarithmic = family_choice(self.session), bool(self.session.choices.get("log"))
        found = swept.outcome.solution("finished").family(family)
        members = {name: rising(swept.x, amount) for name, amount in found.items()}
        name = family_names(self.session)[family].removesuffix(" species")
        slot = f"{family} log" if logarithmic else family
        previous = self._memory.limits.get(slot)
        picture = species_picture(name, members, x, along, logarithmic, missing(swept), previous)
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

    def _changed(self, *events: Any) -> None:
        names = {event.name for event in events}
        if names & {"choices"}:
            self._want()
        if names & {"structure"}:
            self._memory.limits.clear()
        if names & {"swept", "point", "choices"}:
            self.show()
        if names & {"structure", "choices"}:
            for head in self.heads.values():
                head.refresh()
