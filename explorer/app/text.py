"""Text that came from a file or a keyboard, made fit for the page."""

from __future__ import annotations

import html
import re

# Control characters, and the marks that turn the direction of the text that follows them.
_UNWANTED = (*range(32), *range(127, 160), *range(0x202A, 0x202F), *range(0x2066, 0x206A))
_DROP = dict.fromkeys(_UNWANTED)


def plain(text: object, limit: int = 120) -> str:
    """One line of plain text: no control or direction-changing characters, cut at ``limit`` characters."""
    line = str(text).replace("\n", " ").replace("\t", " ").translate(_DROP).strip()
    return line if len(line) <= limit else line[: limit - 1] + "…"


def esc(text: object, limit: int = 120) -> str:
    """``plain`` text with the characters HTML gives a meaning to escaped; for every sink that reads HTML."""
    return html.escape(plain(text, limit))


_NAMED_AFTER = ("Langelier", "Larson", "Ryznar")


def in_sentence(label: str) -> str:
    """A label inside a sentence: small first letter, except of persons, formulas and signs (pH, HOCl)."""
    first = label.split(" ", 1)[0].rstrip(",")
    written_as_is = any(letter.isupper() or not (letter.isalpha() or letter == "-") for letter in first[1:])
    if first in _NAMED_AFTER or written_as_is:
        return label
    return label[:1].lower() + label[1:]


_SUBSCRIPT = str.maketrans("0123456789", "₀₁₂₃₄₅₆₇₈₉")
_SUPERSCRIPT = str.maketrans("0123456789+-", "⁰¹²³⁴⁵⁶⁷⁸⁹⁺⁻")
_CHARGED = re.compile(r"(.+?)([+-])(\d*)")


def formula_text(name: str) -> str:
    """A species name as chemists write it: "HCO3-" → "HCO₃⁻", "Ca+2" → "Ca²⁺"."""
    charged = _CHARGED.fullmatch(name)
    body, sign, number = charged.groups() if charged else (name, "", "")
    written = re.sub(r"(?<=[A-Za-z)\]])\d+", lambda digits: digits[0].translate(_SUBSCRIPT), body)
    return written + (number + sign).translate(_SUPERSCRIPT)


def unit_text(unit: str) -> str:
    """A unit as it is printed: "mg/L as CaCO3" → "mg/L as CaCO₃"."""
    amount, joint, basis = unit.partition(" as ")
    return f"{amount} as {formula_text(basis)}" if joint else unit


def compact(label: str) -> str:
    """A label for a narrow place: substances with a well-known formula by their formula."""
    return label.replace("Calcium carbonate", "CaCO₃").replace("calcium carbonate", "CaCO₃")
