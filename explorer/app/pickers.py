"""Menus, searchable lists that open over the page, and buttons of which one is pressed."""

from collections.abc import Callable, Container, Iterable
from dataclasses import dataclass

from explorer.app.live_view import Handler, Node, node


@dataclass(frozen=True)
class Choice:
    """One line of a list: what it is called, a word on the right, further words it is found by."""

    key: str
    label: str
    aside: str = ""
    words: str = ""


@dataclass(frozen=True)
class Act:
    """One line of a menu and what it does; ``None`` instead of ``run`` greys it out."""

    key: str
    label: str
    run: Callable[[], object] | None
    danger: bool = False


def _press(run: Callable[[], object]) -> Handler:
    return lambda value: run()


def menu(key: str, label: str, acts: Iterable[Act], sign: str = "⋯") -> list[Node]:
    """The button ``sign`` and the menu it opens. label: what the menu is about, for screen readers."""
    lines = [
        node(
            "button", "danger" if act.danger else "", text=act.label, key=f"{key}:{act.key}", type="button",
            role="menuitem", on=_press(act.run) if act.run else None, disabled=act.run is None,
        )
        for act in acts
    ]  # fmt: skip
    sheet = f"{key}:menu"
    button = node(
        "button", "more", text=sign, key=f"{sheet}-button", type="button", popovertarget=sheet,
        aria_label=label, title=label, aria_haspopup="menu", aria_expanded="false",
    )  # fmt: skip
    return [
        button,
        node("div", "", *lines, key=sheet, id=sheet, popover="auto", role="menu", aria_label=label),
    ]


def picker(
    key: str,
    label: str,
    groups: dict[str, list[Choice]],
    pick: Callable[[str], object],
    *,
    look: str = "add",
    hint: str = "Search",
    title: str = "",
) -> list[Node]:
    """A button and the list it opens, searched by typing.

    groups: choices under their headings. pick: gets the key of the chosen one.
    """
    sheet = f"{key}:list"

    def line(choice: Choice) -> Node:
        aside = node("small", text=choice.aside) if choice.aside else None
        return node(
            "button", "", node("span", text=choice.label), aside, key=f"{key}:{choice.key}", type="button",
            on=lambda value: pick(choice.key),
            data_words=f"{choice.label} {choice.aside} {choice.words}".lower(),
        )  # fmt: skip

    sections = [
        node("div", "", node("h4", text=name), *map(line, choices), key=f"{sheet}:{name}", data_group=True)
        for name, choices in groups.items()
        if choices
    ]
    search = node(
        "input", "words", key=f"{sheet}:search", type="text", placeholder=hint, aria_label=hint,
        autocomplete="off", data_filter=True, autofocus=True,
    )  # fmt: skip
    button = node(
        "button", look, text=label, key=f"{sheet}-button", type="button", popovertarget=sheet,
        title=title or None, aria_haspopup="dialog", aria_expanded="false",
    )  # fmt: skip
    nothing = node("p", "", text="Nothing here has these words.", data_none=True, hidden=True)
    body = node(
        "div", "list", node("div", "search", search), *sections, nothing,
        key=sheet, id=sheet, popover="auto", role="dialog", aria_label=label,
    )  # fmt: skip
    return [button, body]


def spoken_name(text: str, hint: str) -> str | None:
    """Name of a button for screen readers: its hint, with the text on it for those who speak to the page."""
    if text.lower() in hint.lower():
        return hint
    return f"{text}: {hint}" if hint else None


def segments(
    key: str,
    label: str,
    options: dict[str, tuple[str, str]],
    chosen: str,
    choose: Callable[[str], object],
    disabled: Container[str] = (),
) -> Node:
    """Buttons side by side of which one is pressed; ``options``: what is chosen, its words, and a hint."""

    def segment(name: str, words: str, hint: str) -> Node:
        return node(
            "button", "", text=words, title=hint or None, aria_label=spoken_name(words, hint),
            key=f"{key}:{name}", type="button", aria_pressed=str(name == chosen).lower(),
            disabled=name in disabled, on=_press(lambda: choose(name)),
        )  # fmt: skip

    buttons = [segment(name, *words) for name, words in options.items()]
    return node("div", "segments", *buttons, role="group", aria_label=label)
