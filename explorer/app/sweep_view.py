"""The sweep view: four linked plots over one dial, and the operating point that turns it."""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial

import numpy as np
import panel as pn

from explorer.app.look import MEETING_SCALE, PLOT_CARD_CSS, PLOT_GRID_CSS, VIEW_HOST_CSS, Palette
from explorer.app.measured_panel import Against, Comparisons, MeasuredPanel
from explorer.app.meeting import in_meeting
from explorer.app.options import option_curves
from explorer.app.plot_heads import (
    Head,
    ReadoutHead,
    SpeciesHead,
    family_choice,
    family_names,
    readout_choice,
    stage_choice,
)
from explorer.app.plots import LinkedPlots
from explorer.app.state import Session
from explorer.app.sweep_band import SweepBand
from explorer.app.sweep_controls import PLOTS, SweepControls, large_plot
from explorer.app.view import View
from explorer.scenario.model import MeasuredPoints
from explorer.scenario.outcome import FINISHED
from explorer.scenario.words import in_sentence
from explorer.studies.pictures import Axis, Memory, Picture
from explorer.studies.sweep_pictures import (
    is_finished,
    picture_of,
    picture_of_species,
    swept_axis,
    with_options,
)


class SweepView(View):
    """Control row and plots."""

    watched = ("swept", "point", "choices", "structure", "scenario", "kept")

    def __init__(self, session: Session) -> None:
        super().__init__(session)
        self.comparisons = Comparisons(session, self._added)
        measured = MeasuredPanel(session, self.comparisons, self._against, self._sets)
        self.band = SweepBand(session, self._added)
        self.controls = SweepControls(session, measured, self.band)
        self.plots = LinkedPlots(list(PLOTS), session.turn_along)
        kinds = {"species": SpeciesHead, "chosen": ReadoutHead}
        self.heads: dict[str, Head] = {name: kinds.get(name, Head)(session) for name in PLOTS}
        for name, head in self.heads.items():
            head.saved = partial(self.plots.plate, name)
        self._memory = Memory()
        self.cards = {
            name: pn.Column(
                self.heads[name],
                pn.pane.Bokeh(plot.figure, sizing_mode="stretch_both", margin=0),
                sizing_mode="stretch_both", margin=0, css_classes=["plot"], stylesheets=[PLOT_CARD_CSS],
            )
            for name, plot in self.plots.plots.items()
        }  # fmt: skip
        grid = pn.Column(
            *self.cards.values(), sizing_mode="stretch_both", margin=0, stylesheets=[PLOT_GRID_CSS]
        )
        self.view = pn.Column(
            self.controls, grid, sizing_mode="stretch_both", margin=0, stylesheets=[VIEW_HOST_CSS]
        )

    def restyle(self, palette: Palette) -> None:
        super().restyle(palette)
        self.plots.restyle(palette)

    def closed(self) -> None:
        super().closed()
        for plot in PLOTS:
            self.session.want(f"sweep {plot}", ())
        self.band.rest()

    def show(self) -> None:
        """Bring the plots to the session's sweep."""
        swept = self.session.swept_here
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
        pictures = {
            "ph": self._readout("ph"),
            "species": self._species(),
            "buffer": self._readout("buffer_intensity"),
            "chosen": self._readout(readout_choice(self.session), stage_choice(self.session, "chosen")),
        }
        return pictures, swept_axis(self.session.swept)

    def _readout(self, key: str, stage: str = FINISHED) -> Picture:
        swept, slot = self.session.swept, f"{key} {stage}"
        targets, previous = self.session.scenario.targets, self._memory.limits.get(slot)
        dots = self.comparisons.dots(self._placed(stage), key)
        picture = picture_of(swept, key, targets, previous, dots, stage)
        if is_finished(swept, stage):
            picture = self.band.drawn(picture, key, previous)
        curves = option_curves(self.session)
        if curves:
            picture = with_options(picture, key, curves, previous, stage)
        return self._memory.keep(slot, picture)

    def _species(self) -> Picture:
        family, logarithmic = family_choice(self.session), bool(self.session.choices.get("log"))
        stage = stage_choice(self.session, "species")
        name = family_names(self.session)[family].removesuffix(" species")
        slot = f"{family} {'log ' if logarithmic else ''}{stage}"
        previous = self._memory.limits.get(slot)
        picture = picture_of_species(self.session.swept, family, name, logarithmic, previous, stage)
        return self._memory.keep(slot, picture)

    def _arrange(self) -> None:
        """All plots, or in the meeting view the chosen one, large."""
        large = large_plot(self.session) if in_meeting(self.session) else ""
        for name, card in self.cards.items():
            card.visible = large in ("", name)
        self.plots.enlarge(MEETING_SCALE if large else 1.0)

    def _drawn(self) -> dict[str, tuple[str, str]]:
        """By plot: the readout that is drawn, and at which stage; of the species the pH stands for all."""
        session = self.session
        return {
            "ph": ("ph", FINISHED),
            "species": ("ph", stage_choice(session, "species")),
            "buffer": ("buffer_intensity", FINISHED),
            "chosen": (readout_choice(session), stage_choice(session, "chosen")),
        }

    def follow(self, changed: set[str]) -> None:
        drawn = self._drawn()
        for plot, (key, stage) in drawn.items():
            self.session.want(f"sweep {plot}", [key], stage)
        self.band.follow(tuple(dict.fromkeys(key for key, stage in drawn.values() if stage == FINISHED)))
        if "structure" in changed:
            self._memory.limits.clear()
        if "choices" in changed:
            self._arrange()
        if changed & {"swept", "point", "choices", "kept"}:
            self.show()
        if "point" in changed:
            self.comparisons.follow()
        self.controls.follow(changed)
        if changed & {"structure", "choices"}:
            for head in self.heads.values():
                head.refresh()

    # ---- measured points -----------------------------------------------------------------------------

    def _placed(self, stage: str) -> Iterator[tuple[MeasuredPoints, np.ndarray]]:
        """Sets of measured points that belong to the sweep at a stage, with their dial values."""
        session = self.session
        last = session.point.stages[-1].id
        here = {FINISHED, last} if stage in (FINISHED, last) else {stage}
        for part in session.solved.measured:
            if part.dial == session.swept.address and part.stage in here:
                yield part, np.array([pair[0] for pair in part.points], float)

    def _sets(self) -> list[MeasuredPoints]:
        if self.session.swept is None:
            return []
        stages = dict.fromkeys(stage for _, stage in self._drawn().values())
        return [part for stage in stages for part, _ in self._placed(stage)]

    def _against(self) -> Against | None:
        swept = self.session.swept
        if swept is None:
            return None
        along = swept_axis(swept)
        unit = f", {along.unit}" if along.unit else ""
        return Against({"dial": swept.address}, f"{in_sentence(along.name)}{unit}")

    def _added(self) -> None:
        """There are measured points or bands to be drawn with the curves."""
        self.controls.refresh()
        if self.is_open:
            self.show()
