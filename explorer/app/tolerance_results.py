"""What a tolerance study found, in words and figures: chances, extremes, and which measurement pays."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from typing import Any

import numpy as np

from explorer.app.errand import Errand, progress
from explorer.app.live_view import LiveView, Node, node
from explorer.app.look import STUDY_STYLES
from explorer.app.state import Session
from explorer.app.tables import Row, csv_button, table
from explorer.app.text import compact, in_sentence, plain, unit_text
from explorer.scenario.readouts import READOUTS, Readout, format_value
from explorer.scenario.words import brief_label, number_text, range_text
from explorer.studies.convergence import MORE, Convergence, convergence
from explorer.studies.corners import Extreme
from explorer.studies.progress import Watch
from explorer.studies.ranking import Rank, Ranking
from explorer.studies.spread import Input
from explorer.studies.spread_pictures import MOST_PERCENT, chance_text
from explorer.studies.spread_survey import Survey
from explorer.studies.tolerance import ToleranceStudy

PENDING = "…"
NO_TARGETS = "No targets are entered. Press a readout tile above to enter its target."

MOST_RANKS = 8
"""Inputs whose bars are shown at once; the rest unfolds."""

Found = Callable[[], Survey | None]


class Card(LiveView):
    """A part of the results; ``found`` says what is known so far."""

    css = ("sheet.css", *STUDY_STYLES)

    def __init__(self, session: Session, found: Found, **settings: Any) -> None:
        self.session, self.found = session, found
        super().__init__(sizing_mode="stretch_width", margin=0, **settings)


class Figures(Card):
    """Chances of meeting the targets, and extremes; when asked, what many more samples would say."""

    def __init__(self, session: Session, found: Found, **settings: Any) -> None:
        self.errand = Errand()
        self._settled: tuple[ToleranceStudy, Convergence] | None = None
        super().__init__(session, found, **settings)
        self.errand.param.watch(lambda *events: self.refresh(), ["busy", "part", "stopped", "refusal"])

    def describe(self) -> Node:
        found = self.found()
        if found is None:
            return node("div", "found")
        return node("div", "found", *self._chances(found), *self._extremes(found))

    # ---- chances -------------------------------------------------------------------------------------

    def _chances(self, found: Survey) -> list[Node]:
        heading = node("h3", text="Chance of meeting the entered targets, at the operating point")
        study = found.study
        if not study.targets:
            return [heading, node("p", "hint", text=NO_TARGETS)]
        lines = []
        for place, target in enumerate(study.targets):
            readout = READOUTS[target.readout]
            aim = range_text(target.low, target.high, unit_text(readout.unit))
            lines.append(_chance(f"{brief_label(readout)} {aim}", float(study.here.chance(place)[0])))
        if len(lines) > 1:
            together = _chance("all of them", float(study.here.chance_of_all()[0]), "together")
            lines.append(together)
        return [heading, node("ul", "bars", *lines)]

    # ---- extremes ------------------------------------------------------------------------------------

    def _extremes(self, found: Survey) -> list[Node]:
        readout, study = READOUTS[found.readout], found.study
        unit = unit_text(readout.unit)
        title = f"How far {in_sentence(compact(readout.label))} may go"
        here = study.here
        low, high = here.percentiles(readout.key, (50 - MOST_PERCENT / 2, 50 + MOST_PERCENT / 2))[:, 0]
        rows = [
            Row(["nothing off", _value(readout, float(here.nominal[readout.key][0])), ""]),
            Row([f"{MOST_PERCENT:g} % of the outcomes", _value(readout, low), _value(readout, high)]),
            *self._many_more(readout, found),
            Row(["everything at its worst, here", *self._pair(readout, found.here, place=False)]),
            Row(["… anywhere on the sweep", *self._pair(readout, found.anywhere, place=True)]),
        ]
        heading = [f"{unit}" if unit else "Where", "lowest", "highest"]
        parts = [node("h3", text=title), table(title, heading, rows, look="loose")]
        if found.here is not None:
            parts.append(_corner("What is off here, and which way", found.here, study.inputs))
        if found.anywhere is not None:
            parts.append(_corner("What is off at the worst place", found.anywhere, study.inputs))
        return parts

    def _many_more(self, readout: Readout, found: Survey) -> list[Row]:
        """The same from many more samples, or the button that asks for them once these are all there."""
        if not found.study.final:
            return []
        if self._settled is not None and self._settled[0] is found.study:
            settled = self._settled[1]
            words = f"… with {settled.more // settled.samples} times the samples"
            return [Row([words, _value(readout, settled.many[0]), _value(readout, settled.many[-1])])]
        ask = node(
            "button", "link", text=f"… with {MORE} times the samples?", key="more", type="button",
            on=lambda value: self._ask(found), title="Would many more samples say the same?",
        )  # fmt: skip
        how_far = progress(self.errand, lambda: self._ask(found), "Progress of the further samples")
        return [Row([ask, how_far, None])]

    def _ask(self, found: Survey) -> None:
        scenario, study, key = self.session.solved, found.study, found.readout

        def work(watch: Watch) -> Iterator[tuple[ToleranceStudy, Convergence]]:
            yield study, convergence(scenario, [key], study.samples, study.seed, watch=watch)[key]

        self.errand.start(work, self._take, rest=0.0)

    def _take(self, settled: tuple[ToleranceStudy, Convergence]) -> None:
        self._settled = settled
        self.refresh()

    def _pair(self, readout: Readout, pair: tuple[Extreme, Extreme] | None, place: bool) -> list[str | Node]:
        if pair is None:
            return [PENDING, PENDING]
        return [self._extreme(readout, extreme, place) for extreme in pair]

    def _extreme(self, readout: Readout, extreme: Extreme, place: bool) -> Node:
        words = ""
        if place and extreme.x is not None and self.session.swept is not None:
            dial = self.session.swept.dial
            unit = unit_text(dial.unit)
            words = f"at {_rounded(extreme.x)}{f' {unit}' if unit else ''}"
            if len(self.session.scenario.seasons) > 1:
                words += f", {plain(extreme.season, 30)}"
        return node(
            "span", "", node("span", text=_value(readout, extreme.value)),
            node("small", "aside", text=words) if words else None,
        )  # fmt: skip


def _chance(text: str, part: float, look: str = "") -> Node:
    bar = node("span", "track", node("span", "fill"), aria_hidden="true")
    bar.properties["--part"] = f"{100 * part:.1f}%"
    return node(
        "li", look, node("span", "label", text=text), bar, node("span", "figure", text=chance_text(part))
    )


def _corner(title: str, pair: tuple[Extreme, Extreme], inputs: Sequence[Input]) -> Node:
    """Which way everything is off at both extremes; other seasons may have other inputs."""
    low, high = pair
    labels = {part.name: part.label for part in inputs}
    names = dict.fromkeys([*labels, *low.places, *high.places])
    ends = {name: (low.places.get(name, 0.0), high.places.get(name, 0.0)) for name in names}
    lines = [
        Row([plain(labels.get(name, name), 90), *map(_end, both)]) for name, both in ends.items() if any(both)
    ]
    inside = "" if low.corner and high.corner else " An extreme lies between the ends."
    return node(
        "details", "corner", node("summary", text=title),
        node("p", "hint", text=f"Between −1 and +1: part of the tolerance.{inside}"),
        table(title, ["Input", "lowest", "highest"], lines),
    )  # fmt: skip


def _end(place: float) -> str:
    if place == 0:
        return "not off"
    if abs(place) == 1:
        return "high end" if place > 0 else "low end"
    return number_text(place, 2, signed=True)


class RankingBars(Card):
    """Inputs by the width they add alone, and by the width that halving their tolerance removes."""

    def describe(self) -> Node:
        found = self.found()
        if found is None:
            return node("div", "found")
        heading = node("h3", text="Which measurement pays")
        if found.ranking is None:
            return node("div", "found", heading, node("p", "hint", text=PENDING))
        ranking, readout = found.ranking, READOUTS[found.readout]
        first, rest = ranking.ranks[:MOST_RANKS], ranking.ranks[MOST_RANKS:]
        return node(
            "div", "found",
            node("div", "line", heading,
                 csv_button(self.session, f"ranking {readout.label}", ranking.table, text="CSV")),
            node("p", "hint", text=_advice(ranking, readout)),
            node("p", "key",
                 node("span", "chip removed", aria_hidden="true"),
                 node("span", text="removed by halving it"),
                 node("span", "chip alone", aria_hidden="true"),
                 node("span", text="width it adds alone")),
            _bars(first, ranking, readout),
            node("details", "", node("summary", text=f"{len(rest)} more"), _bars(rest, ranking, readout))
            if rest else None,
        )  # fmt: skip


def _bars(ranks: Sequence[Rank], ranking: Ranking, readout: Readout) -> Node:
    """A pair of bars each, on the scale of the widest."""
    widest = max((max(rank.alone, rank.removed) for rank in ranking.ranks), default=0.0) or 1.0
    lines = []
    for rank in ranks:
        pair = []
        for look, width, words in (
            ("removed", rank.removed, "removed by halving"),
            ("alone", rank.alone, "added alone"),
        ):
            bar = node("span", f"bar {look}", aria_hidden="true")
            bar.properties["--part"] = f"{100 * max(width, 0.0) / widest:.1f}%"
            text = _value(readout, width)
            pair.append(
                node("span", "pair", bar, node("span", "figure", text=text, title=f"{words}: {text}"))
            )
        lines.append(node("li", "", node("span", "label", text=plain(rank.input.label, 90)), *pair))
    return node("ul", "ranks", *lines)


def _advice(ranking: Ranking, readout: Readout) -> str:
    """What pays most, in a sentence."""
    unit = unit_text(readout.unit)
    width = f"{_value(readout, ranking.width)}{f' {unit}' if unit else ''}"
    spread = f"{MOST_PERCENT:g} % of the outcomes lie within a width of {width}."
    best = ranking.ranks[0]
    if ranking.width <= 0 or best.removed <= 0.01 * ranking.width:
        return f"{spread} Halving any one tolerance hardly helps."
    part = number_text(100 * best.removed / ranking.width, 0)
    return f"{spread} Halving the tolerance of {plain(best.input.label, 90)} narrows that by {part} %."


def _value(readout: Readout, value: float) -> str:
    return format_value(value, readout) if np.isfinite(value) else "–"


def _rounded(x: float) -> str:
    return number_text(x, 0 if abs(x) >= 100 else 1 if abs(x) >= 1 else 3)
