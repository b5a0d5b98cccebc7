"""The titration view: how a water answers acid or base, and which species it holds at which pH."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import partial

import numpy as np
import panel as pn

from explorer.app.diagram_plot import DiagramPlot, FamiliesHead, chosen_families
from explorer.app.look import PLOT_CARD_CSS, TITRATION_GRID_CSS, VIEW_HOST_CSS, Palette
from explorer.app.measured_panel import Against, Comparisons, MeasuredPanel
from explorer.app.plot_heads import Head
from explorer.app.plots import LinkedPlots
from explorer.app.runner import Conflate
from explorer.app.state import Session
from explorer.app.titration_controls import TitrationControls
from explorer.app.titration_setting import Setting, setting
from explorer.app.view import View
from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import Outcome
from explorer.scenario.model import MeasuredPoints, Scenario
from explorer.scenario.words import in_sentence
from explorer.studies.pictures import Axis, Memory, Picture
from explorer.studies.titration import Diagram, Titration, diagram, titration
from explorer.studies.titration_pictures import (
    PH_AXIS,
    diagram_picture,
    doses_of,
    titration_axis,
    titration_picture,
)

CURVES = {"titration-ph": "ph", "titration-buffer": "buffer_intensity"}
"""Plots over the dose and what they show."""

DIAGRAM = "diagram"

MARK_STEP = 1e-9
"""A mark nearer to its place than this is not moved."""


@dataclass(frozen=True)
class Found:
    """One calculation: what was asked, of which scenario, and both results, or why there are none."""

    setting: Setting
    scenario: Scenario
    point: Outcome
    curve: Titration | None = None
    species: Diagram | None = None
    refusal: str = ""


class TitrationView(View):
    """Controls, two plots over the dose, and the logarithmic diagram."""

    watched = ("point", "choices")

    def __init__(self, session: Session) -> None:
        super().__init__(session)
        self.found: Found | None = None
        self.comparisons = Comparisons(session, self._compared)
        measured = MeasuredPanel(session, self.comparisons, self._against, self._sets)
        self.controls = TitrationControls(session, measured, self.setting, self._keep)
        self.curves = LinkedPlots(list(CURVES), columns=1, saved_as="titration")
        self.species = LinkedPlots([DIAGRAM], columns=1, kind=DiagramPlot, saved_as="diagram")
        self.heads: dict[str, Head] = {name: Head(session) for name in CURVES}
        self.heads[DIAGRAM] = FamiliesHead(session, lambda: self.found.species if self.found else None)
        for name, head in self.heads.items():
            head.saved = partial((self.species if name == DIAGRAM else self.curves).plate, name)
        self._memory = Memory()
        self._runner = Conflate(pn.state.curdoc)
        grid = pn.Column(
            *(self._card(name) for name in (*CURVES, DIAGRAM)),
            sizing_mode="stretch_both", margin=0, stylesheets=[TITRATION_GRID_CSS],
        )  # fmt: skip
        self.view = pn.Column(
            self.controls, grid, sizing_mode="stretch_both", margin=0, stylesheets=[VIEW_HOST_CSS]
        )

    def _card(self, name: str) -> pn.Column:
        plot = (self.curves.plots | self.species.plots)[name]
        return pn.Column(
            self.heads[name],
            pn.pane.Bokeh(plot.figure, sizing_mode="stretch_both", margin=0),
            sizing_mode="stretch_both", margin=0, css_classes=["plot", name], stylesheets=[PLOT_CARD_CSS],
        )  # fmt: skip

    def setting(self) -> Setting | None:
        """What is shown, or will be once it is worked out; None without a result."""
        if self.session.point is None:
            return None
        kept = self.session.choices.get("titration", {})
        return setting(kept, self.session.solved, self.session.point)

    def restyle(self, palette: Palette) -> None:
        super().restyle(palette)
        self.curves.restyle(palette)
        self.species.restyle(palette)

    # ---- calculating ---------------------------------------------------------------------------------

    def follow(self, changed: set[str]) -> None:
        wanted = self.setting()
        if wanted is None:
            self.controls.refresh()
            return
        same = self.found is not None and self.found.point is self.session.point
        if same and self.found.setting == wanted:
            self.show()
            return
        scenario, point = self.session.solved, self.session.point
        self.controls.refresh()
        self._runner.submit(lambda: worked_out(wanted, scenario, point), self._take)
        if not same:
            self.comparisons.follow()

    def _take(self, found: Found) -> None:
        self.found = found
        self.show()

    def _compared(self) -> None:
        if self.is_open and self.found is not None:
            self.show()

    # ---- showing -------------------------------------------------------------------------------------

    def show(self) -> None:
        """Bring the plots to what was found last; after a refusal they stay as they are."""
        found = self.found
        self.controls.refusal, self.controls.waiting = found.refusal, False
        self.controls.refresh()
        if found.curve is None or found.species is None:
            return
        along, pictures = self._along(found), {}
        for name, key in CURVES.items():
            pictures[name] = self._curve(found, key, along)
        self.curves.set_axis(along)
        self.curves.show(pictures, along)
        self.curves.set_point(0.0, MARK_STEP)
        pictures[DIAGRAM] = diagram_picture(found.species, chosen_families(self.session, found.species))
        self.species.set_axis(PH_AXIS)
        self.species.plots[DIAGRAM].mark = found.species.own_ph
        self.species.show({DIAGRAM: pictures[DIAGRAM]}, PH_AXIS)
        self.species.set_point(found.species.own_ph, MARK_STEP)
        for name, picture in pictures.items():
            self.heads[name].say(picture)
        self.heads[DIAGRAM].refresh()

    def _along(self, found: Found) -> Axis:
        known = found.scenario.known_chemicals()
        opposite = known[found.setting.opposite].name if found.setting.opposite else ""
        return titration_axis(found.curve, known[found.setting.chemical].name, opposite)

    def _curve(self, found: Found, key: str, along: Axis) -> Picture:
        # Targets are about the finished water alone.
        finished = found.curve.stage == found.point.stage().id
        targets = found.scenario.targets if finished else ()
        dots = self.comparisons.dots(self._placed(found), key)
        slot = f"{key} {found.setting}"
        previous = self._memory.limits.get(slot)
        return self._memory.keep(slot, titration_picture(found.curve, key, along, targets, dots, previous))

    # ---- measured points -----------------------------------------------------------------------------

    def _placed(self, found: Found) -> Iterator[tuple[MeasuredPoints, np.ndarray]]:
        """Sets of measured points that belong to the curve, with their doses in its unit."""
        known = found.scenario.known_chemicals()
        for part in found.scenario.measured:
            x = doses_of(part, found.curve, found.point, known)
            if x is not None and part.readout in CURVES.values():
                yield part, x

    def _sets(self) -> list[MeasuredPoints]:
        if self.found is None or self.found.curve is None:
            return []
        return [part for part, _ in self._placed(self.found)]

    def _against(self) -> Against | None:
        now = self.setting()
        if now is None:
            return None
        known = self.session.solved.known_chemicals()
        axis = {"chemical": now.chemical, "unit": now.unit}
        axis |= {"opposite": now.opposite} if now.opposite else {}
        words = f"the dose of {in_sentence(known[now.chemical].name)}, {now.unit}"
        return Against({"titration": axis, "stage": now.stage}, words)

    # ---- choices -------------------------------------------------------------------------------------

    def _keep(self, wanted: Setting) -> None:
        self.session.choose(titration=wanted.remembered())


def worked_out(wanted: Setting, scenario: Scenario, point: Outcome) -> Found:
    """Both results for a setting; never raises for what the user can mend."""
    try:
        curve = titration(
            scenario, wanted.stage, wanted.chemical, start=wanted.start, stop=wanted.stop, unit=wanted.unit,
            opposite=wanted.opposite or None, season=point.season,
        )  # fmt: skip
        return Found(wanted, scenario, point, curve, diagram(point, wanted.stage))
    except ScenarioError as error:
        return Found(wanted, scenario, point, refusal=str(error))
