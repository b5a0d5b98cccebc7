"""Readout tiles: value, unit, a gauge with the target band, the state in words, the meaning on hover."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import Any

import numpy as np

from explorer.app.entry import Entries
from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import VIEW_STYLES
from explorer.app.options import difference, selected
from explorer.app.state import Session
from explorer.app.target_editor import TargetEditor, sheet_key
from explorer.app.text import compact, plain, unit_text
from explorer.scenario.model import Target
from explorer.scenario.readouts import MINUS, READOUTS, Readout, format_value, status
from explorer.scenario.words import brief_label, range_text
from explorer.studies.axes import Limits, steady_limits
from explorer.studies.pictures import Band, band_of, least_span

DEFAULTS = (
    "ph", "alkalinity", "buffer_intensity", "ccpp", "langelier_index", "hocl_percent",
    "chloride_sulfate_ratio",
)  # fmt: skip
FEWEST, MOST = 5, 8

STATES = {
    "in range": ("ok", "● in range"),
    "below": ("bad", "▼ below"),
    "above": ("bad", "▲ above"),
}


def default_tiles(targets: Iterable[Target]) -> list[str]:
    """Readouts shown at first: those with targets in their order, then the defaults, seven or up to eight."""
    wanted = dict.fromkeys(target.readout for target in targets if target.readout in READOUTS)
    keys = list(wanted)[:MOST]
    for key in DEFAULTS:
        if len(keys) >= max(len(DEFAULTS), len(wanted)):
            break
        if key not in wanted:
            keys.append(key)
    return keys[:MOST]


@dataclass(frozen=True)
class Gauge:
    """Places on the gauge in percent of its length; ``at`` is None without a value."""

    start: float
    stop: float
    at: float | None


def gauge(value: float, limits: Limits, band: Band) -> Gauge:
    """Place of a value and its target band on a gauge over ``limits``; what is beyond sits at the end."""
    low, high = limits

    def place(number: float) -> float:
        return 100.0 * min(1.0, max(0.0, (number - low) / (high - low)))

    start = 0.0 if band[0] is None else place(band[0])
    stop = 100.0 if band[1] is None else place(band[1])
    return Gauge(start, stop, place(value) if np.isfinite(value) else None)


def signed_label(readout: Readout, text: str) -> str:
    """Name on the tile with the word for the sign of the value printed: "CaCO₃ dissolves"."""
    if not readout.sign_words or not text.startswith((MINUS, "+")):
        return brief_label(readout)
    word = readout.sign_words[0 if text.startswith(MINUS) else 1]
    return f"{brief_label(readout).removesuffix(' potential')} {word}"


class Tiles(LiveView):
    """The chosen readouts of the finished water at the operating point."""

    css = VIEW_STYLES

    def __init__(self, session: Session, **settings: Any) -> None:
        self.session = session
        self.entries = Entries()
        self.editor = TargetEditor(session, self.entries, self._stay)
        self._limits: dict[str, Limits] = {}
        self._listed: list[str] = []
        self._list: list[Node] = []
        super().__init__(sizing_mode="stretch_width", **settings)
        self._want()
        session.param.watch(self._changed, ["point", "stale", "structure", "choices", "kept"])
        self.refresh()

    @property
    def chosen(self) -> list[str]:
        """Keys of the readouts shown: the user's choice, else the default for the targets."""
        kept = [key for key in self.session.choices.get("tiles", ()) if key in READOUTS]
        return kept or default_tiles(self.session.scenario.targets)

    def describe(self) -> Node:
        count = len(self.chosen)
        tiles = [self._tile(key, index >= count - 2) for index, key in enumerate(self.chosen)]
        look = "tiles stale" if self.session.stale else "tiles"
        row = node("div", look, *tiles, role="group", aria_label="Readouts of the finished water")
        return node("div", "tile-row", row, *self._choice())

    def _choice(self) -> list[Node]:
        """The button "⋮" and the list of all readouts to choose from, built anew only for another choice."""
        chosen = self.chosen
        if self._listed != chosen:
            self._listed, self._list = chosen, self._build_choice(chosen)
        return self._list

    def _build_choice(self, chosen: list[str]) -> list[Node]:
        groups: dict[str, list[Node]] = {}
        for readout in READOUTS.values():
            on = readout.key in chosen
            full = len(chosen) <= FEWEST if on else len(chosen) >= MOST
            box = node(
                "input", type="checkbox", key=f"choose:{readout.key}", checked=on, disabled=full,
                on=self._toggle(readout.key),
            )  # fmt: skip
            line = node("label", "", box, node("span", text=compact(readout.label)))
            groups.setdefault(readout.group, []).append(line)
        # Two columns of about the same length, each group whole.
        columns: tuple[list[Node], list[Node]] = ([], [])
        half = sum(len(lines) + 1 for lines in groups.values()) / 2
        filled = 0
        for name, lines in groups.items():
            columns[filled >= half].append(node("div", "", node("h3", text=name), *lines))
            filled += len(lines) + 1
        hint = f"Choose {FEWEST} to {MOST} readouts; press a tile to enter its target"
        button = node(
            "button", "choose", text="⋮", key="choose-button", type="button", popovertarget="choose",
            title=hint, aria_label=hint, aria_haspopup="dialog", aria_expanded="false",
        )  # fmt: skip
        halves = node("div", "halves", *(node("div", "", *column) for column in columns))
        sheet = node(
            "div", "wide", halves, key="choose", id="choose", popover="auto", role="dialog", aria_label=hint
        )
        return [button, sheet]

    def _toggle(self, key: str) -> Callable[[Any], None]:
        def take(on: Any) -> None:
            others = [other for other in self.chosen if other != key]
            kept = [*others, key] if on else others
            if FEWEST <= len(kept) <= MOST:
                self.session.choose(tiles=kept)

        return take

    def _tile(self, key: str, at_right: bool) -> Node:
        readout = READOUTS[key]
        point = self.session.point
        value = float(point.readout(key)) if point is not None else float("nan")
        targets = [target for target in self.session.scenario.targets if target.readout == key]
        band = band_of([(target.low, target.high) for target in targets])
        text = format_value(value, readout)
        unit = unit_text(readout.unit)
        if readout.sign_words and value > 0 and text.strip("0."):
            text = f"+{text}"
        look, state = self._state(value, band, bool(targets), readout)
        percent = readout.unit == "%"
        return node(
            "div", "tile",
            node("div", "label", text=signed_label(readout, text)),
            node("div", "value", text=f"{text} %" if percent and np.isfinite(value) else text),
            node("div", "unit", text="" if percent else unit),
            self._gauge(key, value, band, readout),
            node("div", "foot-line", node("span", f"state {look}", text=state), self._change(readout, value)),
            self._edit(readout, f"{readout.label}: {text} {unit}, {state}"),
            _tip(readout, targets, at_right),
            self.editor.sheet(readout),
            key=f"tile:{key}", role="group", aria_label=f"{readout.label}: {text} {unit}, {state}",
        )  # fmt: skip

    def _edit(self, readout: Readout, said: str) -> Node:
        """The tile as a button that opens its target."""
        return node(
            "button", "edit", key=f"edit:{readout.key}", type="button", popovertarget=sheet_key(readout),
            on=self.editor.opened, aria_label=f"{said}. Edit the target", aria_haspopup="dialog",
            aria_expanded="false",
        )  # fmt: skip

    def _change(self, readout: Readout, value: float) -> Node | None:
        """How far the value is from that of the option it is compared with."""
        kept = selected(self.session)
        if kept is None or kept.point is None:
            return None
        change = difference(value, float(kept.point.readout(readout.key)), readout)
        if not change:
            return None
        hint = f"Against option {kept.letter}, {plain(kept.name, 80)}"
        against = node("span", "long", text=f" vs {kept.letter}")
        return node("span", "change", node("span", text=change), against, title=hint)

    def _state(self, value: float, band: Band | None, aimed: bool, readout: Readout) -> tuple[str, str]:
        if not np.isfinite(value):
            return "none", "no value"
        if band is None:
            return ("bad", "▲▼ targets clash") if aimed else ("none", "no target")
        return STATES[status(value, *band, readout.slack)]

    def _gauge(self, key: str, value: float, band: Band | None, readout: Readout) -> Node:
        swept = self.session.swept
        along = np.atleast_1d(swept.outcome.readout(key)) if swept is not None else np.array([])
        values = np.append(along, value)
        bounds = [bound for bound in band or () if bound is not None]
        finite = values[np.isfinite(values)]
        size = float(np.abs(finite).max()) if finite.size else 1.0
        limits = steady_limits(values, self._limits.get(key), least_span(readout.digits, size), bounds)
        self._limits[key] = limits
        places = gauge(value, limits, band or (None, None))
        target = node("span", "band", hidden=band is None)
        target.properties |= {
            "--from": f"{places.start:.1f}%",
            "--wide": f"{places.stop - places.start:.1f}%",
        }
        needle = node("span", "needle", hidden=places.at is None)
        needle.properties["--at"] = f"{places.at or 0.0:.1f}%"
        return node("div", "gauge", target, needle, aria_hidden="true")

    def _stay(self) -> None:
        """Make the default choice, which follows the targets, the user's own."""
        if not self.session.choices.get("tiles"):
            self.session.choose(tiles=self.chosen)

    def _want(self) -> None:
        self.session.want("tiles", self.chosen)

    def _changed(self, *events: Any) -> None:
        names = {event.name for event in events}
        if "structure" in names:
            self._limits.clear()
            self.entries.forget(standing=self)
        if names & {"structure", "choices"}:
            self._want()
        self.refresh()


def _tip(readout: Readout, targets: list[Target], at_right: bool) -> Node:
    aims = [
        f"Target {range_text(target.low, target.high, unit_text(readout.unit))}"
        + (f" ({plain(target.basis, 80)})" if target.basis else "")
        for target in targets
    ]
    words = [f"{readout.label}. {readout.meaning}", *aims, f"Source: {readout.source}."]
    lines = (node("p", text=text) for text in words)
    return node("div", "tip left" if at_right else "tip", *lines, role="tooltip")
