"""The one error a user of scenario files can meet, and the words it is made of."""

import difflib
import json
import unicodedata
from collections.abc import Iterable
from typing import Any

SHOWN_LENGTH = 40
"""Characters of a foreign text that are quoted in a sentence."""

LISTED_LENGTH = 140
"""Characters of a list of allowed words: beyond, nobody reads it to its end."""


class ScenarioError(ValueError):
    """Something in a scenario that cannot be accepted.

    ``path`` is the field (``waters[1].analyses.winter.ph.value``), "" for the scenario as a whole;
    ``message`` says what is wrong and what is allowed. As text both make one sentence.
    """

    def __init__(self, path: str, message: str) -> None:
        self.path, self.message = path, message
        super().__init__(f"{path}: {message}" if path else message)


def join(path: str, key: str | int) -> str:
    """Path of the part ``key`` (a name, or a position in a list) of what is at ``path``."""
    if isinstance(key, int):
        return f"{path}[{key}]"
    name = clipped(key) if key.strip() else f'"{clipped(key)}"'
    return f"{path}.{name}" if path else name


def cleaned(text: str) -> str:
    """A foreign text without characters that cannot be seen."""
    return "".join(character if character.isprintable() else "\ufffd" for character in text)


def clipped(text: str) -> str:
    """A foreign text made fit for a sentence: cleaned, at most ``SHOWN_LENGTH`` long."""
    clean = cleaned(text[: SHOWN_LENGTH + 1])
    return clean if len(clean) <= SHOWN_LENGTH else clean[: SHOWN_LENGTH - 1] + "…"


def shown(value: Any) -> str:
    """A JSON value as a reader would name it: numbers as written, texts quoted, parts by their kind."""
    if isinstance(value, str):
        return f'"{clipped(value)}"'
    if isinstance(value, dict):
        return "an object"
    if isinstance(value, list | tuple):
        return "a list"
    if value is None or isinstance(value, bool | float):
        return json.dumps(value)
    return clipped(str(value)) if isinstance(value, int) else type(value).__name__


def listed(allowed: Iterable[str]) -> str:
    """Allowed words in one line; of many the first, and how many there are."""
    words = tuple(allowed)
    line = ", ".join(words) or "none"
    if len(line) <= LISTED_LENGTH:
        return line
    return f"{line[:LISTED_LENGTH].rpartition(', ')[0]} … ({len(words)} in all)"


def unknown(word: Any, what: str, allowed: Iterable[str], similar: bool = True) -> str:
    """Message for a word outside its list, with the word that was probably meant.

    ``similar`` False guesses only where the spelling is the same but for case and raised digits: a unit that
    merely looks alike may be the wrong one.
    """
    allowed = tuple(allowed)
    return f"{shown(word)} is not {what}{_guess(word, allowed, similar)}; allowed: {listed(allowed)}"


def unknown_key(key: str, allowed: Iterable[str]) -> str:
    """Message for a key that an object cannot have; the key itself stands in the path."""
    allowed = tuple(allowed)
    return f"not known here{_guess(key, allowed)}; allowed: {listed(allowed)}"


def _guess(word: Any, allowed: tuple[str, ...], similar: bool = True) -> str:
    # A text much longer than any word is none of them misspelt, and comparing it takes its time.
    if not isinstance(word, str) or len(word) > 5 * SHOWN_LENGTH:
        return ""
    plain = _plain(word)
    same = [candidate for candidate in allowed if _plain(candidate) == plain]
    close = same or (difflib.get_close_matches(word, allowed, n=1) if similar else [])
    return f" (perhaps {close[0]})" if close else ""


def _plain(word: str) -> str:
    return unicodedata.normalize("NFKC", word).casefold().replace(" ", "")
