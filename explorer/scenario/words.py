"""Words and figures as they are printed, on the page and in the report."""

import math
import re

from explorer.scenario.readouts import MINUS, Readout

# Control characters, and the marks that turn the direction of the text that follows them.
_UNWANTED = (*range(32), *range(127, 160), *range(0x202A, 0x202F), *range(0x2066, 0x206A))
_DROP = dict.fromkeys(_UNWANTED)


def plain(text: object, limit: int = 120) -> str:
    """One line of plain text: no control or direction-changing characters, cut at ``limit`` characters."""
    line = str(text).replace("\n", " ").replace("\t", " ").translate(_DROP).strip()
    return line if len(line) <= limit else line[: limit - 1] + "…"


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


_SHORT = {
    "ccpp": "CaCO₃ potential",
    "hocl_percent": "HOCl share",
    "dic": "Inorganic carbon",
    "chloride_sulfate_ratio": "Chloride to sulfate",
    "si_calcite": "Calcite saturation index",
    "si_aragonite": "Aragonite sat. index",
}


def brief_label(readout: Readout) -> str:
    """Name of a readout where there is little room."""
    if readout.key in _SHORT:
        return _SHORT[readout.key]
    return readout.label if len(readout.label) <= 24 else formula_text(readout.short)


def number_text(value: float, digits: int, signed: bool = False) -> str:
    """``value`` with ``digits`` decimals and a real minus; "–" where there is no value.

    signed: positive values carry a plus. A value that rounds to zero has no sign.
    """
    if not math.isfinite(value):
        return "–"
    text = f"{abs(value):.{digits}f}"
    if not float(text):
        return text
    return (MINUS if value < 0 else "+" if signed else "") + text


def short_number(value: float) -> str:
    """A bound as people write it: no trailing zeros, real minus."""
    text = f"{abs(value):.6g}"
    return (MINUS if value < 0 and float(text) else "") + text


def range_text(low: float | None, high: float | None, unit: str = "") -> str:
    """A target in words: "7.4 to 8.5", "at least 0.3", "at most 50 mg/L"."""
    after = f" {unit}" if unit else ""
    if low is not None and high is not None:
        return f"{short_number(low)} to {short_number(high)}{after}"
    if low is not None:
        return f"at least {short_number(low)}{after}"
    if high is not None:
        return f"at most {short_number(high)}{after}"
    return "no bounds"
