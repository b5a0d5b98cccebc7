"""The settings of a step, opened on its card: a form made from what the step declares."""

import math
from typing import Any

from explorer.app.desk import Desk, facts
from explorer.app.entry import show_number
from explorer.app.hold_panel import step_dial
from explorer.app.live_view import Node, node
from explorer.app.other_units import Conversion, conversion, take_along
from explorer.app.pickers import Choice, picker
from explorer.app.state import Change
from explorer.app.text import formula_text, plain, unit_text
from explorer.scenario import editing
from explorer.scenario.dials import Dial
from explorer.scenario.entity import Entity
from explorer.scenario.fields import Choice as OneOf
from explorer.scenario.fields import Choices, Flag, Number, Text
from explorer.scenario.model import DoseStep, Quantity, Scenario, Step
from explorer.scenario.quantity import Amount
from explorer.scenario.words import number_text
from explorer.treatment.catalogue import SETTINGS
from explorer.treatment.chemicals import Chemical, dose_in, dose_moles, pump_rate

OWN_PLACE = ("id", "name", "on", "note", "chemical", "hold")
"""Fields that the card itself or a part of its own looks after."""


class Form:
    """The form of one step on the desk: lines of caption and field, filled from the declarations."""

    def __init__(self, desk: Desk, step: Step, key: str) -> None:
        self.desk, self.step, self.key = desk, step, key
        self.lines: list[Node] = []

    def line(self, caption: str, box: Node | list[Node], *messages: Node, title: str = "") -> None:
        """One caption with its field or fields."""
        label = node("span", "caption", text=caption, title=title or None)
        boxes = [box] if isinstance(box, Node) else box
        self.lines += [label, node("div", "pair", *boxes), *messages]

    def put(self, name: str, value: Any, part: str = "", also: Change = lambda scenario: None) -> str:
        """Set a declared field of the step, or of its ``part``, and make a change that goes with it."""
        step_id = self.step.id
        label = (getattr(self.step, part) if part else self.step).fields()[name].label

        def change(scenario: Scenario) -> None:
            owner = scenario.step(step_id)
            setattr(getattr(owner, part) if part else owner, name, value)
            also(scenario)

        return self.desk.edit(f"{label} of {self.step.title}", change)

    # ---- one field by its kind ---------------------------------------------------------------------------

    def declared(self, owner: Entity, name: str, part: str = "", **usual: float | None) -> None:
        """A line for a declared field; kinds without a line of their own are passed over."""
        field = owner.fields()[name]
        value = getattr(owner, name)
        key = f"{self.key}.{part}.{name}" if part else f"{self.key}.{name}"
        title = plain(field.doc or "", 200)
        if isinstance(field, Amount):
            if value is not None:
                self._amount(field, name, value, key, title, part)
        elif isinstance(field, Number):
            self._number(field, name, value, key, title, part, usual.get(name))
        elif isinstance(field, Choices):
            ticks = [
                self.desk.entries.tick(
                    f"{key}:{word}", word, word in value,
                    lambda ticked, word=word: self.put(name, _with(field.choices, value, word, ticked), part),
                )
                for word in field.choices
            ]  # fmt: skip
            self.line(field.label, node("div", "ticks", *ticks), title=title)
        elif isinstance(field, OneOf):
            options = {word: word.replace("_", " ") for word in field.choices}
            box = self.desk.entries.choice(
                key, field.label, options, value, lambda word: self.put(name, word, part)
            )
            self.line(field.label, box, title=title)
        elif isinstance(field, Flag):
            tick = self.desk.entries.tick(
                key, "yes", value, lambda ticked: self._answer(key, name, ticked, part)
            )
            self.line(field.label, tick, self.desk.refusal(key), title=title)
        elif isinstance(field, Text):
            box, refusal = self.desk.entries.text(
                key, field.label, value or "", lambda text: self.put(name, text.strip(), part)
            )
            self.line(field.label, box, refusal, title=title)

    def _answer(self, key: str, name: str, value: Any, part: str) -> None:
        self.desk.entries.refuse(key, refusal=self.put(name, value, part))

    def _number(
        self,
        field: Number,
        name: str,
        value: float | None,
        key: str,
        title: str,
        part: str,
        usual: float | None,
    ) -> None:
        low, high = field.bounds or (None, None)
        optional = field.default is None and not field.required and name not in self.step.either
        if value is not None and key in self.desk.session.dials:
            take = lambda number: self.desk.turn(key, number)  # noqa: E731
        else:
            take = lambda number: self.put(name, number, part)  # noqa: E731
        box, refusal = self.desk.entries.number(
            key, field.label, show_number(value), take, low=low, high=high, unit=field.unit,
            empty=(lambda: self.put(name, None, part)) if optional else None,
            placeholder="" if usual is None else show_number(usual),
        )  # fmt: skip
        unit = node("span", "unit", text=unit_text(field.unit), title=field.unit)
        self.line(field.label, [box, unit], refusal, title=title)

    def _amount(self, field: Amount, name: str, value: Quantity, key: str, title: str, part: str) -> None:
        box, refusal = self.desk.entries.number(
            key,
            field.label,
            show_number(value.value),
            lambda number: self.desk.turn(key, number),
            unit=value.unit,
        )
        self.line(field.label, [box, self.unit_choice(name, value, key, part)], refusal, title=title)

    def unit_choice(self, name: str, value: Quantity, key: str, part: str = "") -> Node:
        """The units of a declared amount; another one converts the number, so that nothing changes but it."""
        units = self.units(name, part)

        def take(unit: str) -> None:
            convert = self.conversion(name, value.unit, unit, part)
            original = self.desk.originals.of(key, value)
            same = original if unit == original.unit else Quantity(convert(value.value), unit)
            refusal = self.put(name, same, part, lambda scenario: take_along(scenario, key, convert))
            self.desk.originals.keep(key, original, same)
            self.desk.entries.refuse(f"{key}.unit", refusal=refusal)

        names = {unit: unit_text(unit) for unit in units}
        return self.desk.entries.choice(f"{key}.unit", "Unit", names, value.unit, take)

    def units(self, name: str, part: str = "") -> tuple[str, ...]:
        """Units of a declared amount."""
        field = (getattr(self.step, part) if part else self.step).fields()[name]
        return field.units or tuple(self.chemical.units)

    @property
    def chemical(self) -> Chemical:
        """The chemical of a dose step."""
        return self.desk.scenario.product(self.step)

    def conversion(self, name: str, old: str, new: str, part: str = "") -> Conversion:
        """Between two units of a declared amount."""
        field = (getattr(self.step, part) if part else self.step).fields()[name]
        if field.units:
            return conversion(field.quantity, old, new)
        product, strength = self.chemical, self.step.strength
        return lambda dose: float(dose_in(product, dose_moles(product, dose, old, strength), new, strength))


def own_dial(desk: Desk, step: Step, key: str) -> Dial | None:
    """The dial on a step's card: the dose, else the first number of the step; None where it has no number."""
    held = desk.session.held.get(f"{key}.dose")
    if held is not None and held.step:
        return step_dial(held)
    dials = desk.session.dials
    return next((dials[f"{key}.{name}"] for name in step.fields() if f"{key}.{name}" in dials), None)


def main_dial(desk: Desk, step: Step, key: str) -> Dial | None:
    """The dial of a step that is turned: its own, or the held value where that is computed."""
    own = own_dial(desk, step, key)
    held = None if own is None else desk.session.held.get(own.address)
    return own if held is None else desk.session.dials.get(held.goal)


def step_form(desk: Desk, step: Step, key: str) -> list[Node]:
    """Everything inside an opened step card."""
    form = Form(desk, step, key)
    dosing = isinstance(step, DoseStep)
    if dosing:
        _chemical(form, step)
    elif step.either:
        _which(form, step)
    usual = _usual(form) if dosing else {}
    dial = own_dial(desk, step, key)
    for name in step.fields():
        given = name not in step.either or getattr(step, name) is not None
        owned = name not in usual or usual[name] is not None
        if dial is not None and dial.address == f"{key}.{name}":
            _unit_of(form, name)
        elif given and owned and name not in OWN_PLACE:
            form.declared(step, name, **usual)
    form.declared(step, "note")
    return [node("div", "form", *form.lines), *(_product_use(form) if dosing else []), *_cautions(form)]


def _chemical(form: Form, step: DoseStep) -> None:
    """The chemical, and the list of others."""
    desk, key = form.desk, form.key
    chemical = form.chemical

    def exchange(name: str) -> None:
        refusal = desk.edit(
            "Another chemical", lambda scenario: editing.change_chemical(scenario, step.id, name)
        )
        desk.entries.refuse(f"{key}.chemical", refusal=refusal)

    catalogue = {"Chemicals": chemical_choices(desk.scenario)}
    form.line(
        "Chemical",
        picker(f"{key}.chemical", chemical.name, catalogue, exchange, look="chosen", hint="Search chemicals"),
        desk.refusal(f"{key}.chemical"), title=formula_text(chemical.formula),
    )  # fmt: skip


def _unit_of(form: Form, name: str) -> None:
    """The unit of the setting whose number stands on the card."""
    caption, value, part = f"{form.step.fields()[name].label} is given in", getattr(form.step, name), ""
    if value is None:
        # A dose that holds a readout: its limit has the unit.
        name, value, part = "ceiling", form.step.hold.ceiling, "hold"
    if isinstance(value, Quantity):
        key = f"{form.key}.{part}.{name}" if part else f"{form.key}.{name}"
        form.line(caption, form.unit_choice(name, value, key, part), form.desk.refusal(f"{key}.unit"))


def _which(form: Form, step: Step) -> None:
    """Which of the settings of which exactly one is given."""
    desk, key = form.desk, f"{form.key}:which"
    given = next(name for name in step.either if getattr(step, name) is not None)
    words = {name: step.fields()[name].label for name in step.either}

    def take(name: str) -> None:
        start = _start(form, name)

        def change(scenario: Scenario) -> None:
            owner = scenario.step(step.id)
            for other in step.either:
                setattr(owner, other, start if other == name else None)

        desk.entries.refuse(key, refusal=desk.edit(f"{words[name]}: {step.title}", change))

    form.line("Set by", desk.entries.choice(key, "Set by", words, given, take), desk.refusal(key))


def _start(form: Form, name: str) -> Any:
    """What a setting starts from when it takes over: the state of the water, where that says something."""
    if name == "co2":
        co2 = form.desk.reading("co2", form.step.id)
        return float(f"{co2:.2g}") if math.isfinite(co2) else 1.0
    return 80


def _usual(form: Form) -> dict[str, float | None]:
    """Usual product properties of the chemical, shown in the empty fields; None hides a field it has not."""
    product = form.chemical
    setting = SETTINGS.get(form.step.chemical)
    own = {name: setting.usual if setting and setting.name == name else None for name in PRODUCT_SETTINGS}
    return {"strength": product.usual_strength, "density": product.usual_density} | own


PRODUCT_SETTINGS = ("basicity", "ratio")
"""Settings that only some products have."""


def _product_use(form: Form) -> list[Node]:
    """What the dose takes of the product: kg a day, t a year, and what the pump has to deliver."""
    dose = form.desk.dosing(form.step.id)
    if dose is None or not math.isfinite(float(dose.product) * float(dose.flow)):
        return []
    use = float(dose.product) * float(dose.flow) * 24 / 1000
    words = [f"{_amount_text(use)} kg/d of product", f"{_amount_text(use * 0.36525)} t/year"]
    rate = float(pump_rate(dose.chemical, dose.moles, dose.flow, dose.strength))
    if math.isfinite(rate):
        words.append(f"{_amount_text(rate)} L/h")
    return [facts(*words, hint="At the flow and dose now; litres at the density of the product")]


def _amount_text(amount: float) -> str:
    """Three figures, or all before the point."""
    return number_text(amount, max(0, 2 - math.floor(math.log10(amount))) if amount > 0 else 0)


def _cautions(form: Form) -> list[Node]:
    """Hazards of the chemical, and what its figures rest on."""
    if not isinstance(form.step, DoseStep):
        return []
    return (
        [node("p", "hint", text=f"Caution: {'; '.join(form.chemical.hazards)}.")]
        if form.chemical.hazards
        else []
    )


def chemical_choices(scenario: Scenario) -> list[Choice]:
    """Every chemical that can be dosed, by name; also found by formula and key."""
    chemicals = sorted(scenario.known_chemicals().items(), key=lambda item: item[1].name)
    return [
        Choice(
            name,
            chemical.name,
            formula_text(chemical.formula),
            f"{chemical.formula} {name.replace('_', ' ')}",
        )
        for name, chemical in chemicals
    ]


def _with(order: tuple[str, ...], chosen: list[str], word: str, ticked: bool) -> list[str]:
    """A choice of words with one more or less, in the order of all."""
    return [other for other in order if (other in chosen and other != word) or (other == word and ticked)]
