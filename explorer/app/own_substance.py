"""Chemicals and weak acids of the user's own: a form made from what their class declares, entered as a whole,
and the list of those there are.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

from explorer.app.desk import Desk, facts, heading
from explorer.app.entry import message, parse_number
from explorer.app.live_view import Node, node
from explorer.app.pickers import Act, Choice, menu
from explorer.app.text import plain, unit_text
from explorer.scenario import editing
from explorer.scenario.entity import Entity
from explorer.scenario.fields import Amounts, Field, Number, Numbers, Texts
from explorer.scenario.model import Acid, OwnChemical, Scenario
from explorer.scenario.own_parts import Own, own_parts, remove_own, uses
from explorer.treatment.chemicals import CATALOGUE

CHEMICAL, ACID = "own-chemical", "own-acid"
"""Stand for a new chemical and a new acid in the list of what can be added; no kind of step is called so."""

KINDS: dict[str, tuple[type[Entity], str, str]] = {
    CHEMICAL: (OwnChemical, "chemicals", "A chemical of your own"),
    ACID: (Acid, "acids", "A weak acid of your own"),
}
"""Class, place in the scenario, and heading of each."""

EXAMPLES = {
    "formula": "NaOH",
    "adds": "sodium 1, alkalinity 1",
    "counted_as": "CaCO3 0.5",
    "pka": "3.1; 4.8",
    "enthalpy_kj": "4.1; 2.4",
    "hazards": "burns skin; keep from acids",
}
"""How fields with several parts are written."""

LISTED = "own"
"""Stands for the list of what there is where a train would stand, of which none is called so."""

_PART = re.compile(r"\s*([^\s,;]+)[\s:=]+(\S+)\s*")
_PATH = re.compile(r"^(?:chemicals|acids)\[\d+\]\.?")


@dataclass
class Definition:
    """A substance being defined, or with ``id`` one that is being changed. kind: CHEMICAL or ACID. prefix:
    train that a new chemical is then dosed in.

    entered: texts of the fields by name. refused: field at fault and the sentence, "" for the whole.
    """

    kind: str
    prefix: str
    id: str = ""
    entered: dict[str, str] = field(default_factory=dict)
    refused: tuple[str, str] = ("", "")


def own_choices() -> list[Choice]:
    """Lines for the list of what can be added to a train."""
    return [
        Choice(f"{CHEMICAL}:", KINDS[CHEMICAL][2], "define and dose", "your own new product"),
        Choice(f"{ACID}:", KINDS[ACID][2], "for analyses", "your own new buffer"),
    ]


def own_panel(desk: Desk, prefix: str) -> list[Node]:
    """The form, where a substance is being defined at this train."""
    definition = desk.defining
    return [_Panel(desk, definition).node()] if definition is not None and definition.prefix == prefix else []


def own_section(desk: Desk) -> Node | None:
    """The substances of the user's own, each with its menu; None where there are none."""
    lines = [_listed(desk, part) for part in own_parts(desk.scenario)]
    if not lines:
        return None
    title = "Own chemicals and acids"
    parts = [heading(title), node("ul", "", *lines), *own_panel(desk, LISTED)]
    return node("section", "", *parts, key=LISTED, aria_label=title)


def _listed(desk: Desk, part: Own) -> Node:
    kind = ACID if isinstance(part, Acid) else CHEMICAL
    name, key = plain(part.name or part.id, 60), f"{LISTED}:{part.id}"
    users = list(uses(desk.scenario, part))
    remove = desk.act(key, f"Remove {name}", lambda scenario: remove_own(scenario, part.id))

    def change() -> None:
        raw, fields = part.to_dict(), part.fields()
        entered = {field: written_part(fields[field], raw[field]) for field in raw if field != "id"}
        desk.defining = Definition(kind, LISTED, part.id, entered)

    acts = [
        Act("change", "Change", change),
        Act("remove", "Remove", None if users else remove, danger=True),
    ]
    head = node(
        "div", "head", node("span", "name still", text=name, title=name), *menu(key, f"More for {name}", acts)
    )
    used = f"used in {'; '.join(users)}" if users else "not used"
    return node("li", "card", head, facts(plain(used, 120)), desk.refusal(key), key=key)


class _Panel:
    def __init__(self, desk: Desk, definition: Definition) -> None:
        self.desk, self.definition = desk, definition
        self.key = f"own:{definition.prefix}"
        self.kind, self.place, self.title = KINDS[definition.kind]
        if definition.id:
            self.title = f"Change {plain(definition.entered.get('name') or definition.id, 60)}"

    def node(self) -> Node:
        lines: list[Node] = []
        for name, declared in self.kind.fields().items():
            if name != "id":
                lines += self._line(name, declared)
        where, sentence = self.definition.refused
        whole = sentence if where not in self.kind.fields() else ""
        take = node("button", "press strong", text="Take over", key=f"{self.key}:take", type="button",
                    on=lambda value: self._take())  # fmt: skip
        cancel = node("button", "link", text="Cancel", key=f"{self.key}:cancel", type="button",
                      on=lambda value: self._close())  # fmt: skip
        return node(
            "div", "paste-panel", node("h3", text=self.title), node("div", "form", *lines), message(whole),
            node("div", "below", take, cancel), key=self.key, data_reveal=True,
        )  # fmt: skip

    def _line(self, name: str, declared: Field) -> list[Node]:
        entered = self.definition.entered.get(name, "")
        caption = node("span", "caption", text=declared.label, title=plain(declared.doc or "", 200))
        key = f"{self.key}:{name}"
        where, sentence = self.definition.refused
        refused = message(sentence if where == name else "")
        if name == "like":
            options = {"": "none, a new substance"}
            options |= {own: chemical.name for own, chemical in CATALOGUE.items()}
            box = self.desk.entries.choice(key, declared.label, options, entered, self._keep(name))
            return [caption, box, refused]
        box = node(
            "input", "words", key=key, type="text", value=entered, autocomplete="off", on=self._keep(name),
            aria_label=f"{declared.label}: {plain(declared.doc or '', 120)}", maxlength=400,
            placeholder=EXAMPLES.get(name, ""), aria_invalid="true" if where == name else None,
        )  # fmt: skip
        unit = unit_text(getattr(declared, "unit", ""))
        return [caption, node("div", "pair", box, node("span", "unit", text=unit)), refused]

    def _keep(self, name: str) -> Callable[[Any], None]:
        def keep(text: Any) -> None:
            self.definition.entered[name] = str(text)

        return keep

    def _close(self) -> None:
        self.desk.defining = None

    def _take(self) -> None:
        """Enter the substance, and dose a chemical; a refusal stands at its field."""
        definition, raw = self.definition, {}
        for name, declared in self.kind.fields().items():
            text = definition.entered.get(name, "").strip()
            if name == "id" or not text:
                continue
            try:
                raw[name] = read_part(declared, text)
            except ValueError as error:
                definition.refused = name, str(error)
                return
        opened = ""

        def change(scenario: Scenario) -> None:
            nonlocal opened
            others = getattr(scenario, self.place)
            taken = [own.id for own in own_parts(scenario)]
            own_id = definition.id or editing.unique_id(
                scenario, str(raw.get("name", "own")), (*taken, *CATALOGUE)
            )
            made = self.kind.from_dict({"id": own_id, **raw})
            if definition.kind == CHEMICAL:
                made.chemical(scenario.acids)
            if definition.id:
                setattr(scenario, self.place, [made if own.id == own_id else own for own in others])
                return
            setattr(scenario, self.place, [*others, made])
            if definition.kind == CHEMICAL:
                opened = editing.add_step(scenario, definition.prefix, "dose", own_id)

        refusal = _PATH.sub("", self.desk.session.edit(self.title, change))
        where, _, sentence = refusal.partition(": ")
        definition.refused = (where, sentence) if where in self.kind.fields() else ("", refusal)
        if not refusal:
            self._close()
            if opened:
                self.desk.opened = f"{definition.prefix}train.{opened}"


def read_part(declared: Field, text: str) -> Any:
    """The JSON form of what was typed for a declared field. Raises ValueError with what is allowed."""
    if isinstance(declared, Amounts):
        return _amounts(text)
    if isinstance(declared, Numbers):
        return [parse_number(part) for part in re.split(r"[;\s]+", text) if part]
    if isinstance(declared, Number):
        number = parse_number(text)
        return int(number) if number.is_integer() else number
    if isinstance(declared, Texts):
        return [part.strip() for part in text.split(";") if part.strip()]
    return text


def written_part(declared: Field, value: Any) -> str:
    """What is typed for a declared field to get its JSON form; the inverse of :func:`read_part`."""
    if isinstance(declared, Amounts):
        return ", ".join(f"{name} {_shortest(amount)}" for name, amount in value.items())
    if isinstance(declared, (Numbers, Texts)):
        return "; ".join(map(_shortest, value))
    return "" if value is None else _shortest(value)


def _shortest(value: Any) -> str:
    """A number without digits it does not need; a text as it is."""
    return str(int(value)) if isinstance(value, float) and value.is_integer() else str(value)


def _amounts(text: str) -> Mapping[str, float]:
    found: dict[str, float] = {}
    for part in re.split(r"[;,](?!\d)", text):
        match = _PART.fullmatch(part)
        if match is None:
            wrong = f"“{part.strip()[:24]}” is no name with a number"
            raise ValueError(f"{wrong}; allowed like: sodium 1, alkalinity 1")
        found[match[1]] = parse_number(match[2])
    return found
