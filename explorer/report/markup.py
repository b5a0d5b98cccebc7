"""HTML and SVG built from parts: text is escaped unless it is markup already."""

import html
from collections.abc import Iterable, Iterator
from typing import TypeAlias

Part: TypeAlias = "str | float | Iterable[Part] | None"
"""What may stand inside an element: text, markup, numbers, nothing, or many of these."""

VOID = frozenset({"meta", "br", "circle", "line", "path", "rect", "polygon"})
"""Elements without content, of HTML and of SVG; written so that both an HTML and an XML reader take them."""


class Markup(str):
    """Text that is HTML; nothing else goes to the page unescaped."""

    __slots__ = ()


def escaped(text: object) -> Markup:
    """Text with the characters HTML gives a meaning to escaped."""
    return text if isinstance(text, Markup) else Markup(html.escape(str(text)))


def joined(*parts: Part) -> Markup:
    """Parts one after the other; None leaves no trace."""
    return Markup("".join(_flat(parts)))


def element(name: str, /, *parts: Part, **attributes: object) -> Markup:
    """An element. Attributes: ``class_`` is class, ``_`` else a hyphen; None leaves one out."""
    written = "".join(
        f' {key.strip("_").replace("_", "-")}="{escaped(value)}"'
        for key, value in attributes.items()
        if value is not None
    )
    if name in VOID:
        return Markup(f"<{name}{written}/>")
    return Markup(f"<{name}{written}>{joined(*parts)}</{name}>")


def _flat(parts: Iterable[Part]) -> Iterator[Markup]:
    for part in parts:
        if isinstance(part, str | int | float):
            yield escaped(part)
        elif part is not None:
            yield from _flat(part)
