"""The row above the sweep plots: which dial on x, over which range, what the plots show."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

from explorer.app.axes import nice_step
from explorer.app.entry import Entries, show_number
from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import VIEW_STYLES
from explorer.app.pickers import Choice, picker
from explorer.app.state import Session
from explorer.app.text import plain, unit_text
from explorer.scenario.dials import Dial
from explorer.scenario.readouts import READOUTS

FAMILIES = ("carbonate", "chlorine", "ammonia", "phosphate", "silicate", "borate")
FURTHER_FAMILIES = ("fluoride", "sulfate", "sulfite", "acetate", "citrate", "aluminium", "iron")
DEFAULT_FAMILY, DEFAULT_READOUT = "carbonate", "ccpp"


def family_choice(session: Session) -> str:
    """Family of species shown; one of an acid that is gone falls back to the default."""
    family = session.choices.get("family", DEFAULT_FAMILY)
    return family if family in family_names(session) else DEFAULT_FAMILY


def readout_choice(session: Session) -> str:
    """Readout of the fourth plot."""
    key = session.choices.get("readout", DEFAULT_READOUT)
    return key if key in READOUTS else DEFAULT_READOUT


def family_names(session: Session) -> dict[str, str]:
    """Families of species that can be shown, key to name; the scenario's own acids last."""
    names = {family: f"{family} species" for family in (*FAMILIES, *FURTHER_FAMILIES)}
    return names | {acid.id: f"{plain(acid.name or acid.id, 40)} species" for acid in session.scenario.acids}


def default_range(dial: Dial) -> tuple[float, float]:
    """Range a dial is first swept over: its bounds where they are close to its value, else from zero or the
    lower bound to a round number about twice its value."""
    high = dial.high
    if high is not None and math.isfinite(high) and high - dial.low <= 100:
        return dial.low, high
    span = 2 * max(abs(dial.value - dial.low), 10 * dial.step)
    step = nice_step(span)
    top = dial.low + math.ceil(span / step - 1e-9) * step
    return dial.low, top if high is None else min(high, top)


class SweepControls(LiveView):
    """Changes the sweep of the scenario and what the plots show of it."""

    css = VIEW_STYLES

    def __init__(self, session: Session, **settings: Any) -> None:
        self.session = session
        self.entries = Entries()
        super().__init__(sizing_mode="stretch_width", **settings)
        session.param.watch(self._changed, ["structure", "scenario", "choices"])
        self.refresh()

    def describe(self) -> Node:
        return node(
            "div", "controls",
            node("div", "group", node("span", text="Sweep"), *self._dial()),
            *self._range(),
            node("div", "grow"),
            node("div", "group", node("span", text="Show"), self._family(), self._scale()),
            node("div", "group", *self._readout()),
        )  # fmt: skip

    # ---- the dial on x and its range -----------------------------------------------------------------

    def _dial(self) -> list[Node]:
        sweep = self.session.scenario.sweep
        dials = self.session.dials
        groups: dict[str, list[Choice]] = {}
        for dial in dials.values():
            groups.setdefault(plain(dial.group, 60), []).append(
                Choice(dial.address, plain(dial.label, 90), unit_text(dial.unit), dial.address)
            )
        chosen = dials.get(sweep.dial) if sweep is not None else None
        label = plain(chosen.label, 60) if chosen else "Choose a dial"
        return picker("dial", f"{label} ▾", groups, self._choose_dial, look="button", hint="Search dials",
                      title="The dial along the x axis")  # fmt: skip

    def _choose_dial(self, address: str) -> None:
        dial = self.session.dials.get(address)
        if dial is not None:
            start, stop = default_range(dial)
            self.entries.forget()
            self.session.message = self.session.set_sweep(dial=address, start=start, stop=stop)

    def _range(self) -> list[Node]:
        sweep = self.session.scenario.sweep
        dial = self.session.dials.get(sweep.dial) if sweep is not None else None
        if dial is None:
            return []
        unit = unit_text(dial.unit)
        start, start_refused = self._end("start", "From", sweep.start, dial)
        stop, stop_refused = self._end("stop", "To", sweep.stop, dial)
        return [
            node("div", "group", node("span", text="from"), start, node("span", text="to"), stop,
                 node("span", "unit", text=unit)),
            start_refused, stop_refused,
        ]  # fmt: skip

    def _end(self, name: str, label: str, value: float, dial: Dial) -> tuple[Node, Node]:
        def take(number: float) -> str:
            sweep = self.session.scenario.sweep
            other = sweep.stop if name == "start" else sweep.start
            if math.isclose(number, other):
                return "from and to have to differ"
            return self.session.set_sweep(**{name: number})

        return self.entries.number(
            name, f"{label}, end of the sweep", show_number(value), take, low=dial.low, high=dial.high,
            unit=unit_text(dial.unit),
        )  # fmt: skip

    # ---- what the plots show -------------------------------------------------------------------------

    def _family(self) -> Node:
        return self.entries.choice(
            "family", "Family of species", family_names(self.session), family_choice(self.session),
            lambda family: self.session.choose(family=family),
        )  # fmt: skip

    def _scale(self) -> Node:
        logarithmic = bool(self.session.choices.get("log"))

        def segment(key: str, text: str, hint: str, on: bool) -> Node:
            return node("button", "", text=text, title=hint, key=f"scale:{key}", type="button",
                        aria_pressed=str(on == logarithmic).lower(), on=self._set_scale(on))  # fmt: skip

        return node(
            "div", "segments",
            segment("share", "%", "Percent of the family", False),
            segment("log", "log", "log₁₀ of mol/L", True),
            role="group", aria_label="Scale of the species plot",
        )  # fmt: skip

    def _set_scale(self, on: bool) -> Callable[[Any], None]:
        return lambda value: self.session.choose(log=on)

    def _readout(self) -> list[Node]:
        groups: dict[str, list[Choice]] = {}
        for readout in READOUTS.values():
            groups.setdefault(readout.group, []).append(
                Choice(readout.key, readout.label, unit_text(readout.unit), f"{readout.short} {readout.key}")
            )
        chosen = READOUTS[readout_choice(self.session)]
        label = chosen.label if len(chosen.label) <= 28 else chosen.short
        return picker("readout", f"{label} ▾", groups, lambda key: self.session.choose(readout=key), look="button",
                      hint="Search readouts", title="The readout in the fourth plot")  # fmt: skip

    def _changed(self, *events: Any) -> None:
        if any(event.name == "structure" for event in events):
            self.entries.forget()
        self.refresh()
