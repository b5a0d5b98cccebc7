"""The window view: two dials over a map, and where on it every target is met."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import panel as pn

from explorer.app.choosers import dial_picker, range_fields
from explorer.app.entry import Entries
from explorer.app.errand import REST, Errand
from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import MAP_GRID_CSS, PLOT_CARD_CSS, STUDY_STYLES, VIEW_HOST_CSS, Palette
from explorer.app.map_svg import map_height, map_plot
from explorer.app.saving import Plate, save_menu
from explorer.app.state import Session
from explorer.app.study_head import StudyHead
from explorer.app.text import plain
from explorer.app.view import View
from explorer.app.window_drawing import Drawing, drawing
from explorer.app.window_plot import WindowPlot
from explorer.app.window_setting import DEFAULT_READOUT, Setting, WindowChoices
from explorer.scenario.dials import turn_together
from explorer.scenario.model import Scenario
from explorer.studies.progress import Watch
from explorer.studies.window import window
from explorer.studies.window_picture import Region, percent_text


class WindowControls(LiveView):
    """Which dials, over which ranges."""

    css = STUDY_STYLES

    def __init__(self, session: Session, choices: WindowChoices, **settings: Any) -> None:
        self.session, self.choices = session, choices
        self.entries = Entries()
        super().__init__(sizing_mode="stretch_width", **settings)

    def describe(self) -> Node:
        setting = self.choices.setting()
        if setting is None:
            return node("div", "controls", node("span", text="There are no two dials to draw a map of."))
        swap = node(
            "button", "button", text="⇄", key="swap", type="button", title="Exchange the axes",
            aria_label="Exchange the axes", on=lambda value: self._change(),
        )  # fmt: skip
        return node(
            "div", "controls", self._side("x", "Across", setting), self._side("y", "Up", setting), swap
        )

    def _side(self, side: str, word: str, setting: Setting) -> Node:
        dial, ends = (setting.x, setting.x_range) if side == "x" else (setting.y, setting.y_range)
        picked = dial_picker(
            self.session, f"dial-{side}", dial, lambda address: self._change(**{side: address}),
            f"The dial {word.lower()} the map",
        )  # fmt: skip
        fields = range_fields(
            self.entries, f"{side}-", f"the map {word.lower()}", ends, dial,
            lambda ends: self.choices.choose_range(dial, ends),
        )  # fmt: skip
        return node("div", "side", node("div", "group", node("span", text=word), *picked), *fields)

    def _change(self, **side: str) -> None:
        self.entries.forget()
        if side:
            self.choices.choose(**side)
        else:
            self.choices.swap()


class MapLegend(LiveView):
    """Beside the map: what its regions, lines and marks mean."""

    css = STUDY_STYLES

    def __init__(self, view: WindowView, **settings: Any) -> None:
        self.owner = view
        super().__init__(sizing_mode="stretch_width", **settings)

    def describe(self) -> Node:
        drawn = self.owner.drawn
        if drawn is None:
            return node("div", "legend")
        picture = drawn.picture
        regions = [*picture.regions, *([picture.unknown] if picture.unknown else [])]
        lines = [self._line(region) for region in regions]
        if drawn.found.targets:
            lines.insert(
                0, self._entry("swatch clear", None, picture.met.label, percent_text(picture.met.part))
            )
        else:
            lines.insert(0, node("p", "hint", text=NO_TARGETS))
        reasons = [node("p", "hint", text=f"No result: {plain(reason, 120)}.") for reason in picture.reasons]
        return node(
            "div", "legend",
            node("h3", text="Target missed first"),
            node("ul", "", *lines),
            *reasons,
            node("ul", "marks",
                 self._entry("swatch contour", None, picture.quantity.label, ""),
                 self._entry("swatch point", None, "operating point", "")),
            node("p", "hint", text="Click the map to set both dials."),
        )  # fmt: skip

    def _line(self, region: Region) -> Node:
        if region.target is None:
            return self._entry("swatch lost", None, region.label, percent_text(region.part))
        place = region.target % 8
        return self._entry(
            f"swatch hatch-{place}", f"var(--series-{place})", region.label, percent_text(region.part)
        )

    @staticmethod
    def _entry(look: str, colour: str | None, label: str, part: str) -> Node:
        return node(
            "li", "", node("span", look, colour=colour, aria_hidden="true"),
            node("span", "label", text=label), node("span", "part", text=part),
        )  # fmt: skip


NO_TARGETS = "Nothing on the map can miss a target: none is entered. Press a tile above to enter one."


class WindowView(View):
    """Control row, map and legend."""

    watched = ("point", "values", "structure", "choices", "stale")

    def __init__(self, session: Session) -> None:
        super().__init__(session)
        self.choices = WindowChoices(session)
        self.errand = Errand()
        self.drawn: Drawing | None = None
        self.controls = WindowControls(session, self.choices)
        self.plot = WindowPlot(self.set_dials)
        self.legend = MapLegend(self)
        self.head = StudyHead(
            self.errand, self._readout, lambda key: self.choices.choose(readout=key), self._note, self.again,
            "Choose what the contours are of", lambda: save_menu(session, self.plate, "map of two dials"),
        )  # fmt: skip
        self.card = pn.Column(
            self.head,
            pn.pane.Bokeh(self.plot.figure, sizing_mode="stretch_both", margin=0),
            sizing_mode="stretch_both", margin=0, css_classes=["plot"], stylesheets=[PLOT_CARD_CSS],
        )  # fmt: skip
        grid = pn.Column(
            self.card, self.legend, sizing_mode="stretch_both", margin=0, stylesheets=[MAP_GRID_CSS]
        )
        self.view = pn.Column(
            self.controls, grid, sizing_mode="stretch_both", margin=0, stylesheets=[VIEW_HOST_CSS]
        )
        self.errand.param.watch(lambda *events: self._dim(), ["busy", "refusal"])

    def restyle(self, palette: Palette) -> None:
        super().restyle(palette)
        self.plot.restyle(palette)

    def closed(self) -> None:
        super().closed()
        self.errand.drop()

    def again(self) -> None:
        """Begin the map anew."""
        self._calculate(rest=0.0)

    def follow(self, changed: set[str]) -> None:
        if "structure" in changed:
            self.controls.entries.forget()
        if changed & {"structure", "choices"}:
            self.controls.refresh()
            self.head.refresh()
        setting = self.choices.setting()
        if setting is not None:
            self.plot.set_point(*(self.session.value(dial.address) for dial in (setting.x, setting.y)))
        if changed & {"point", "choices"}:
            self._calculate(rest=0.0 if "choices" in changed else REST)
        self._dim()

    def set_dials(self, x: float, y: float) -> None:
        """Turn both dials to a place of the map, as one step."""
        setting = self.choices.setting()
        if setting is None:
            return

        for dial in (setting.x, setting.y):
            if reason := self.session.fixed(dial.address):
                self.session.message = f"{dial.label} {reason}"
                return
        sides = ((setting.x, x), (setting.y, y))
        values = {dial.address: dial.nearest(place) for dial, place in sides}

        def change(scenario: Scenario) -> None:
            turn_together(scenario, values)

        label = f"{setting.x.label} and {setting.y.label}"
        refused = self.session.edit(label, change, rebuild=False)
        if refused:
            self.session.message = refused

    def plate(self) -> Plate | None:
        """The map as it can be saved; None while there is none."""
        drawn, setting = self.drawn, self.choices.setting()
        if drawn is None or setting is None:
            return None
        here = self.session.value(setting.x.address), self.session.value(setting.y.address)
        title = "Which target is missed first" if drawn.found.targets else drawn.picture.quantity.label
        return Plate(
            "map", title, self._note(), lambda: map_plot(drawn, here), drawn.found.table, map_height(drawn)
        )

    # ---- the map -------------------------------------------------------------------------------------

    def _calculate(self, rest: float) -> None:
        """Begin a new map unless the one shown is of the same inputs."""
        setting, scenario = self.choices.setting(), self.session.solved
        if setting is None or scenario is None:
            return

        def work(watch: Watch) -> Iterator[Drawing]:
            maps = window(
                scenario, setting.x.address, setting.y.address, setting.x_range, setting.y_range,
                [setting.readout], watch=watch,
            )  # fmt: skip
            return (drawing(found, setting.readout) for found in maps)

        self.errand.start(work, self._show, rest, lambda: setting.inputs(scenario))

    def _show(self, drawn: Drawing) -> None:
        self.drawn = drawn
        self.plot.show(drawn)
        self.legend.refresh()
        self.head.refresh()
        self._dim()

    def _readout(self) -> str:
        setting = self.choices.setting()
        return DEFAULT_READOUT if setting is None else setting.readout

    def _note(self) -> str:
        if self.drawn is None:
            return ""
        picture = self.drawn.picture
        words = f"contours, {picture.quantity.unit}" if picture.quantity.unit else "contours"
        if self.drawn.found.targets:
            words += f" · all targets met on {percent_text(picture.met.part)} of the map"
        return words

    def _dim(self) -> None:
        """A map that is not of what the session shows is dimmed."""
        old = self.session.stale or bool(self.errand.refusal) or (self.errand.busy and not self._is_new())
        looks = ["plot", "old"] if old else ["plot"]
        if self.card.css_classes != looks:
            self.card.css_classes = looks

    def _is_new(self) -> bool:
        """Whether what is drawn is a coarse map of what is being calculated."""
        return self.drawn is not None and not self.drawn.picture.final
