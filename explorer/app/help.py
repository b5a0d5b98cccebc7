"""Help on the page: the keys, the first steps, and a few words for the first visit."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import param
from panel.custom import JSComponent

from explorer.app.look import VIEW_STYLES, styles

STEPS = (
    "Drag the dotted line in a plot, or tap a plot: it turns the dial along the x axis.",
    "Open a card on the left for its analysis or settings; “⋯” has what else can be done with it.",
    "Press a readout to enter its target; “⋮” beside the readouts chooses which are shown.",
    "Keep an option, go on, and read the differences; undo takes back any step.",
    "Rest the pointer on a readout or a caption for what it means and where it comes from.",
)

KEYS = (
    ("1 … 9", "open a view"),
    ("← →", "in a plot: move the operating point, with Shift in larger steps"),
    ("Ctrl+S, Ctrl+O", "save, open a scenario file"),
    ("Ctrl+Z, Ctrl+Shift+Z", "undo, redo"),
    ("Enter, Esc", "in a field: take what was typed, take it back"),
    ("Esc", "close a list; leave the meeting view"),
    ("?", "this list"),
)

FIRST = "Drag the dotted line in a plot to turn a share, or a slider here. Press ? for first steps and keys."


class Help(JSComponent):
    """The button "?" and the keys of the page.

    open_view: gets the number of a view, 1 for the first. move: gets steps to move the operating point by.
    """

    steps = param.List(default=list(STEPS))
    keys = param.List(default=[list(pair) for pair in KEYS])

    _esm = "help.js"

    def __init__(
        self, open_view: Callable[[int], object], move: Callable[[int], object], **settings: Any
    ) -> None:
        self._open_view, self._move = open_view, move
        super().__init__(stylesheets=styles(VIEW_STYLES), **settings)

    def _handle_msg(self, data: Any) -> None:
        if not isinstance(data, dict):
            return
        view, steps = data.get("view"), data.get("steps")
        if isinstance(view, int):
            self._open_view(view)
        if isinstance(steps, int) and abs(steps) <= 10:
            self._move(steps)


class FirstHint(JSComponent):
    """Words for the first visit of a browser."""

    words = param.String(default=FIRST)

    _esm = "hint.js"

    def __init__(self, **settings: Any) -> None:
        super().__init__(stylesheets=styles(VIEW_STYLES), **settings)
