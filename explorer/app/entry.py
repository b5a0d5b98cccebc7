"""Typed numbers: what a text means, and a field that says beside itself when it means nothing.

Browsers' own number inputs swallow a decimal comma (7,5 becomes 75) and send nothing at all when a bound is
broken. Here the page sends the text as typed, this module reads it, and a text that cannot be taken stays in
the field, marked, with one sentence beside it, while the model keeps its last good value.
"""

import math
import re
from collections.abc import Callable, Container
from dataclasses import dataclass
from typing import Any, ClassVar

import param

from explorer.app.live_view import LiveView, Node, node
from explorer.scenario.words import range_text

_NUMBER = re.compile(r"[+-]?(\d+([.,]\d*)?|[.,]\d+)([eE][+-]?\d{1,3})?", re.ASCII)
_GROUPED = re.compile(r"[+-]?[1-9]\d{0,2}(?P<mark>[.,' ])\d{3}")
_SPACES = {"\u00a0": " ", "\u202f": " ", "\u2009": " ", "\u2212": "-"}


class NumberError(ValueError):
    """A text that is not an allowed number; ``str(error)`` is one sentence saying what is allowed."""


def allowed(low: float | None, high: float | None, unit: str = "") -> str:
    """What a field takes, in words: "0 to 100 %", "at least 0 mg/L", "any number"."""
    return "any number" if low is None and high is None else range_text(low, high, unit)


def parse_number(text: str, low: float | None = None, high: float | None = None, unit: str = "") -> float:
    """The number a person means by ``text``, in the unit of the field.

    Taken: digits with at most one decimal point or decimal comma, a sign (also the typographic minus) and an
    exponent ("2.5e-3"). Not guessed at: grouped digits ("1 000", "1,000" could be one or a thousand).

    low, high: inclusive limits, None for none. unit: only for the sentence.
    Raises :class:`NumberError`.
    """
    typed = "".join(_SPACES.get(character, character) for character in text).strip()
    shown = f"“{typed[:24]}{'…' if len(typed) > 24 else ''}”"
    if not typed:
        raise NumberError(f"a number is needed here; allowed: {allowed(low, high, unit)}")
    grouped = _GROUPED.fullmatch(typed)
    if grouped and grouped["mark"] != ".":
        plain = typed.replace(grouped["mark"], "")
        point = typed.replace(grouped["mark"], ".") + "0"
        raise NumberError(f"{shown} can be read in two ways; write {plain} or {point}")
    if not _NUMBER.fullmatch(typed):
        limits = allowed(low, high, unit)
        raise NumberError(f"{shown} is not a number; allowed: {limits}, written like 7.5 or 7,5")
    value = float(typed.replace(",", "."))
    if not math.isfinite(value) or (low is not None and value < low) or (high is not None and value > high):
        raise NumberError(f"{shown} is outside what is allowed: {allowed(low, high, unit)}")
    return value


def show_number(value: float | None, step: float | None = None) -> str:
    """A number as a field shows it: no noise from arithmetic, no exponent for everyday sizes.

    step: with a slider's step the number has at least the step's decimals ("35.0"), and one more where it
    lies between two steps.
    """
    if value is None or not math.isfinite(value):
        return ""
    if value != 0 and not 1e-4 <= abs(value) < 1e7:
        return f"{value:.6g}"
    if step:
        digits = max(0, -math.floor(math.log10(step) + 1e-9))
        rest = abs(value - round(value, digits))
        return f"{value:.{digits if rest < 1e-6 * max(1.0, abs(value)) else digits + 1}f}"
    text = f"{value:.7g}"
    return text if "e" not in text else f"{value:.7f}".rstrip("0").rstrip(".")


@dataclass(frozen=True)
class Slip:
    """A refused entry: the sentence, the text as typed, and what the field showed before.

    typed, shown: None where nothing was typed, as when a button was pressed.
    """

    refusal: str
    typed: str | None = None
    shown: str | None = None


class Entries:
    """The input fields of one view: builds them, reads what is typed, remembers what was refused.

    A field is known by its key. ``slips`` holds what was refused; a slip is forgotten when the field is next
    entered with success, or when its value changes from elsewhere.
    """

    def __init__(self) -> None:
        self.slips: dict[str, Slip] = {}

    def number(
        self,
        key: str,
        label: str,
        shown: str,
        take: Callable[[float], str],
        *,
        low: float | None = None,
        high: float | None = None,
        unit: str = "",
        empty: Callable[[], str] | None = None,
        placeholder: str = "",
        look: str = "number",
        disabled: bool = False,
        hint: str | None = None,
    ) -> tuple[Node, Node]:
        """A field for a number and the place for its message.

        shown: the text of the present value. take: gets the number read, returns "" or a refusal.
        empty: what an emptied field does (None: a number is needed). hint: shown at the pointer.
        """

        def read(text: str) -> str:
            if not text.strip() and empty is not None:
                return empty()
            return take(parse_number(text, low, high, unit))

        name = f"{label}, {unit}" if unit else label
        extras = {"placeholder": placeholder or None, "inputmode": "decimal", "maxlength": 40}
        extras |= {"disabled": True} if disabled else {}
        return self.text(key, name, shown, read, look=look, hint=hint, **extras)

    def text(
        self,
        key: str,
        label: str,
        shown: str,
        take: Callable[[str], str],
        *,
        look: str = "words",
        cancel: Callable[[], object] | None = None,
        hint: str | None = None,
        **properties: Any,
    ) -> tuple[Node, Node]:
        """A field for a text and the place for its message.

        take: returns "" or a refusal; a ValueError it raises is a refusal too. cancel: for a field that asks
        a question, what Escape does; Enter then also takes what stands in the field from the start.
        """

        def commit(value: Any) -> None:
            if value is None and cancel is not None:
                self.refuse(key)
                cancel()
                return
            typed = str(value)
            try:
                refusal = take(typed)
            except ValueError as error:
                refusal = str(error)
            self.refuse(key, typed, refusal, shown)

        slip = self.slips.get(key)
        if slip is not None and slip.shown not in (None, shown):
            self.refuse(key)
            slip = None
        typed = shown if slip is None or slip.typed is None else slip.typed
        refusal = self.refusal(key)
        box = node(
            "input",
            look,
            key=key,
            on=commit,
            type="text",
            value=typed,
            autocomplete="off",
            aria_label=label,
            aria_invalid="true" if refusal else None,
            title=hint or (shown if len(shown) > 12 else None),
            data_asks=cancel is not None,
            **properties,
        )
        return box, message(refusal)

    def choice(
        self,
        key: str,
        label: str,
        options: dict[str, str],
        value: str,
        take: Callable[[str], Any],
        look: str = "choice",
    ) -> Node:
        """A drop-down: ``options`` maps what is stored to what is shown."""

        def commit(chosen: Any) -> None:
            if chosen in options and chosen != value:
                take(chosen)

        entries = [node("option", text=words, value=name) for name, words in options.items()]
        return node("select", look, *entries, key=key, on=commit, value=value, aria_label=label)

    def tick(self, key: str, label: str, ticked: bool, take: Callable[[bool], Any]) -> Node:
        """A box to tick, with its label."""
        box = node("input", key=key, on=lambda value: take(bool(value)), type="checkbox", checked=ticked)
        box.properties["checked"] = ticked
        return node("label", "switch", box, node("span", text=label))

    def refuse(self, key: str, typed: str | None = None, refusal: str = "", shown: str | None = None) -> None:
        """Note a refusal at the field ``key``; without a refusal, that the field is good again."""
        self.slips.pop(key, None)
        if refusal:
            self.slips[key] = Slip(refusal, typed, shown)

    def refusal(self, key: str) -> str:
        """What was refused at ``key``, "" when nothing was."""
        return self.slips[key].refusal if key in self.slips else ""

    def forget(self, standing: Container[str] = ()) -> None:
        """Drop what was refused, except at the keys that are still ``standing``."""
        self.slips = {key: slip for key, slip in self.slips.items() if key in standing}


def message(text: str) -> Node:
    """The place of a field's message: empty and unseen while there is none."""
    return node("span", "message", text=text, role="alert")


class NumberEntry(LiveView):
    """One number on the page: text field, unit, and the message beside it.

    ``value`` is the last good number and never leaves ``low`` … ``high``; it changes on Enter or when the
    field is left, not while typing. Setting ``value`` from Python shows it.
    """

    value = param.Number(default=None, allow_None=True)
    label = param.String(default="number", doc="name for screen readers")
    low = param.Number(default=None, allow_None=True, doc="inclusive lower limit")
    high = param.Number(default=None, allow_None=True, doc="inclusive upper limit")
    unit = param.String(default="", doc="shown behind the field")
    optional = param.Boolean(default=False, doc="an emptied field means None")
    step = param.Number(default=None, allow_None=True, doc="decimals shown; see show_number")

    _rename: ClassVar[dict[str, None]] = dict.fromkeys(
        ("value", "label", "low", "high", "unit", "optional", "step")  # matters of Python alone
    )

    def __init__(self, **settings: Any) -> None:
        self.entries = Entries()
        super().__init__(**settings)
        self.param.watch(self._changed, ["value", "label", "low", "high", "unit", "step"])
        self.refresh()

    @property
    def message(self) -> str:
        """The sentence beside the field, "" when the field is good."""
        return self.entries.refusal("number")

    def enter(self, text: str) -> None:
        """What typing ``text`` and pressing Enter does."""
        self.report("number", text)

    def describe(self) -> Node:
        def take(number: float) -> str:
            self.value = number
            return ""

        def empty() -> str:
            self.value = None
            return ""

        box, refusal = self.entries.number(
            "number",
            self.label,
            show_number(self.value, self.step),
            take,
            low=self.low,
            high=self.high,
            unit=self.unit,
            empty=empty if self.optional else None,
        )
        return node("div", "entry", box, node("span", "unit", text=self.unit), refusal)

    def _changed(self, *events: Any) -> None:
        if any(event.name == "value" for event in events):
            self.entries.forget()
        self.refresh()
