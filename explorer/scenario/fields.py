"""Declared parts of a scenario: Param parameters that know their rule and their JSON form.

A class of the scenario declares each part once, with label, unit, bounds and meaning. Reading and writing
files, checking an edit, forms and dials all take what they need from that declaration.

Every field offers

``fault(value)``      what is wrong with a value and what is allowed, "" when nothing is
``allowed``           the allowed values in words
``read(raw, path)``   the value from its JSON form; raises ScenarioError with the path
``write(value)``      the JSON form of a value
``duplicate(value)``  an independent copy of a value
"""

import math
import re
import unicodedata
from collections.abc import Iterable, Mapping
from typing import Any

import param

from explorer.scenario.errors import ScenarioError, join, listed, shown, unknown

LARGEST_NUMBER = 1e12
"""No quantity of the trade comes near it; keeps arithmetic finite whatever a file says."""

NAME_LENGTH, TITLE_LENGTH, NOTE_LENGTH = 80, 200, 20_000

_OVERRIDING_DIRECTION = frozenset("\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069")
_ID = re.compile(r"[a-z][a-z0-9_-]*")


class Field:
    """What all declared parts have in common. Mixed into a Param class, which adds the slots."""

    __slots__ = ()

    @property
    def allowed(self) -> str:
        """The allowed values in words."""
        raise NotImplementedError

    def fault(self, value: Any) -> str:
        """What is wrong with ``value`` and what is allowed, "" when it can be taken."""
        raise NotImplementedError

    def read(self, raw: Any, path: str) -> Any:
        """Value from its JSON form at ``path``. Raises ScenarioError."""
        fault = self.fault(raw)
        if fault:
            raise ScenarioError(path, fault)
        return raw

    def write(self, value: Any) -> Any:
        """JSON form of ``value``."""
        return value

    def duplicate(self, value: Any) -> Any:
        """Independent copy of ``value``."""
        return value

    def _validate(self, value: Any) -> None:
        # Param calls this on every assignment; while a class is being made there is no owner yet.
        if self.owner is None or (value is None and self.default is None):
            return
        fault = self.fault(value)
        if fault:
            raise ScenarioError(self.name, fault)


def number_fault(value: Any, allowed: str, what: str = "a number") -> str:
    """What keeps ``value`` from being a usable number at all."""
    if isinstance(value, bool) or not isinstance(value, int | float):
        return f"{shown(value)} is not {what}; allowed {allowed}"
    if not math.isfinite(value) or abs(value) > LARGEST_NUMBER:
        return f"{shown(value)} is not a finite number of sensible size; allowed {allowed}"
    return ""


def span(bounds: tuple[float | None, float | None] | None, unit: str = "") -> str:
    """Bounds in words, with the unit."""
    low, high = bounds or (None, None)
    suffix = f" {unit}" if unit else ""
    if low is None and high is None:
        return f"any number{suffix}" if not suffix else f"any number of{suffix}"
    if high is None:
        return f"{low:g}{suffix} or more"
    return f"{low:g} to {high:g}{suffix}" if low is not None else f"{high:g}{suffix} or less"


class Number(Field, param.Parameter):
    """A number within bounds. An integer stays an integer."""

    __slots__ = ["bounds", "required", "step", "unit", "whole"]
    _slot_defaults = param.Parameter._slot_defaults | {
        "unit": "",
        "bounds": None,
        "step": None,
        "required": False,
        "whole": False,
    }

    def __init__(
        self,
        default: Any = param.Undefined,
        *,
        unit: Any = param.Undefined,
        bounds: Any = param.Undefined,
        step: Any = param.Undefined,
        required: Any = param.Undefined,
        whole: Any = param.Undefined,
        **common: Any,
    ) -> None:
        self.unit, self.bounds, self.step = unit, bounds, step
        self.required, self.whole = required, whole
        super().__init__(default=default, **common)

    @property
    def allowed(self) -> str:
        return ("whole numbers " if self.whole else "") + span(self.bounds, self.unit)

    def fault(self, value: Any) -> str:
        fault = number_fault(value, self.allowed, "a whole number" if self.whole else "a number")
        if fault:
            return fault
        if self.whole and not isinstance(value, int):
            return f"{shown(value)} is not a whole number; allowed {self.allowed}"
        low, high = self.bounds or (None, None)
        if (low is not None and value < low) or (high is not None and value > high):
            return f"{shown(value)} is out of range; allowed {self.allowed}"
        return ""


def text_fault(value: Any, limit: int, lines: bool = False) -> str:
    """What is wrong with a text: its kind, length, or characters that cannot be seen."""
    allowed = f"text of at most {limit} characters"
    if not isinstance(value, str):
        return f"{shown(value)} is not text; allowed {allowed}"
    if len(value) > limit:
        return f"{len(value)} characters are too many; allowed {allowed}"
    spacing = "\n\r\t" if lines else ""
    for character in value:
        hidden = unicodedata.category(character) in ("Cc", "Cs") and character not in spacing
        if hidden or character in _OVERRIDING_DIRECTION:
            return f"contains the hidden character U+{ord(character):04X}; allowed {allowed} that can be seen"
    return ""


class Text(Field, param.String):
    """Text of limited length without hidden characters; ``lines`` allows line breaks."""

    __slots__ = ["limit", "lines", "required"]
    _slot_defaults = param.String._slot_defaults | {"limit": NAME_LENGTH, "lines": False, "required": False}

    def __init__(
        self,
        default: Any = param.Undefined,
        *,
        limit: Any = param.Undefined,
        lines: Any = param.Undefined,
        required: Any = param.Undefined,
        **common: Any,
    ) -> None:
        self.limit, self.lines, self.required = limit, lines, required
        super().__init__(default=default, **common)

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


class Flag(Field, param.Parameter):
    """True or false."""

    __slots__ = ["required"]
    _slot_defaults = param.Parameter._slot_defaults | {"default": False, "required": False}

    def __init__(
        self, default: Any = param.Undefined, *, required: Any = param.Undefined, **common: Any
    ) -> None:
        self.required = required
        super().__init__(default=default, **common)

    @property
    def allowed(self) -> str:
        return "true or false"

    def fault(self, value: Any) -> str:
        return "" if isinstance(value, bool) else f"{shown(value)} is not true or false; allowed {self.allowed}"


class Choice(Field, param.Parameter):
    """One word of a list; ``what`` names such a word in messages ("a solid")."""

    __slots__ = ["choices", "required", "what"]
    _slot_defaults = param.Parameter._slot_defaults | {"choices": (), "required": False, "what": "a choice"}

    def __init__(
        self,
        default: Any = param.Undefined,
        *,
        choices: Any = param.Undefined,
        what: Any = param.Undefined,
        required: Any = param.Undefined,
        **common: Any,
    ) -> None:
        self.choices, self.what, self.required = choices, what, required
        super().__init__(default=default, **common)

    @property
    def allowed(self) -> str:
        return listed(self.choices)

    def fault(self, value: Any) -> str:
        known = isinstance(value, str) and value in self.choices
        return "" if known else unknown(value, self.what, self.choices)


class Choices(Choice):
    """A list of different words of a list."""

    __slots__ = []

    def __init__(self, default: Any = param.Undefined, **common: Any) -> None:
        super().__init__(default, **(common | {"instantiate": True}))

    def fault(self, value: Any) -> str:
        if not isinstance(value, list):
            return f"{shown(value)} is not a list; allowed a list of {self.allowed}"
        faults = (super(Choices, self).fault(word) for word in value)
        repeated = [word for position, word in enumerate(value) if word in value[:position]]
        return next(filter(None, faults), f"{shown(repeated[0])} is there twice; allowed once" if repeated else "")

    def duplicate(self, value: list[str]) -> list[str]:
        return list(value)


class Numbers(Number):
    """A list of numbers, each within the bounds; ``most`` limits how many."""

    __slots__ = ["most"]
    _slot_defaults = Number._slot_defaults | {"most": 4}

    def __init__(self, default: Any = param.Undefined, *, most: Any = param.Undefined, **common: Any) -> None:
        self.most = most
        super().__init__(default, **common)

    @property
    def allowed(self) -> str:
        return f"a list of at most {self.most} numbers, each {span(self.bounds, self.unit)}"

    def fault(self, value: Any) -> str:
        if not isinstance(value, list | tuple):
            return f"{shown(value)} is not a list; allowed {self.allowed}"
        if len(value) > self.most:
            return f"{len(value)} numbers are too many; allowed {self.allowed}"
        return next(filter(None, (super(Numbers, self).fault(number) for number in value)), "")

    def read(self, raw: Any, path: str) -> tuple[float, ...]:
        return tuple(super().read(raw, path))

    def write(self, value: Iterable[float]) -> list[float]:
        return list(value)


def object_fault(value: Any) -> str:
    """What is wrong with something that must be a JSON object."""
    return "" if isinstance(value, dict) else f"{shown(value)} is not an object; allowed {{…}} with named parts"


def check_keys(raw: Mapping[str, Any], allowed: Iterable[str], path: str) -> None:
    """Raise ScenarioError for the first key of ``raw`` that is not allowed."""
    allowed = tuple(allowed)
    for key in raw:
        if key not in allowed:
            raise ScenarioError(join(path, key), unknown(key, "a known key here", allowed))
