"""The row above the sweep plots: which dial on x, and over which range."""

from __future__ import annotations

from typing import Any

from explorer.app.choosers import default_range, dial_picker, range_fields
from explorer.app.entry import Entries, show_number
from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import STUDY_STYLES
from explorer.app.measured_panel import MeasuredPanel
from explorer.app.meeting import in_meeting
from explorer.app.pickers import segments
from explorer.app.plot_heads import readout_choice
from explorer.app.state import Session
from explorer.app.sweep_band import SweepBand
from explorer.app.text import plain, unit_text
from explorer.scenario.dials import Dial
from explorer.scenario.readouts import READOUTS
from explorer.scenario.words import brief_label
from explorer.studies.sweep import Sweep


def gap_words(swept: Sweep | None) -> str:
    """Where the sweep has no result and why, "" where it has results all along."""
    gaps = swept.gaps() if swept is not None else []
    if not gaps:
        return ""
    first = gaps[0]
    start, stop = sorted((first.start, first.stop))
    unit = unit_text(swept.dial.unit)
    place = (
        f"at {show_number(start)}" if start == stop else f"from {show_number(start)} to {show_number(stop)}"
    )
    more = f", and {len(gaps) - 1} more" if len(gaps) > 1 else ""
    return f"▲ No result {place}{' ' if unit else ''}{unit}: {plain(first.reason, 120)}{more}"


def _range_of(swept: Sweep | None) -> tuple[str, float, float]:
    return ("", 0.0, 0.0) if swept is None else (swept.address, float(swept.x[0]), float(swept.x[-1]))


PLOTS = ("ph", "species", "buffer", "chosen")
"""Plots in reading order; the second column carries the labels of the species at its right."""


def large_plot(session: Session) -> str:
    """The plot that the meeting view shows."""
    chosen = session.choices.get("large")
    return chosen if chosen in PLOTS else PLOTS[0]


class SweepControls(LiveView):
    """Changes the sweep of the scenario, and the points measured along it."""

    css = (*STUDY_STYLES, "measured.css")

    def __init__(self, session: Session, measured: MeasuredPanel, band: SweepBand, **settings: Any) -> None:
        self.session, self.measured, self.band = session, measured, band
        self.entries = Entries()
        self._shown = (gap_words(session.swept), *_range_of(session.swept))
        super().__init__(sizing_mode="stretch_width", **settings)
        self.refresh()

    def describe(self) -> Node:
        dial = dial_picker(
            self.session, "dial", self._swept_dial(), self._choose_dial, "The dial along the x axis"
        )
        if in_meeting(self.session):
            return node(
                "div", "controls", self._plots(), node("span", "gap", text=self._shown[0], role="status")
            )
        return node(
            "div", "controls",
            node("div", "group", node("span", text="Sweep"), *dial),
            *self._range(),
            node("span", "rule", text=self._rule(), title=self._rule() or None),
            node("span", "gap", text=self._shown[0], role="status"),
            *self.band.nodes(self.entries), *self.measured.nodes(),
        )  # fmt: skip

    def _plots(self) -> Node:
        """Which plot is shown, where it is only one."""
        session = self.session
        names = {
            "ph": "pH",
            "species": "Species",
            "buffer": "Buffer",
            "chosen": brief_label(READOUTS[readout_choice(session)]),
        }
        words = {name: (names[name], f"Show the plot of {names[name]}") for name in PLOTS}
        return segments(
            "large", "Plot shown", words, large_plot(session), lambda name: session.choose(large=name)
        )

    # ---- the dial on x and its range -----------------------------------------------------------------

    def _swept_dial(self) -> Dial | None:
        swept = self.session.swept
        return None if swept is None else self.session.dials.get(swept.address)

    def _choose_dial(self, address: str) -> None:
        dial = self.session.dials.get(address)
        if dial is not None:
            start, stop = default_range(dial)
            self.entries.forget()
            self.session.message = self.session.set_sweep(dial=address, start=start, stop=stop)

    def _range(self) -> list[Node]:
        dial, swept = self._swept_dial(), self.session.swept
        if dial is None or swept is None:
            return []

        def take(ends: tuple[float, float]) -> str:
            return self.session.set_sweep(start=ends[0], stop=ends[1])

        ends = (float(swept.x[0]), float(swept.x[-1]))
        return range_fields(self.entries, "", "the sweep", ends, dial, take)

    def _rule(self) -> str:
        """How a held dial is swept, and how the other waters follow a share."""
        scenario, dial = self.session.scenario, self._swept_dial()
        if dial is not None and dial.address in self.session.held:
            return "· held; along the sweep by hand"
        if dial is None or not dial.address.endswith(".share") or len(scenario.waters) < 2:
            return ""
        names = {water.id: water.name for water in scenario.waters}
        if scenario.balance_water in names:
            return f"· {plain(names[scenario.balance_water], 40)} takes the rest"
        return (
            "· the other waters follow in proportion"
            if len(names) > 2
            else "· the other water takes the rest"
        )

    def follow(self, changed: set[str]) -> None:
        """Show the session as it is now; ``changed``: its parameters that have changed."""
        if "structure" in changed:
            self.entries.forget()
        shown = (gap_words(self.session.swept), *_range_of(self.session.swept))
        # The list of dials is long: a sweep that only has other results must not build it again.
        if shown != self._shown or changed & {"structure", "scenario", "choices"}:
            self._shown = shown
            self.refresh()
