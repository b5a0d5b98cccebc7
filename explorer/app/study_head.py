"""What stands above the main plot of a long calculation: what it is of, what it found, how far it is."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from explorer.app.choosers import readout_picker
from explorer.app.errand import Errand, progress
from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import STUDY_STYLES


class StudyHead(LiveView):
    """Choice of the readout, a note, and the progress of the errand.

    readout, note: say what to show. choose: gets the key of the readout chosen. again: begins the calculation
    anew after it was stopped. title: what choosing another readout does. save: the menu that saves the plot.
    """

    css = STUDY_STYLES

    def __init__(
        self,
        errand: Errand,
        readout: Callable[[], str],
        choose: Callable[[str], object],
        note: Callable[[], str],
        again: Callable[[], None],
        title: str,
        save: Callable[[], list[Node]] = list,
        **settings: Any,
    ) -> None:
        self.errand = errand
        self._readout, self._choose, self._title = readout, choose, title
        self._note, self._again, self._save = note, again, save
        super().__init__(sizing_mode="stretch_width", **settings)
        errand.param.watch(lambda *events: self.refresh(), ["busy", "part", "stopped", "refusal"])

    def describe(self) -> Node:
        words = self._note()
        return node(
            "div", "head",
            *readout_picker("readout", self._readout(), self._choose, self._title, look="pick"),
            node("span", "note", text=words, title=words),
            progress(self.errand, self._again, "Progress of the calculation"), *self._save(),
        )  # fmt: skip
