"""Declared parts of a scenario: Param parameters that know their rule and their JSON form.

A class of the scenario declares each part once, with label, unit, bounds and meaning. Reading and writing
files, checking an edit, forms and dials all take what they need from that declaration.

Every field offers

====================  ==========================================================================
``fault(value)``      what is wrong with a value and what is allowed, "" when nothing is
``allowed``           the allowed values in words
``read(raw, path)``   the value from its JSON form; raises ScenarioError with the path
``write(value)``      the JSON form of a value
``duplicate(value)``  an independent copy of a value
====================  ==========================================================================
"""

import math
import re
import unicodedata
from collections.abc import Iterable, Iterator, Mapping
from typing import Any

import param

from explorer.scenario.errors import ScenarioError, clipped, join, listed, shown, unknown, unknown_key

LARGEST_NUMBER = 1e12
"""No quantity of the trade comes near it; keeps arithmetic finite whatever a file says."""

NAME_LENGTH, TITLE_LENGTH, NOTE_LENGTH = 80, 200, 20_000

MOST_NAMED = 100
"""Entries of an analysis, components of a chemical: there are fewer than 30, and at most 50 own acids."""

Bounds = tuple[float | None, float | None] | None

_OVERRIDING_DIRECTION = frozenset("\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069")
_HIDDEN = ("Cc", "Cs", "Zl", "Zp")  # control characters, halves of characters, line and paragraph ends
_ID = re.compile(r"[a-z][a-z0-9_-]*")


Faults = Iterator[tuple[str, str]]


class Field:
    """What all declared parts have in common. Mixed into a Param class, which adds the slots.

    Slots that a field adds to those of Param are keywords of its constructor, with the defaults of
    ``_slot_defaults``. Every field has ``required``: whether a file must give it.
    """

    __slots__ = ()

    def __init__(self, default: Any = param.Undefined, **details: Any) -> None:
        for slot in self._slot_defaults.keys() - param.String._slot_defaults.keys():
            setattr(self, slot, details.pop(slot, param.Undefined))
        if isinstance(default, list | dict):
            details["instantiate"] = True
        super().__init__(default=default, **details)

    @property
    def allowed(self) -> str:
        """The allowed values in words."""
        raise NotImplementedError

    def fault(self, value: Any) -> str:
        """What is wrong with ``value`` and what is allowed, "" when it can be taken."""
        where, fault = next(self.faults(value), ("", ""))
        return f"{where} {fault}" if where else fault

    def faults(self, value: Any) -> Faults:
        """The same for each part of ``value``, with where it stands ("[1]", ".calcium"; "" for all of it).

        A field implements ``fault``, or ``faults`` if its values have parts.
        """
        if fault := self.fault(value):
            yield "", fault

    def read(self, raw: Any, path: str) -> Any:
        """Value from its JSON form at ``path``. Raises ScenarioError."""
        return self.duplicate(self.accepted(raw, path))

    def accepted(self, raw: Any, path: str) -> Any:
        """``raw`` itself. Raises ScenarioError for its first fault."""
        for where, fault in self.faults(raw):
            raise ScenarioError(path + where, fault)
        return raw

    def write(self, value: Any) -> Any:
        """JSON form of ``value``."""
        return self.duplicate(value)

    def duplicate(self, value: Any) -> Any:
        """Independent copy of ``value``; texts, numbers and frozen objects are their own."""
        return value.copy() if isinstance(value, list | dict) else value

    def _validate(self, value: Any) -> None:
        # Param calls this on every assignment; while a class is being made there is no owner yet.
        if self.owner is None or (value is None and self.default is None):
            return
        if fault := self.fault(value):
            raise ScenarioError(self.name, fault)


class Value(Field, param.Parameter):
    """Field that is held by a plain Param parameter."""

    __slots__ = ["required"]
    _slot_defaults = param.Parameter._slot_defaults | {"required": False}


def span(bounds: Bounds, unit: str = "") -> str:
    """Bounds in words, with the unit."""
    low, high = bounds or (None, None)
    suffix = f" {unit}" if unit else ""
    if low is None and high is None:
        return "any number" + (f" of {unit}" if unit else "")
    if high is None:
        return f"{low:g}{suffix} or more"
    return f"{low:g} to {high:g}{suffix}" if low is not None else f"{high:g}{suffix} or less"


def outside(value: float, bounds: Bounds) -> bool:
    """Whether a number lies outside bounds; None is an open end."""
    low, high = bounds or (None, None)
    return (low is not None and value < low) or (high is not None and value > high)


def number_fault(value: Any, allowed: str, what: str = "a number") -> str:
    """What keeps ``value`` from being a usable number at all."""
    if isinstance(value, bool) or not isinstance(value, int | float):
        return f"{shown(value)} is not {what}; allowed {allowed}"
    if abs(value) > LARGEST_NUMBER or math.isnan(value):
        return f"{shown(value)} is not a number of sensible size; allowed {allowed}"
    return ""


class Number(Value):
    """A number within bounds; ``whole`` admits integers only. An integer stays an integer."""

    __slots__ = ["bounds", "step", "unit", "whole"]
    _slot_defaults = Value._slot_defaults | {"unit": "", "bounds": None, "step": None, "whole": False}

    @property
    def each(self) -> str:
        """What a single number may be, in words."""
        return ("whole numbers, " if self.whole else "") + span(self.bounds, self.unit)

    @property
    def allowed(self) -> str:
        return self.each

    def single_fault(self, value: Any) -> str:
        """What is wrong with a single number."""
        if fault := number_fault(value, self.each):
            return fault
        if self.whole and not isinstance(value, int):
            return f"{shown(value)} is not a whole number; allowed {self.each}"
        return f"{shown(value)} is out of range; allowed {self.each}" if outside(value, self.bounds) else ""

    def fault(self, value: Any) -> str:
        return self.single_fault(value)


class Numbers(Number):
    """A list of one to ``most`` numbers, each within the bounds."""

    __slots__ = ["most"]
    _slot_defaults = Number._slot_defaults | {"most": 4}
    fault = Field.fault

    @property
    def allowed(self) -> str:
        return f"a list of 1 to {self.most} numbers, each {self.each}"

    def faults(self, value: Any) -> Faults:
        if fault := list_fault(value, 1, self.most, self.allowed):
            yield "", fault
            return
        for position, number in enumerate(value):
            if fault := self.single_fault(number):
                yield f"[{position}]", fault


class Amounts(Number):
    """Numbers by name, each within the bounds."""

    __slots__ = []
    fault = Field.fault

    @property
    def allowed(self) -> str:
        return f"an object with numbers by name, each {self.each}"

    def faults(self, value: Any) -> Faults:
        if fault := object_fault(value, MOST_NAMED):
            yield "", fault
            return
        for name, number in value.items():
            if fault := text_fault(name, NAME_LENGTH) or self.single_fault(number):
                yield f".{clipped(name)}", fault


def list_fault(value: Any, least: int, most: int, allowed: str) -> str:
    """What is wrong with something that must be a list of a certain length."""
    if not isinstance(value, list):
        return f"{shown(value)} is not a list; allowed {allowed}"
    count = f"{len(value)} part" + "s" * (len(value) != 1)
    return "" if least <= len(value) <= most else f"the list has {count}; allowed {allowed}"


def text_fault(value: Any, limit: int, lines: bool = False) -> str:
    """What is wrong with a text: its kind, length, or characters that cannot be seen."""
    allowed = f"text of at most {limit} characters"
    if not isinstance(value, str):
        return f"{shown(value)} is not text; allowed {allowed}"
    if len(value) > limit:
        return f"{len(value)} characters are too many; allowed {allowed}"
    spacing = "\n\r\t" if lines else ""
    for character in value:
        hidden = unicodedata.category(character) in _HIDDEN and character not in spacing
        if hidden or character in _OVERRIDING_DIRECTION:
            return f"contains the hidden character U+{ord(character):04X}; allowed {allowed} that can be seen"
    return ""


class Text(Field, param.String):
    """Text of limited length without hidden characters; ``lines`` allows line breaks."""

    __slots__ = ["limit", "lines", "required"]
    _slot_defaults = param.String._slot_defaults | {"limit": NAME_LENGTH, "lines": False, "required": False}

    @property
    def allowed(self) -> str:
        return f"text of at most {self.limit} characters"

    def fault(self, value: Any) -> str:
        fault = text_fault(value, self.limit, self.lines)
        if not fault and self.required and not value.strip():
            return f"is empty; allowed {self.allowed}"
        return fault


class Id(Text):
    """A short handle used in addresses: lower-case letters, digits, underscore, hyphen."""

    __slots__ = []

    @property
    def allowed(self) -> str:
        return f"lower-case letters, digits, _ and -, starting with a letter, at most {NAME_LENGTH}"

    def fault(self, value: Any) -> str:
        if isinstance(value, str) and len(value) <= NAME_LENGTH and _ID.fullmatch(value):
            return ""
        return f"{shown(value)} is not an id; allowed {self.allowed}"


class Texts(Value):
    """A list of texts; ``names``: they are different and there is at least one."""

    __slots__ = ["limit", "most", "names"]
    _slot_defaults = Value._slot_defaults | {"limit": NAME_LENGTH, "most": 12, "names": False}
    fault = Field.fault

    @property
    def allowed(self) -> str:
        return f"a list of 1 to {self.most} names" if self.names else f"a list of at most {self.most} texts"

    def faults(self, value: Any) -> Faults:
        if fault := list_fault(value, int(self.names), self.most, self.allowed):
            yield "", fault
            return
        for position, text in enumerate(value):
            if fault := text_fault(text, self.limit):
                yield f"[{position}]", fault
            elif not text.strip():
                yield f"[{position}]", f"is empty; allowed text of at most {self.limit} characters"
            elif self.names and text in value[:position]:
                yield f"[{position}]", f"{shown(text)} is there twice; allowed once"


class Flag(Value):
    """True or false."""

    __slots__ = []
    _slot_defaults = Value._slot_defaults | {"default": False}

    @property
    def allowed(self) -> str:
        return "true or false"

    def fault(self, value: Any) -> str:
        return (
            ""
            if isinstance(value, bool)
            else f"{shown(value)} is neither true nor false; allowed {self.allowed}"
        )


class Choice(Value):
    """One word of a list; ``what`` names such a word in messages ("a solid")."""

    __slots__ = ["choices", "what"]
    _slot_defaults = Value._slot_defaults | {"choices": (), "what": "a choice"}

    @property
    def allowed(self) -> str:
        return listed(self.choices)

    def single_fault(self, value: Any) -> str:
        """What is wrong with a single word."""
        known = isinstance(value, str) and value in self.choices
        return "" if known else unknown(value, self.what, self.choices)

    def fault(self, value: Any) -> str:
        return self.single_fault(value)


class Choices(Choice):
    """A list of different words of a list."""

    __slots__ = []
    fault = Field.fault

    @property
    def allowed(self) -> str:
        return f"a list of {listed(self.choices)}"

    def faults(self, value: Any) -> Faults:
        if fault := list_fault(value, 0, len(self.choices), self.allowed):
            yield "", fault
            return
        for position, word in enumerate(value):
            if fault := self.single_fault(word):
                yield f"[{position}]", fault
            elif word in value[:position]:
                yield f"[{position}]", f"{shown(word)} is there twice; allowed once"


def object_fault(value: Any, most: int | None = None) -> str:
    """What is wrong with something that must be a JSON object, of at most so many parts."""
    if not isinstance(value, dict):
        return f"{shown(value)} is not an object; allowed {{…}} with named parts"
    return "" if most is None or len(value) <= most else f"{len(value)} parts are too many; allowed {most}"


def check_keys(raw: Mapping[str, Any], allowed: Iterable[str], path: str) -> None:
    """Raise ScenarioError for the first key of ``raw`` that is not allowed."""
    allowed = tuple(allowed)
    for key in raw:
        if key not in allowed:
            raise ScenarioError(join(path, key), unknown_key(key, allowed))
