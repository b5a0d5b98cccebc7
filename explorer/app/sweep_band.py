"""The band around the curves of the sweep within which most outcomes lie when everything may be off.

It is calculated once the dials are at rest, apart from the live calculations, and hidden while it belongs to
other curves than those shown.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import replace

import numpy as np

from explorer.app.entry import Entries
from explorer.app.errand import REST, Errand, progress
from explorer.app.live_view import Node, node
from explorer.app.state import Session
from explorer.app.tolerance_setting import anything_off
from explorer.studies.axes import Limits
from explorer.studies.pictures import Layer, Picture, rising
from explorer.studies.progress import Watch
from explorer.studies.spread_pictures import fan_layers, resampled, with_fan
from explorer.studies.spread_survey import POINTS
from explorer.studies.sweep import Sweep
from explorer.studies.tolerance import ToleranceStudy, tolerance

SAMPLES = 256
"""Enough for a band; the tolerance view takes more."""

WIDTHS = {"0": "band off", "50": "50 % band", "90": "90 % band", "95": "95 % band"}
USUAL_WIDTH = "90"


class SweepBand:
    """Bands of the readouts that the sweep plots show. ``changed`` is called when there are others."""

    def __init__(self, session: Session, changed: Callable[[], None]) -> None:
        self.session = session
        self.errand = Errand()
        self._changed = changed
        self._study: ToleranceStudy | None = None
        self._of: Sweep | None = None
        self._asked: Sweep | None = None
        self._readouts: tuple[str, ...] = ()
        self.errand.param.watch(lambda *events: changed(), ["busy", "part", "stopped"])

    @property
    def percent(self) -> float:
        """Part of the outcomes within the band; 0 where none is wanted."""
        return float(self._width())

    def follow(self, readouts: tuple[str, ...]) -> None:
        """See that the band is that of the curves shown."""
        swept = self.session.swept
        if swept is None or not self.percent or not anything_off(self.session):
            self.rest()
        elif swept is not self._asked or readouts != self._readouts:
            self._begin(swept, readouts, REST)

    def rest(self) -> None:
        """Neither show nor calculate anything."""
        self.errand.drop()
        self._asked = self._study = None

    def drawn(self, picture: Picture, key: str, previous: Limits | None) -> Picture:
        """A picture with its band; until there is one its axis stays, so that it does not jump twice."""
        layers = self._layers(key, picture.x)
        if layers:
            return with_fan(picture, layers, previous)
        low, high = picture.limits
        if self.errand.under_way and previous is not None and previous[0] <= low and high <= previous[1]:
            return replace(picture, limits=previous)
        return picture

    def nodes(self, entries: Entries) -> list[Node]:
        """The choice of the band, and how far it is; nothing where nothing may be off."""
        if not anything_off(self.session):
            return []
        choice = entries.choice(
            "band", "Band of outcomes around the curves", WIDTHS, self._width(), self._choose
        )
        return [node("div", "group", progress(self.errand, self._again, "Progress of the band"), choice)]

    # ---- inside --------------------------------------------------------------------------------------

    def _width(self) -> str:
        chosen = self.session.choices.get("band", USUAL_WIDTH)
        return chosen if chosen in WIDTHS else USUAL_WIDTH

    def _choose(self, width: str) -> None:
        self.session.choose(band=width)

    def _layers(self, key: str, x: np.ndarray) -> tuple[Layer, ...]:
        study = self._study
        if study is None or self._of is not self.session.swept or key not in study.fan.values:
            return ()
        return resampled(fan_layers(study, key, [self.percent]), rising(study.x, study.x), x)

    def _again(self) -> None:
        if self._asked is not None:
            self._begin(self._asked, self._readouts, 0.0)

    def _begin(self, swept: Sweep, readouts: tuple[str, ...], rest: float) -> None:
        self._asked, self._readouts, scenario = swept, readouts, self.session.solved

        def work(watch: Watch) -> Iterator[ToleranceStudy]:
            x = swept.x
            return tolerance(
                scenario, swept.address, float(x[0]), float(x[-1]), min(POINTS, len(x)), readouts,
                samples=SAMPLES, watch=watch,
            )  # fmt: skip

        def show(study: ToleranceStudy) -> None:
            self._study, self._of = study, swept
            self._changed()

        self.errand.start(work, show, rest)
