"""Parts of the top bar: seasons and kept options as chips, each with a menu and names asked in place."""

from __future__ import annotations

from collections.abc import Callable
from datetime import datetime

from explorer.app.entry import Entries, show_number
from explorer.app.live_view import Node, node
from explorer.app.options import hidden
from explorer.app.pickers import Act, menu
from explorer.app.state import Session
from explorer.app.text import plain
from explorer.scenario import editing, options
from explorer.scenario.fields import NAME_LENGTH
from explorer.scenario.model import Option, Scenario
from explorer.scenario.version import method
from explorer.studies.compare import LETTERS
from explorer.studies.finding import swept_name

MOST_CHIPS = 4
"""More seasons or options than this are chosen from a list instead of chips."""

FEW_SEASONS, FEW_OPTIONS = 2, 2
"""So many chips fit into a narrow bar, too."""

_RENAME = "rename:"
"""Begins the question for the name of an option."""


class Chips:
    """One group of chips. ``asking`` is the question that stands in their place, "" for none; ``changed`` is
    called when another question does."""

    word = ""

    def __init__(self, session: Session, entries: Entries, changed: Callable[[], None]) -> None:
        self.session, self.entries, self.changed = session, entries, changed
        self.asking = ""

    @property
    def scenario(self) -> Scenario:
        return self.session.scenario

    def ask(self, question: str) -> None:
        """Put a question in the place of the chips; "" takes it back."""
        self.asking = question
        self.changed()

    def asker(self, question: str) -> Callable[[], None]:
        return lambda: self.ask(question)

    def name_field(self, key: str, label: str, wish: str, edit: Callable[[str], str]) -> list[Node]:
        """The field that asks for a name. edit: takes the name, returns "" or a refusal."""

        def take(text: str) -> str:
            refusal = edit(text.strip())
            if not refusal:
                self.asking = ""
            return refusal.partition(": ")[2] or refusal

        box, refusal = self.entries.text(
            key, label, wish, take, cancel=self.asker(""), look="words naming", autofocus=True,
            maxlength=NAME_LENGTH, placeholder=label,
        )  # fmt: skip
        return [box, refusal]

    def chip(self, key: str, text: str, chosen: bool, choose: Callable[[], object], *parts: Node) -> Node:
        """One chip. parts: what stands on it instead of ``text``, which then is its hint."""
        return node(
            "button", "chip", *parts, text=None if parts else plain(text, 20), title=plain(text, 160),
            aria_label=plain(text, 160) if parts else None, key=key, type="button",
            aria_pressed=str(chosen).lower(), on=lambda value: choose(),
        )  # fmt: skip

    def list(self, key: str, names: dict[str, str], now: str, choose: Callable[[str], object]) -> Node:
        """The same choice as a list, shown where there is no room for chips."""
        return self.entries.choice(key, self.word, names, now, choose, look="choice folded")

    def group(self, *parts: Node, many: bool = False) -> Node:
        """The group. many: of chips that give way to the list in a narrow bar."""
        label = node("span", "name", text=self.word)
        look = "group many" if many else "group"
        return node("div", look, label, *parts, role="group", aria_label=self.word)


class SeasonChips(Chips):
    """Which season is shown; seasons come, go and are named here."""

    word = "Season"

    def nodes(self) -> Node:
        """The group as it stands now."""
        now = self.scenario.season
        if self.asking == "add":
            return self.group(*self.name_field("season:new", "Name of the new season", "", self._add))
        if self.asking == "rename":
            return self.group(*self.name_field("season:name", "Name of the season", now, self._rename))
        if self.asking == "remove":
            return self.group(*self._confirm())
        more = menu("season", "More for the seasons", self._acts())
        return self.group(*self._choices(), *more, many=len(self.scenario.seasons) > FEW_SEASONS)

    def _choices(self) -> list[Node]:
        seasons = self.scenario.seasons
        names = {name: plain(name, 30) for name in seasons}
        listed = [self.list("season", names, self.scenario.season, self._choose)]
        if len(seasons) > MOST_CHIPS:
            return listed
        return (listed if len(seasons) > FEW_SEASONS else []) + [
            self.chip(
                f"season:{place}", name, name == self.scenario.season, lambda name=name: self._choose(name)
            )
            for place, name in enumerate(seasons)
        ]

    def _acts(self) -> list[Act]:
        now = plain(self.scenario.season, 24)
        last = len(self.scenario.seasons) == 1
        return [
            Act("add", f"Add a season like {now}", self.asker("add")),
            Act("rename", f"Rename {now}", self.asker("rename")),
            Act("remove", f"Remove {now} …", None if last else self.asker("remove"), danger=True),
        ]

    def _confirm(self) -> list[Node]:
        words = f"Remove {plain(self.scenario.season, 24)} with all its analyses?"
        yes = node(
            "button", "chip", text="Remove", key="season:yes", type="button", on=lambda value: self._remove()
        )
        no = node(
            "button", "chip", text="Keep it", key="season:no", type="button", autofocus=True,
            on=lambda value: self.ask(""),
        )  # fmt: skip
        return [node("span", "", text=words, role="alert"), yes, no]

    def _choose(self, name: str) -> None:
        if name != self.scenario.season:
            self.session.choose_season(name)

    def _add(self, name: str) -> str:
        def change(scenario: Scenario) -> None:
            editing.add_season(scenario, name)
            scenario.season = name

        return self.session.edit(f"Add season {plain(name, 30)}", change)

    def _rename(self, name: str) -> str:
        old = self.scenario.season
        if name == old:
            return ""
        return self.session.edit(
            f"Rename season {old}", lambda scenario: editing.rename_season(scenario, old, name)
        )

    def _remove(self) -> None:
        self.asking, name = "", self.scenario.season
        self.session.message = self.session.edit(
            f"Remove season {name}", lambda scenario: editing.remove_season(scenario, name)
        )


class OptionChips(Chips):
    """The kept options by letter, and keeping another one."""

    word = "Options"

    @property
    def chosen(self) -> Option | None:
        """The option the readouts are compared with."""
        name = self.session.choices.get("option")
        return next((option for option in self.scenario.options if option.name == name), None)

    def nodes(self) -> Node:
        """The group as it stands now."""
        if self.asking == "keep":
            return self.group(*self.keeping())
        if self.renamed is not None:
            return self.group(*self.renaming())
        chosen = self.chosen
        more = [] if chosen is None else self.more(chosen)
        many = len(self.scenario.options) > FEW_OPTIONS
        return self.group(*self._choices(), *more, *self.keeping(), many=many)

    def keeping(self) -> list[Node]:
        """The button that keeps an option, or the field that asks for its name."""
        if self.asking == "keep":
            return self.name_field("option:new", "Name of the option", self._wish(), self._keep)
        return [node(
            "button", "chip keep", node("span", text="+ Keep"), node("span", "long", text="as option"),
            key="option:keep", type="button", on=lambda value: self.ask("keep"), aria_label="Keep as option",
            title="Keep everything as it stands, to compare with and to come back to",
        )]  # fmt: skip

    @property
    def renamed(self) -> Option | None:
        """The option whose name is being asked for."""
        asked = self.asking.removeprefix(_RENAME)
        options = self.scenario.options if asked != self.asking else []
        return next((option for option in options if option.name == asked), None)

    def renaming(self) -> list[Node]:
        """The field that asks for another name of an option."""
        old = self.renamed.name
        return self.name_field("option:name", "Name of the option", old, lambda new: self._rename(old, new))

    def _choices(self) -> list[Node]:
        kept = dict(zip(LETTERS, self.scenario.options, strict=False))
        chosen = self.chosen
        names = {"": "no comparison"} | {
            o.name: plain(f"{letter} {o.name}", 40) for letter, o in kept.items()
        }
        listed = [self.list("option", names, "" if chosen is None else chosen.name, self._pick)]
        if len(kept) > MOST_CHIPS:
            return listed
        return (listed if len(kept) > FEW_OPTIONS else []) + [
            self.chip(
                f"option:{letter}", f"Compare with {letter} {option.name}", option is chosen,
                lambda name=option.name: self._choose(name),
                node("span", text=letter), node("span", "long", text=plain(option.name, 40)),
            )
            for letter, option in kept.items()
        ]  # fmt: skip

    def more(self, option: Option, key: str = "option") -> list[Node]:
        """The menu of one option; ``key``: of the menu on the page."""
        name, away = option.name, hidden(self.session)
        letter = LETTERS[self.scenario.options.index(option) % len(LETTERS)]
        title = plain(f"{letter} {name}", 40)
        shown = name not in away
        acts = [
            Act("back", f"Go back to {title}", lambda: self._return(name)),
            Act("line", "Hide its curve" if shown else "Show its curve", lambda: self._show(name, not shown)),
            Act("rename", "Rename", self.asker(f"{_RENAME}{name}")),
            Act("drop", "Delete", lambda: self._drop(name), danger=True),
        ]
        return menu(key, f"More for option {title}", acts)

    def _wish(self) -> str:
        """A name to start from: where the swept dial stands."""
        swept, dials = self.session.swept, self.session.dials
        wish = "As it stands"
        if swept is not None and swept.address in dials:
            dial = dials[swept.address]
            name = swept_name(dial).strip("()")
            wish = f"{show_number(dial.value)} {dial.unit} {name}".replace("  ", " ")
        return options.free_name(self.scenario, wish)

    def _pick(self, name: str) -> None:
        self.session.choose(option=name)

    def _choose(self, name: str) -> None:
        chosen = self.chosen
        self.session.choose(option="" if chosen is not None and chosen.name == name else name)

    def _keep(self, name: str) -> str:
        stamp = {"kept": datetime.now().strftime("%Y-%m-%d %H:%M"), "method": method()}
        refusal = self.session.edit(
            f"Keep {plain(name, 30)}", lambda scenario: editing.keep_option(scenario, name, **stamp)
        )
        if not refusal:
            self.session.choose(option=name)
        return refusal

    def _rename(self, old: str, new: str) -> str:
        refusal = self.session.edit(
            f"Rename {plain(old, 30)}", lambda scenario: options.rename_option(scenario, old, new)
        )
        if not refusal:
            away = [new if name == old else name for name in hidden(self.session)]
            chosen = self.session.choices.get("option")
            self.session.choose(option=new if chosen == old else chosen, hidden=away)
        return refusal

    def _drop(self, name: str) -> None:
        self.session.message = self.session.edit(
            f"Delete {plain(name, 30)}", lambda scenario: options.drop_option(scenario, name)
        )

    def _return(self, name: str) -> None:
        self.session.message = self.session.adopt(
            f"Go back to {plain(name, 30)}", lambda scenario: editing.take_option(scenario, name)
        )

    def _show(self, name: str, shown: bool) -> None:
        others = [other for other in hidden(self.session) if other != name]
        self.session.choose(hidden=others if shown else [*others, name])
