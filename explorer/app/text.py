"""Text that came from a file or a keyboard, made fit for the page."""

from __future__ import annotations

import html

from explorer.scenario.words import compact, formula_text, in_sentence, plain, unit_text

__all__ = ["compact", "esc", "formula_text", "in_sentence", "plain", "unit_text"]


def esc(text: object, limit: int = 120) -> str:
    """``plain`` text with the characters HTML gives a meaning to escaped; for every sink that reads HTML."""
    return html.escape(plain(text, limit))
