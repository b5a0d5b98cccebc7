"""A view as plain data: Python says what is on the page, one small script keeps the page to it.

A view is a tree of :class:`Node`. :class:`LiveView` compares every new tree with the one on the page. While
the shape is the same only the texts and attributes that differ are sent, so typing, focus and scrolling are
never disturbed; another shape is matched piece by piece by key. Text reaches the page as text, never as
markup: a name from a file cannot become HTML.
"""

import json
from collections.abc import Callable, Iterable
from dataclasses import dataclass, field
from functools import cache
from pathlib import Path
from typing import Any, ClassVar

import param
from panel.custom import JSComponent

from explorer.app.text import plain

FOLDER = Path(__file__).parent
LONGEST_TEXT = 400
"""Characters of one text on the page; longer ones end in an ellipsis."""


@cache
def style(name: str) -> str:
    """Content of a style file beside this module; one text for all views of all pages."""
    return (FOLDER / name).read_text(encoding="utf-8")


Handler = Callable[[Any], None]
"""What a node does with the value the page reports: a text, a number, a truth value, or None for a press."""


@dataclass(slots=True)
class Node:
    """One element: ``tag`` is its HTML name, ``key`` its name on the page and in reports from there.

    ``properties`` are HTML attributes; ``value`` is what an input shows, ``checked`` whether a box is ticked,
    and ``colour`` sets the CSS variable of that name, as any name with ``--`` does. None and False leave an
    attribute out.
    """

    tag: str
    key: str = ""
    properties: dict[str, Any] = field(default_factory=dict)
    children: list["Node"] = field(default_factory=list)
    on: Handler | None = None

    def walk(self) -> Iterable["Node"]:
        """This node and all below it, parents first, in reading order."""
        yield self
        for child in self.children:
            yield from child.walk()

    def find(self, key: str) -> "Node":
        """The node with this key, here or below; KeyError when there is none."""
        for node in self.walk():
            if node.key == key:
                return node
        raise KeyError(key)

    def words(self) -> str:
        """All text of this node and below, as it is read, joined by blanks."""
        return " ".join(str(node.properties["text"]) for node in self.walk() if node.properties.get("text"))


def node(
    tag: str,
    look: str = "",
    *children: Node | None,
    text: str | None = None,
    key: str = "",
    on: Handler | None = None,
    **properties: Any,
) -> Node:
    """A node with CSS classes ``look``.

    ``aria_label`` becomes ``aria-label``; children and properties that are None are left out.
    """
    wanted = {name.strip("_").replace("_", "-"): value for name, value in properties.items()}
    if look:
        wanted["class"] = look
    if text is not None:
        wanted["text"] = plain(text, LONGEST_TEXT)
    wanted = {name: value for name, value in wanted.items() if value is not None and value is not False}
    return Node(tag, key, wanted, [child for child in children if child is not None], on)


def _wire(item: Node) -> list[Any]:
    properties = item.properties if item.on is None else item.properties | {"data-on": True}
    return [item.tag, item.key, properties, [_wire(child) for child in item.children]]


def _shape(nodes: list[Node]) -> list[tuple[str, str, int, bool]]:
    return [(item.tag, item.key, len(item.children), item.on is None) for item in nodes]


class LiveView(JSComponent):
    """Shows a tree of nodes and brings what the user does to the nodes' handlers.

    ``tree`` is the whole tree as JSON text, ``patch`` everything that has changed in place since: for each
    node, by its position in reading order, the attributes with their new values (null: taken away). Both say
    which report of the page was the last ``heard``, so that a slider that is further by then is left alone.
    """

    tree = param.String(default="{}")
    patch = param.String(default="{}")

    _esm = FOLDER / "live_view.js"

    css: ClassVar[tuple[str, ...]] = ("live_view.css",)
    """Style files beside this module: page styles stop at a shadow root, so each view carries its own."""

    def __init__(self, **settings: Any) -> None:
        self._nodes: list[Node] = []
        self._changes: dict[int, dict[str, Any]] = {}
        self._handlers: dict[str, Handler] = {}
        self._serial = self._heard = 0
        super().__init__(**({"stylesheets": [style(name) for name in self.css]} | settings))

    def describe(self) -> Node:
        """The tree to show now; subclasses say what it is."""
        raise NotImplementedError

    def refresh(self, answered: str = "") -> None:
        """Bring the page to what :meth:`describe` says now.

        answered: key of a field whose shown value is sent even if it is the old one, because the user has
        typed another there meanwhile.
        """
        root = self.describe()
        nodes = list(root.walk())
        self._handlers = {item.key: item.on for item in nodes if item.on is not None}
        if _shape(nodes) != _shape(self._nodes):
            self._nodes, self._changes = nodes, {}
            self.param.update(tree=_text(heard=self._heard, root=_wire(root)), patch="{}")
            return
        changed = False
        for position, (old, new) in enumerate(zip(self._nodes, nodes, strict=True)):
            names = {
                name
                for name in old.properties.keys() | new.properties.keys()
                if old.properties.get(name) != new.properties.get(name)
            }
            if answered and new.key == answered:
                names |= {"value", "checked"} & new.properties.keys()
            if names:
                changed = True
                self._changes.setdefault(position, {}).update({n: new.properties.get(n) for n in names})
        self._nodes = nodes
        if changed:
            # The serial makes a repeated answer a new value, which otherwise would not be sent.
            self._serial += 1
            self.patch = _text(serial=self._serial, heard=self._heard, changes=self._changes)

    @property
    def nodes(self) -> list[Node]:
        """All nodes on the page, in reading order."""
        return self._nodes

    def shown(self, key: str) -> Node:
        """The node with this key as it is on the page; KeyError when there is none."""
        return self._nodes[0].find(key)

    def __contains__(self, key: str) -> bool:
        return any(item.key == key for item in self._nodes)

    def report(self, key: str, value: Any = None) -> None:
        """The user has pressed, entered or chosen something; a key that is no longer there is passed over."""
        handler = self._handlers.get(key)
        if handler is not None:
            handler(value)
            self.refresh(answered=key)

    def _handle_msg(self, data: Any) -> None:
        if isinstance(data, dict) and isinstance(data.get("key"), str):
            if isinstance(data.get("number"), int):
                self._heard = data["number"]
            self.report(data["key"], data.get("value"))


def _text(**parts: Any) -> str:
    return json.dumps(parts, ensure_ascii=False)
