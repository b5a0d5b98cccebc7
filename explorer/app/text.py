"""Text that came from a file or a keyboard, made fit for the page."""

from __future__ import annotations

import html

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
