"""Opening and saving scenario files, the unsaved mark, and working copies that survive a reload."""

from __future__ import annotations

import base64
import binascii
import re
import secrets
from collections import OrderedDict
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from typing import Any

import param
from panel.custom import JSComponent

from explorer.app.about_card import first_sentence
from explorer.app.errand import Errand
from explorer.app.file_names import file_name
from explorer.app.history import Work
from explorer.app.look import VIEW_STYLES, styles
from explorer.app.plot_heads import family_choice
from explorer.app.state import Offer, Session
from explorer.app.text import plain
from explorer.scenario.editing import NEW_WATER
from explorer.scenario.files import LARGEST_FILE, ScenarioError, dumps, open_scenario, read_scenario
from explorer.scenario.model import Analysis, Scenario, Water
from explorer.scenario.shipped import shipped
from explorer.studies.progress import Watch

_KEPT_COPIES = 64
SEASON = "all year"
"""The season a new scenario begins with."""

_FILE = re.compile(r"[\w][\w .()\-]{0,90}\.json")


class Shelf:
    """Working copies by browser tab, in memory: the newest ``limit`` are kept until the server stops."""

    def __init__(self, limit: int = _KEPT_COPIES) -> None:
        self.limit = limit
        self._copies: OrderedDict[str, Work] = OrderedDict()

    def take(self, tab: str) -> Work | None:
        """A copy of what is kept for ``tab``, None where there is nothing."""
        kept = self._copies.get(tab)
        return None if kept is None else kept.copy()

    def keep(self, tab: str, work: Work) -> None:
        """Keep ``work``, a live record, for ``tab``."""
        self._copies[tab] = work
        self._copies.move_to_end(tab)
        while len(self._copies) > self.limit:
            self._copies.popitem(last=False)


def tab_name() -> str:
    """A new name for a working copy, which cannot be guessed."""
    return secrets.token_urlsafe(12)


@dataclass(frozen=True)
class Example:
    """A shipped scenario: its title, and what it is about in a sentence."""

    title: str
    story: str = ""


@cache
def examples() -> dict[str, Example]:
    """The shipped scenarios by name; one that cannot be read goes by its name."""
    found = {}
    for name, path in shipped().items():
        try:
            scenario = open_scenario(path)
        except ScenarioError:
            found[name] = Example(name)
            continue
        found[name] = Example(scenario.title, first_sentence(scenario.note))
    return found


def blank() -> Scenario:
    """A scenario to begin with: one water of usual figures, all marked as assumed."""
    water = Water(
        id="water", name="New water", share=100, analyses={SEASON: Analysis(entries=dict(NEW_WATER))}
    )
    made = Scenario(title="New scenario", seasons=[SEASON], season=SEASON, waters=[water])
    return Scenario.from_dict(made.to_dict())


class FileDesk(JSComponent):
    """The buttons Open, Save and Report, and everything of files that has to happen in the page.

    ``tab`` names the working copy for a reload, "" for none. ``writing``: a report is being written.
    """

    title = param.String(default="")
    unsaved = param.Boolean(default=False)
    limit = param.Integer(default=LARGEST_FILE)
    tab = param.String(default="")
    writing = param.Boolean(default=False)

    _esm = "files.js"

    def __init__(self, session: Session, **settings: Any) -> None:
        self._session = session
        super().__init__(stylesheets=styles(VIEW_STYLES), **settings)
        session.param.watch(self._changed, ["structure", "unsaved", "scenario"])
        session.param.watch(lambda event: self._send(event.new), "offered")
        self._errand = Errand()
        self._errand.param.watch(self._errand_changed, ["busy", "refusal"])
        self._changed()

    def open_bytes(self, content: bytes, name: str) -> str:
        """Take over a scenario file; "" or the sentence why it is refused. The old scenario then stays."""
        if len(content) > LARGEST_FILE:
            return self._refuse(
                name, f"is larger than {LARGEST_FILE // 1_000_000} MB; allowed are scenario files"
            )
        try:
            scenario = read_scenario(content)
        except ScenarioError as error:
            return self._refuse(name, str(error))
        self._session.replace(scenario, plain(name, 100))
        return ""

    def open_example(self, name: str) -> str:
        """Take over a shipped scenario by its name."""
        path = shipped().get(name)
        if path is None:
            return self._refuse(name, "is not a shipped scenario")
        try:
            scenario = open_scenario(path)
        except ScenarioError as error:
            return self._refuse(path.name, str(error))
        self._session.replace(scenario)
        return ""

    def new(self) -> None:
        """Begin a scenario with nothing in it."""
        self._session.replace(blank())

    def save(self, wanted: str = "") -> None:
        """Hand the scenario to the browser as a download. wanted: name of the file, else the one it was
        opened or saved as, else one of the title."""
        session = self._session
        known = wanted.strip() or session.file_name or session.scenario.title
        # the name of a file that was opened is kept letter by letter
        kept = known == session.file_name and _FILE.fullmatch(known)
        name = known if kept else file_name(known.removesuffix(".json").removesuffix(".html"))
        session.offer(name, dumps(session.scenario), "application/json")
        session.mark_saved(name)

    def report(self) -> None:
        """Write the report on the scenario as it stands and hand it to the browser; again: stop writing."""
        if self._errand.under_way:
            self._errand.stop()
            self.writing = False
            return
        scenario, family = self._session.scenario.copy(), family_choice(self._session)

        def work(watch: Watch) -> Iterator[str]:
            # Imported late: a page that asks for no report need not wait for it at start-up.
            from explorer.report import report_html

            yield report_html(scenario, family=family)

        def show(text: str) -> None:
            self._session.offer(file_name(f"{scenario.title} report", "html"), text, "text/html")
            self.writing = False

        self._errand.refusal = ""
        self.writing = True
        self._errand.start(work, show, rest=0.0)

    def _errand_changed(self, *events: Any) -> None:
        if self._errand.refusal:
            self._session.message = f"The report was not written: {plain(self._errand.refusal, 400)}"
            self.writing = False

    def _send(self, offer: Offer) -> None:
        self._send_msg({"name": offer.name, "text": offer.text, "type": offer.kind})

    def _refuse(self, name: str, why: str) -> str:
        sentence = f"{plain(name, 60)} was not opened: {plain(why, 400)}"
        self._session.message = sentence
        return sentence

    def _handle_msg(self, data: Any) -> None:
        if not isinstance(data, dict):
            return
        act, name = data.get("act"), str(data.get("name", ""))
        if act == "save":
            self.save(name)
        elif act == "report":
            self.report()
        elif act == "undo":
            self._session.undo()
        elif act == "redo":
            self._session.redo()
        elif act == "too large":
            self._refuse(name, f"is larger than {LARGEST_FILE // 1_000_000} MB; allowed are scenario files")
        elif act == "open":
            try:
                content = base64.b64decode(str(data.get("content", "")), validate=True)
            except binascii.Error:
                self._refuse(name, "did not arrive whole; open it again")
                return
            self.open_bytes(content, name)

    def _changed(self, *events: Any) -> None:
        self.param.update(title=plain(self._session.scenario.title, 100), unsaved=self._session.unsaved)
