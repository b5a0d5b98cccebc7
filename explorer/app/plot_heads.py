"""What stands above each plot: its title, or the choice of what the plot shows."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from explorer.app.choosers import readout_picker, stage_picker
from explorer.app.entry import Entries
from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import VIEW_STYLES
from explorer.app.pickers import segments
from explorer.app.saving import Plate, save_menu
from explorer.app.state import Session
from explorer.app.text import plain
from explorer.scenario.outcome import FINISHED
from explorer.scenario.readouts import READOUTS
from explorer.studies.pictures import Picture

FAMILIES = ("carbonate", "chlorine", "ammonia", "phosphate", "silicate", "borate")
FURTHER_FAMILIES = ("fluoride", "sulfate", "sulfite", "acetate", "citrate", "aluminium", "iron")
DEFAULT_FAMILY, DEFAULT_READOUT = "carbonate", "ccpp"


def family_choice(session: Session) -> str:
    """Family of species shown; one of an acid that is gone falls back to the default."""
    family = session.choices.get("family") or _planned(session, "family", DEFAULT_FAMILY)
    return family if family in family_names(session) else DEFAULT_FAMILY


def readout_choice(session: Session) -> str:
    """Readout of the fourth plot."""
    key = session.choices.get("readout") or _planned(session, "readout", DEFAULT_READOUT)
    return key if key in READOUTS else DEFAULT_READOUT


def _planned(session: Session, what: str, usual: str) -> str:
    """What the scenario wants to be shown of its sweep, the usual where it says nothing."""
    sweep = session.scenario.sweep
    return (getattr(sweep, what) if sweep is not None else None) or usual


def stage_choice(session: Session, plot: str) -> str:
    """Where in the plant a plot looks; a place that is gone falls back to the finished water."""
    stage, point = session.choices.get(f"{plot} stage", FINISHED), session.point
    there = point is not None and stage in point and stage != point.stages[-1].id
    return stage if there else FINISHED


def family_names(session: Session) -> dict[str, str]:
    """Families of species that can be shown, key to name; the scenario's own acids last."""
    names = {family: f"{family} species" for family in (*FAMILIES, *FURTHER_FAMILIES)}
    return names | {acid.id: f"{plain(acid.name or acid.id, 40)} species" for acid in session.scenario.acids}


class Head(LiveView):
    """Title and note above one plot."""

    css = VIEW_STYLES

    def __init__(self, session: Session, **settings: Any) -> None:
        self.session = session
        self.entries = Entries()
        self.said = ("", "", "")
        self.saved: Callable[[], Plate | None] | None = None
        """Gives the plot below as it is saved."""
        super().__init__(sizing_mode="stretch_width", **settings)
        self.refresh()

    def say(self, picture: Picture) -> None:
        """Show the words of a picture."""
        said = (picture.title, picture.note, picture.empty)
        if said != self.said:
            self.said = said
            self.refresh()

    def describe(self) -> Node:
        _, note, empty = self.said
        words = plain(empty, 160) or note
        return node(
            "div",
            "head",
            *self.heading(),
            node("span", "note empty" if empty else "note", text=words, title=words),
            *self.extras(),
            *save_menu(self.session, self.saved, self.said[0]),
        )

    def heading(self) -> list[Node]:
        """The title, or the control that chooses what it names."""
        return [node("h3", "title", text=self.said[0])]

    def place(self, plot: str) -> list[Node]:
        """The choice of the place in the plant that a plot looks at."""
        session = self.session
        if session.point is None:
            return []
        return stage_picker(
            "stage", session.point, stage_choice(session, plot),
            lambda stage: session.choose(**{f"{plot} stage": stage}), "Where in the plant", look="pick place",
        )  # fmt: skip

    def extras(self) -> list[Node]:
        """Controls at the right end."""
        return []


class SpeciesHead(Head):
    """Chooses the family of species and the scale."""

    def heading(self) -> list[Node]:
        names = {key: f"{name[:1].upper()}{name[1:]}" for key, name in family_names(self.session).items()}
        shown = family_choice(self.session)
        family = self.entries.choice("family", "Family of species", names, shown, self._show, look="pick")
        return [family, *self.place("species")]

    def extras(self) -> list[Node]:
        scales = {"share": ("%", "Percent of the family"), "log": ("log", "log₁₀ of mol/L")}
        chosen = "log" if self.session.choices.get("log") else "share"
        return [segments("scale", "Scale of the species plot", scales, chosen, self._scale)]

    def _show(self, family: str) -> None:
        self.session.choose(family=family)

    def _scale(self, scale: str) -> None:
        self.session.choose(log=scale == "log")


class ReadoutHead(Head):
    """Chooses the readout."""

    def heading(self) -> list[Node]:
        readout = readout_picker(
            "readout",
            readout_choice(self.session),
            self._show,
            "Choose the readout of this plot",
            look="pick",
        )
        return [*readout, *self.place("chosen")]

    def _show(self, key: str) -> None:
        self.session.choose(readout=key)
