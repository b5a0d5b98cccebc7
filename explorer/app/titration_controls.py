"""The row above the titration plots: which water, with what, over which range."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

from explorer.app.choosers import range_fields, stage_picker
from explorer.app.entry import Entries
from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import VIEW_STYLES
from explorer.app.measured_panel import MeasuredPanel
from explorer.app.pickers import Choice, picker
from explorer.app.state import Session
from explorer.app.text import formula_text, plain, unit_text
from explorer.app.titration_setting import Setting, equivalents, in_unit, shared_units
from explorer.scenario.dials import Dial
from explorer.scenario.readouts import MINUS
from explorer.treatment.chemicals import Chemical

NOTHING = ""


class TitrationControls(LiveView):
    """Changes what the titration view shows; nothing of it belongs to the scenario.

    now: what is shown, None without a result. keep: takes another setting. waiting: nothing is shown yet.
    """

    css = (*VIEW_STYLES, "measured.css")

    def __init__(
        self,
        session: Session,
        measured: MeasuredPanel,
        now: Callable[[], Setting | None],
        keep: Callable[[Setting], None],
        **settings: Any,
    ) -> None:
        self.session, self.measured = session, measured
        self.now, self.keep = now, keep
        self.refusal = ""
        self.waiting = True
        self.entries = Entries()
        super().__init__(sizing_mode="stretch_width", **settings)

    def describe(self) -> Node:
        now = self.now()
        if now is None:
            return node("div", "controls", node("span", text="There is no result yet."))
        return node(
            "div", "controls",
            node("div", "group", *self._stages(now)),
            node("div", "group", node("span", text="+"), *self._chemical(now)),
            node("div", "group", node("span", text=MINUS), *self._opposite(now)),
            *self._range(now), self._unit(now),
            node("span", text="The curve is being calculated …" if self.waiting else "", role="status"),
            node("span", "push"), *self.measured.nodes(),
            node("span", "gap", text=self.refusal, role="status"),
        )  # fmt: skip

    def _stages(self, now: Setting) -> list[Node]:
        return stage_picker(
            "stage", self.session.point, now.stage, lambda stage: self._set(stage=stage),
            "The water that is titrated",
        )  # fmt: skip

    def _chemical(self, now: Setting) -> list[Node]:
        known = self.session.solved.known_chemicals()
        return picker(
            "chemical", f"{_name(known[now.chemical])} ▾", _groups(known, now.opposite),
            lambda key: self._set(chemical=key), look="button", hint="Search chemicals",
            title="What is added where the dose is positive",
        )  # fmt: skip

    def _opposite(self, now: Setting) -> list[Node]:
        known = self.session.solved.known_chemicals()
        label = _name(known[now.opposite]) if now.opposite else "nothing"
        groups = {"None": [Choice(NOTHING, "Nothing", "doses from 0 on")], **_groups(known, now.chemical)}
        return picker(
            "opposite", f"{label} ▾", groups, lambda key: self._set(opposite=key), look="button",
            hint="Search chemicals", title="What is added where the dose is negative",
        )  # fmt: skip

    def _range(self, now: Setting) -> list[Node]:
        dose = Dial(
            address="dose", label="Dose", unit="", value=0.0, low=0.0, high=None, step=0.1, group="",
            bounded=not now.opposite, store=lambda value: None,
        )  # fmt: skip

        def take(ends: tuple[float, float]) -> str:
            self.keep(replace(now, start=ends[0], stop=ends[1]))
            return ""

        return range_fields(self.entries, "dose:", "the doses", (now.start, now.stop), dose, take)

    def _unit(self, now: Setting) -> Node:
        known = self.session.solved.known_chemicals()
        units = shared_units(known[now.chemical], known.get(now.opposite))
        return self.entries.choice(
            "unit", "Unit of the dose", {unit: unit_text(unit) for unit in units}, now.unit,
            lambda unit: self.keep(in_unit(now, unit, known)),
        )  # fmt: skip

    def _set(self, **changed: str) -> None:
        """Another water or chemical: the range begins anew."""
        now = self.now()
        if now is not None:
            self.entries.forget()
            self.keep(replace(now, **changed, start=0.0, stop=0.0))


def _name(chemical: Chemical) -> str:
    return plain(chemical.name, 40)


def _groups(known: dict[str, Chemical], other_than: str) -> dict[str, list[Choice]]:
    """Chemicals by what they do to the alkalinity."""
    groups: dict[str, list[Choice]] = {"Bases": [], "Acids": [], "Others": []}
    for key, chemical in known.items():
        given = equivalents(chemical)
        if key != other_than:
            group = "Bases" if given > 0 else "Acids" if given < 0 or "dic" in chemical.totals else "Others"
            groups[group].append(Choice(key, _name(chemical), formula_text(plain(chemical.formula, 30)), key))
    return groups
