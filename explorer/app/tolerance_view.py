"""The tolerance view: how far the results spread when everything that may be off is off."""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial
from typing import Any

import panel as pn

from explorer.app import tolerance_setting as settings
from explorer.app.distribution_plot import DistributionPlot
from explorer.app.entry import Entries
from explorer.app.errand import REST, Errand
from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import PLOT_CARD_CSS, SPREAD_GRID_CSS, STUDY_STYLES, VIEW_HOST_CSS, Palette
from explorer.app.pickers import segments
from explorer.app.plots import LinkedPlots
from explorer.app.saving import Plate, save_menu
from explorer.app.state import Session
from explorer.app.study_head import StudyHead
from explorer.app.text import compact
from explorer.app.tolerance_allowed import AllowedCard
from explorer.app.tolerance_results import Figures, RankingBars
from explorer.app.tolerance_table import ToleranceTable
from explorer.app.view import View
from explorer.report.svg_spread import distribution_plot
from explorer.studies.axes import Limits
from explorer.studies.pictures import Memory, Picture, rising
from explorer.studies.progress import Watch
from explorer.studies.spread_pictures import (
    Distribution,
    chance_text,
    distribution,
    fan_layers,
    resampled,
    with_fan,
)
from explorer.studies.spread_survey import Survey, survey
from explorer.studies.sweep_pictures import picture_of, swept_axis

FAN = "fan"


class ToleranceControls(LiveView):
    """Which page, how many samples, and the answer in a few words."""

    css = STUDY_STYLES

    def __init__(self, view: ToleranceView, **properties: Any) -> None:
        self.owner = view
        self.entries = Entries()
        super().__init__(sizing_mode="stretch_width", **properties)

    def describe(self) -> Node:
        session = self.owner.session
        setting = settings.setting(session)
        count = len(session.scenario.tolerances)
        pages = {
            settings.RESULTS: ("Results", "What the tolerances do"),
            settings.TABLE: (f"What may be off ({count})", "The tolerances themselves"),
        }
        chosen = settings.page(session)
        closed = () if settings.anything_off(session) else (settings.RESULTS,)
        switch = segments(
            "page", "Page", pages, chosen, lambda page: settings.choose(session, page=page), closed
        )
        counts = {str(count): str(count) for count in settings.SAMPLES}
        samples = self.entries.choice(
            "samples", "Samples", counts, str(setting.samples),
            lambda count: settings.choose(session, samples=int(count)),
        )  # fmt: skip
        seed, refused = self.entries.number(
            "seed", "Seed of the random numbers", str(setting.seed), self._sow, low=0, high=settings.MOST_SEED
        )
        return node(
            "div", "controls", switch, node("span", "answer", text=self._answer(), role="status"),
            node("div", "group push",
                 samples, node("span", text="samples"), node("span", text="· seed"), seed),
            refused,
        )  # fmt: skip

    def _sow(self, seed: float) -> str:
        if seed != int(seed):
            return f"{seed:g} is no seed; allowed a whole number"
        settings.choose(self.owner.session, seed=int(seed))
        return ""

    def _answer(self) -> str:
        found = self.owner.found
        if found is None:
            return ""
        study = found.study
        if not study.targets:
            return f"{len(study.inputs)} cause{'s' if len(study.inputs) > 1 else ''} of error"
        chance = chance_text(float(study.here.chance_of_all()[0]))
        return f"All entered targets are met in {chance} of the outcomes."


class DistributionHead(LiveView):
    """Above the distribution."""

    css = STUDY_STYLES

    def __init__(self, view: ToleranceView, **properties: Any) -> None:
        self.owner = view
        super().__init__(sizing_mode="stretch_width", **properties)

    def describe(self) -> Node:
        shown = self.owner.distribution
        words = shown.most if shown is not None else ""
        return node(
            "div", "head", node("h3", "title", text="Operating point"),
            node("span", "note", text=words, title=words),
            *save_menu(self.owner.session, self.owner.plate, "distribution"),
        )  # fmt: skip


class ToleranceView(View):
    """Results of a survey on one page, the tolerances on the other."""

    watched = ("point", "swept", "structure", "choices", "stale")

    def __init__(self, session: Session) -> None:
        super().__init__(session)
        self.errand = Errand()
        self.found: Survey | None = None
        self.distribution: Distribution | None = None
        self._memory = Memory()
        self._limits: dict[str, Limits] = {}
        self.plots = LinkedPlots((FAN,), session.turn_along, columns=1, saved_as="spread")
        self.histogram = DistributionPlot()
        self.controls = ToleranceControls(self)
        self.head = StudyHead(
            self.errand, lambda: settings.setting(session).readout,
            lambda key: settings.choose(session, readout=key), self._note, self.again,
            "Choose the readout whose spread is shown",
            lambda: save_menu(session, partial(self.plots.plate, FAN), "spread along the sweep"),
        )  # fmt: skip
        self.distribution_head = DistributionHead(self)
        self.figures = Figures(session, lambda: self.found)
        self.bars = RankingBars(session, lambda: self.found)
        self.allowed = AllowedCard(session, lambda: settings.setting(session).readout)
        self.cards = [
            _card(self.head, _plot(self.plots.plots[FAN].figure)),
            _card(self.distribution_head, _plot(self.histogram.figure)),
            _card(self.figures, mode="stretch_width"),
            _card(self.bars, self.allowed, mode="stretch_width"),
        ]
        grid = pn.Column(*self.cards, sizing_mode="stretch_both", margin=0, stylesheets=[SPREAD_GRID_CSS])
        self.results = pn.Column(grid, sizing_mode="stretch_both", margin=0, stylesheets=[VIEW_HOST_CSS])
        self.table = ToleranceTable(session)
        self.view = pn.Column(
            self.controls, self.results, self.table, sizing_mode="stretch_both", margin=0,
            stylesheets=[VIEW_HOST_CSS],
        )  # fmt: skip
        self.errand.param.watch(lambda *events: self._dim(), ["busy", "refusal"])

    def restyle(self, palette: Palette) -> None:
        super().restyle(palette)
        self.plots.restyle(palette)
        self.histogram.restyle(palette)

    def closed(self) -> None:
        super().closed()
        self.errand.drop()
        self.allowed.drop()
        self.figures.errand.drop()

    def again(self) -> None:
        """Begin the survey anew."""
        self._calculate(rest=0.0)

    def follow(self, changed: set[str]) -> None:
        if "structure" in changed:
            self._memory.limits.clear()
            self._limits.clear()
        if changed & {"structure", "choices"}:
            page = settings.page(self.session)
            self.results.visible, self.table.visible = page == settings.RESULTS, page == settings.TABLE
            self.controls.refresh()
            self.head.refresh()
        if "point" in changed or changed & {"structure", "choices"}:
            self._refresh_table()
            self.allowed.follow()
            self._calculate(rest=0.0 if "choices" in changed else REST)
        self._show_fan()
        self._dim()

    # ---- the survey ----------------------------------------------------------------------------------

    def _calculate(self, rest: float) -> None:
        """Begin a new survey unless the one shown is of the same inputs."""
        scenario, setting = self.session.solved, settings.setting(self.session)
        if scenario is None:
            return
        if not settings.anything_off(self.session):
            self.errand.forget()
            self.found = None
            self.controls.refresh()
            return

        def work(watch: Watch) -> Iterator[Survey]:
            return survey(scenario, setting.readout, setting.samples, setting.seed, watch)

        self.errand.start(work, self._show, rest, lambda: setting.inputs(scenario))

    def _show(self, found: Survey) -> None:
        self.found = found
        self.distribution = distribution(found.study, found.readout, self._limits.get(found.readout))
        self._limits[found.readout] = self.distribution.limits
        self.histogram.show(self.distribution)
        self._show_fan()
        for part in (self.controls, self.head, self.distribution_head, self.figures, self.bars):
            part.refresh()
        self._dim()

    def _show_fan(self) -> None:
        """The curve of the session's sweep with the fan that is known of it."""
        swept = self.session.swept_here
        if swept is None:
            return
        picture, along = self.picture(), swept_axis(swept)
        self.plots.set_axis(along)
        self.plots.show({FAN: picture}, along)
        self.plots.set_point(self.session.value(swept.address), swept.dial.step)

    def picture(self) -> Picture:
        """What the fan plot shows."""
        swept, key = self.session.swept, settings.setting(self.session).readout
        previous = self._memory.limits.get(key)
        picture = picture_of(swept, key, self.session.scenario.targets, previous)
        study = self.found.study if self.found is not None and self.found.readout == key else None
        if study is not None and study.dial.address == swept.address:
            layers = resampled(fan_layers(study, key), rising(study.x, study.x), picture.x)
            picture = with_fan(picture, layers, previous)
        return self._memory.keep(key, picture)

    def plate(self) -> Plate | None:
        """The distribution as it can be saved; None while there is none."""
        found = self.distribution
        if found is None:
            return None
        what = compact(found.readout.label)
        title = f"{what} at the operating point"
        return Plate(f"distribution {what}", title, found.most, lambda: distribution_plot(found), found.table)

    def _note(self) -> str:
        if self.found is None:
            return ""
        return "50 % and 95 % of the outcomes"

    def _refresh_table(self) -> None:
        if self.table.visible:
            self.table.refresh()

    def _dim(self) -> None:
        """Results that are not of what the session shows are dimmed."""
        old = self.session.stale or bool(self.errand.refusal)
        looks = ["plot", "old"] if old else ["plot"]
        for card in self.cards:
            if card.css_classes != looks:
                card.css_classes = looks


def _card(*parts: pn.viewable.Viewable, mode: str = "stretch_both") -> pn.Column:
    return pn.Column(*parts, sizing_mode=mode, margin=0, css_classes=["plot"], stylesheets=[PLOT_CARD_CSS])


def _plot(figure: Any) -> pn.pane.Bokeh:
    return pn.pane.Bokeh(figure, sizing_mode="stretch_both", margin=0)
