"""The quantities view: what the doses take of product, pumps, tanks and money; prices are set here."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator

from explorer.app.entry import show_number
from explorer.app.live_view import Node, node
from explorer.app.sheet import SheetView
from explorer.app.tables import Cell, Row, csv_button, over, table
from explorer.app.text import formula_text, plain, unit_text
from explorer.scenario.errors import ScenarioError
from explorer.scenario.model import Quantity, Scenario
from explorer.scenario.readouts import NO_VALUE
from explorer.studies.hand_checks import figure
from explorer.studies.quantities import DoseUse, Quantities, amount_text, quantities
from explorer.treatment.units import from_base

USUAL_FLOW = "ML/d"
"""Unit of a flow where none has been entered before."""

NO_DOSES = "No chemical is dosed. Add a treatment step on the left; its product and cost then stand here."

ENDS = {"low_flow": ("Lowest", "lowest flow"), "high_flow": ("Highest", "highest flow")}


class QuantitiesView(SheetView):
    """Flow range, prices and tanks as fields; chemicals, pumps, costs and dry solids as tables."""

    watched = ("point", "stale", "structure", "values")

    def follow(self, changed: set[str]) -> None:
        if "structure" in changed:
            self.entries.forget()
        super().follow(changed)

    def describe(self) -> Node:
        found = self._found()
        look = "pane stale" if self.session.stale else "pane"
        if not isinstance(found, Quantities):
            return node("div", look, node("p", "nothing", text=found))
        cards = [*self._cards(found)] or [node("div", "card", node("p", "nothing", text=NO_DOSES))]
        return node(
            "div", look,
            node("div", "controls", *self._settings(), node("span", "push"),
                 csv_button(self.session, "quantities", found.table)),
            node("div", "sections grow", *cards),
        )  # fmt: skip

    def _found(self) -> Quantities | str:
        """The quantities, or why there are none."""
        if self.session.solved is None or self.session.point is None:
            return "There is no result yet."
        try:
            return quantities(self.session.solved)
        except ScenarioError as error:
            return f"{error}."

    # ---- settings ------------------------------------------------------------------------------------

    def _settings(self) -> Iterator[Node]:
        scenario = self.session.scenario
        yield from self._flows(scenario)
        for name, words, hint, size in (
            ("currency", "Currency", "as you write it", 7), ("price_date", "Prices of", "date", 10),
        ):  # fmt: skip
            box, refusal = self.entries.text(
                name, words, getattr(scenario, name), self._put(words, name), placeholder=hint, size=size,
                maxlength=80,
            )  # fmt: skip
            yield node("label", "group", node("span", text=words), box)
            yield refusal

    def _flows(self, scenario: Scenario) -> Iterator[Node]:
        """The flow of the blend where it is entered as a whole, and the range that the pumps must follow."""
        unit = scenario.flow.unit if scenario.flow else self._flow_unit(scenario)
        total = scenario.total_flow()
        if scenario.flow is not None or total is None:
            value = "" if scenario.flow is None else show_number(scenario.flow.value)
            box, refusal = self.entries.number(
                "flow", "Flow of the blend", value, self._put_flow("Flow", "flow", unit), low=0, unit=unit
            )
            yield node("label", "group", node("span", text="Flow"), box)
            yield refusal
        else:
            given = figure(float(from_base(total, unit, "flow")), 4)
            yield node("span", text=f"Flow {given}", title="The sum of the flows of the source waters")
        for name, (words, label) in ENDS.items():
            end = getattr(scenario, name)
            shown = "" if end is None else show_number(end.value)
            box, refusal = self.entries.number(
                name, f"{words} flow of the blend", shown, self._put_flow(label, name, unit),
                low=0, unit=end.unit if end else unit, empty=self._clear(label, name), placeholder="–",
            )  # fmt: skip
            yield node("label", "group", node("span", text=words.lower()), box)
            yield refusal
        yield node("span", "unit", text=unit)

    @staticmethod
    def _flow_unit(scenario: Scenario) -> str:
        return next((water.flow.unit for water in scenario.waters if water.flow), USUAL_FLOW)

    def _put(self, label: str, name: str) -> Callable[[str], str]:
        def take(text: str) -> str:
            return self.session.edit(
                label, lambda scenario: setattr(scenario, name, plain(text, 80)), rebuild=False
            )

        return take

    def _put_flow(self, label: str, name: str, unit: str) -> Callable[[float], str]:
        def take(value: float) -> str:
            if name in self.session.dials:
                return self.session.turn(name, value)
            kept = getattr(self.session.scenario, name)
            amount = Quantity(value, kept.unit if kept else unit)
            return self.session.edit(label, lambda scenario: setattr(scenario, name, amount), rebuild=False)

        return take

    def _clear(self, label: str, name: str) -> Callable[[], str]:
        return lambda: self.session.edit(label, lambda scenario: setattr(scenario, name, None), rebuild=False)

    def _setting(self, dose: DoseUse, name: str, label: str, unit: str) -> Node:
        """A number of a dose step that may be left empty, with its message below it."""
        step = self.session.scenario.step(dose.step)
        value = getattr(step, name)
        key, words = f"{dose.step}.{name}", f"{label} of {dose.name}"

        def put(number: float | None) -> str:
            ending = f"train.{dose.step}.{name}"
            dial = next((address for address in self.session.dials if address.endswith(ending)), None)
            if number is not None and dial is not None:
                return self.session.turn(dial, number)
            return self.session.edit(
                words, lambda scenario: setattr(scenario.step(dose.step), name, number), rebuild=False
            )

        box, refusal = self.entries.number(
            key, plain(words, 100), show_number(value), put, low=0, unit=unit, empty=lambda: put(None),
            placeholder="–",
        )  # fmt: skip
        return node("span", "set", box, refusal)

    # ---- tables --------------------------------------------------------------------------------------

    def _cards(self, found: Quantities) -> Iterator[Node]:
        if found.doses:
            yield _card("Chemicals and cost", self._chemicals(found))
            yield _card("Pumps and tanks", self._pumps(found))
        solids = [solid for solid in found.solids if solid.concentration > 0]
        if solids:
            rows = [
                Row(
                    [solid.name, *map(amount_text, (solid.concentration, solid.kg_per_day, solid.t_per_year))]
                )
                for solid in solids
            ]
            heading = ["Solid", over("In the water", "mg/L"), over("A day", "kg/d"), over("A year", "t/year")]
            yield _card("Dry solids formed", table("Dry solids formed", heading, rows))
        if found.notes:
            said = [plain(note.text, 200) for note in found.notes]
            lines = [node("li", text=f"{words[:1].upper()}{words[1:]}.") for words in said]
            yield node("div", "card", node("ul", "remarks", *lines))

    def _chemicals(self, found: Quantities) -> Node:
        money = plain(found.currency, 12) or "cost"
        heading: list[Cell] = [
            "Step", over("Dose", "as entered"), over("Active", "kg/d"), over("Product", "kg/d"),
            over("Product", "t/year"), over("Price", f"{money} per kg"), over("Cost", f"{money} per ML"),
            over("Cost", f"{money} per year"),
        ]  # fmt: skip

        def row(dose: DoseUse) -> Row:
            basis = f"as {formula_text(dose.basis)}" if dose.basis else ""
            return Row([
                plain(dose.name, 60), over(amount_text(dose.dose), unit_text(dose.unit)),
                over(amount_text(dose.active_kg_per_day), basis), amount_text(dose.product_kg_per_day),
                amount_text(dose.product_t_per_year), self._setting(dose, "price", "Price", "per kg"),
                amount_text(dose.cost_per_ml), amount_text(dose.cost_per_year),
            ], key=f"use:{dose.step}")  # fmt: skip

        totals = amount_text(found.cost_per_ml), amount_text(found.cost_per_year)
        foot = [Row(["All priced", "", "", "", "", "", *totals], "total")]
        return table("Chemicals and cost", heading, map(row, found.doses), foot=foot, look="uses")

    def _pumps(self, found: Quantities) -> Node:
        heading: list[Cell] = [
            "Step", over("Strength", "% by mass"), over("Density", "kg/L"), over("Least", "L/h"),
            over("Now", "L/h"), over("Most", "L/h"), over("Turndown", "most to least"), over("Tank", "m³"),
            over("Lasts", "days"),
        ]  # fmt: skip

        def row(dose: DoseUse) -> Row:
            turndown = f"{figure(dose.turndown, 3)} : 1" if math.isfinite(dose.turndown) else NO_VALUE
            return Row([
                plain(dose.name, 60), *map(amount_text, (dose.strength, dose.density, dose.lowest_rate)),
                amount_text(dose.rate), amount_text(dose.highest_rate), turndown,
                self._setting(dose, "tank", "Tank", "m³"), amount_text(dose.storage),
            ], key=f"pump:{dose.step}")  # fmt: skip

        return table("Pumps and tanks", heading, map(row, found.doses))


def _card(title: str, *parts: Node) -> Node:
    return node("div", "card", node("h3", text=title), *parts)
