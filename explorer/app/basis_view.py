"""The basis view: everything the results rest on, in sections that unfold and can be searched."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np

from explorer.app.basis_tables import checks_table, constants_table, left_out_table, readouts_table
from explorer.app.errand import REST, Errand
from explorer.app.live_view import Node, node
from explorer.app.sheet import SheetView
from explorer.app.tables import Row, csv_button, over, table
from explorer.app.text import plain, unit_text
from explorer.scenario.evaluate import Outcome
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import NO_VALUE, READOUTS, format_value
from explorer.scenario.version import method
from explorer.scenario.words import formula_text, number_text
from explorer.studies.alarms import alarms, place_of
from explorer.studies.basis import Assumption, HeldValue, Provenance, assumptions, held_values, provenance
from explorer.studies.cautions import EXCLUDED, Hazard, Trial, hazards, next_tests, standing_cautions
from explorer.studies.methods import CONVENTIONS, METHOD, OUTSIDE_CHECKS, STUDIES, VALIDITY, Method
from explorer.studies.outside_checks import outside_checks
from explorer.studies.sweep import Sweep
from explorer.treatment.analysis import Balance
from explorer.treatment.notes import Note

GLYPHS = {"error": "✕", "caution": "▲", "info": "i"}
OPEN = ("assumptions", "holds", "data", "notes")
"""Sections that are unfolded at first."""


@dataclass(frozen=True)
class Rests:
    """What a result rests on, as far as it depends on the scenario. ``strength``: highest ionic strength in
    the plant, mol/L, nan where there is none."""

    outcome: Outcome
    swept: Sweep | None
    assumptions: Sequence[Assumption]
    holds: Sequence[HeldValue]
    provenance: Sequence[Provenance]
    notes: Sequence[Note]
    hazards: Sequence[Hazard]
    tests: Sequence[Trial]
    cautions: Sequence[str]
    strength: float


def gathered(scenario: Scenario, outcome: Outcome, swept: Sweep | None) -> Rests:
    """Everything there is to say about a result."""
    notes = list(dict.fromkeys([*alarms(scenario, outcome, swept), *outcome.notes]))
    strengths = [float(stage.readout("ionic_strength")) for stage in outcome.stages]
    return Rests(
        outcome,
        swept,
        assumptions(scenario, outcome),
        held_values(scenario, outcome),
        list(provenance(scenario)),
        sorted(notes, key=lambda note: list(GLYPHS).index(note.level)),
        hazards(scenario, outcome),
        next_tests(scenario, outcome),
        standing_cautions(scenario),
        float(np.nanmax(strengths)) if np.isfinite(strengths).any() else float("nan"),
    )


class BasisView(SheetView):
    """Assumptions, data, notes and cautions of the present case; method, conventions and constants of all."""

    def __init__(self, *arguments: object) -> None:
        super().__init__(*arguments)
        self.found: Rests | None = None
        self.errand = Errand()
        self._standing: list[Node] = []

    def follow(self, changed: set[str]) -> None:
        session = self.session
        if session.point is None or session.solved is None:
            self.view.refresh()
            return
        scenario, point, swept = session.solved, session.point, session.swept
        if self.found is not None and self.found.outcome is point and self.found.swept is swept:
            self.errand.drop()
            self.view.refresh()
            return
        # What is there already stays until the dials are at rest: nobody reads it while they move.
        rest = REST if self.found is not None else 0.0
        self.errand.start(lambda watch: iter([gathered(scenario, point, swept)]), self._take, rest)

    def closed(self) -> None:
        super().closed()
        self.errand.drop()

    def _take(self, found: Rests) -> None:
        self.found = found
        self.view.refresh()

    def describe(self) -> Node:
        found = self.found
        if found is None:
            return node("div", "pane", node("p", "nothing", text="There is no result yet."))
        search = node(
            "input", "words search", key="search", type="text", placeholder="Search the basis",
            aria_label="Search the basis", autocomplete="off", data_filter=True,
        )  # fmt: skip
        return node(
            "div", "pane stale" if self.session.stale else "pane",
            node("div", "controls", search, node("span", text=method()), node("span", "push"),
                 csv_button(self.session, "assumptions", lambda: _assumption_rows(self.found.assumptions),
                            text="Assumptions as CSV")),
            node("div", "sections grow", *self._sections(found),
                 node("p", "nothing", text="Nothing here has these words.", data_none=True, hidden=True)),
            data_filtered=True,
        )  # fmt: skip

    def _sections(self, found: Rests) -> list[Node]:
        serious = sum(note.level != "info" for note in found.notes)
        count = f"{serious} caution{'s' * (serious != 1)}, {len(found.notes)} in all"
        return [
            _section("assumptions", "Assumptions", str(len(found.assumptions)), _assumed(found.assumptions)),
            *([_section("holds", "Holds", _reached(found.holds), _held(found.holds))] if found.holds else []),
            _section("data", "Data and charge balance", _balanced(found.provenance), _data(found.provenance)),
            _section("notes", "Notes and alarms of this case", count, _notes(found)),
            _section("cautions", "Cautions", "", _list(found.cautions)),
            _section("hazards", "Chemicals used: what to beware of", "", _hazards(found.hazards)),
            _section("tests", "What has to be tested next", str(len(found.tests)), _tests(found.tests)),
            _section("validity", "Limits of validity", "", _validity(found)),
            *self._unchanging(),
        ]

    def _unchanging(self) -> list[Node]:
        """Sections that are the same for every scenario, made once."""
        if not self._standing:
            excluded = [f"{what}: {text}." for what, text in EXCLUDED]
            self._standing = [
                _section("excluded", "What no result counts", "", _list(excluded)),
                _section("method", "How it is calculated", "", _list(METHOD)),
                _section("studies", "Studies", "", _methods("Studies and what they do", STUDIES)),
                _section("conventions", "Conventions", "", _methods("Conventions", CONVENTIONS)),
                _section("constants", "Constants and their sources", "", constants_table()),
                _section("left", "Reactions left out, and why", "", left_out_table()),
                _section("readouts", "Readouts, their meaning and source", "", readouts_table()),
                _section("checks", "Outside checks", _checked(), _list(OUTSIDE_CHECKS), checks_table()),
            ]
        return self._standing


# ---- sections ----------------------------------------------------------------------------------------------


def _section(key: str, title: str, aside: str, *content: Node) -> Node:
    """A part that unfolds; ``aside`` stands behind its title."""
    head = node("summary", "", node("span", "title", text=title), node("span", "aside", text=aside))
    return node("details", "card section", head, *content, key=f"section:{key}", data_group=True,
                open=key in OPEN)  # fmt: skip


def _checked() -> str:
    checks = outside_checks()
    parting = sum(bool(check.parts) for check in checks)
    return f"{len(checks)} cases, {sum(int(check.figures) for check in checks)} figures, ▲ {parting} part"


def _list(sentences: Iterable[str]) -> Node:
    return node("ul", "told", *(node("li", text=text, data_words=True) for text in sentences))


def _assumed(found: Sequence[Assumption]) -> Node:
    rows = [Row([part.what, part.value, unit_text(part.unit), part.basis, part.source]) for part in found]
    heading = ["Assumption", "Value", "Unit", "Basis", "Source"]
    return table("Assumptions", heading, rows, words=range(5), searched=True)


def _assumption_rows(found: Sequence[Assumption]) -> list[list[str]]:
    heading = ["Assumption", "Value", "Unit", "Basis", "Source"]
    return [heading, *([part.what, part.value, part.unit, part.basis, part.source] for part in found)]


def _reached(found: Sequence[HeldValue]) -> str:
    missed = sum(not part.met for part in found)
    return f"{len(found)}, " + (f"▲ {missed} not reached" if missed else "all reached")


def _held(found: Sequence[HeldValue]) -> Node:
    rows = []
    for part in found:
        look, glyph = ("ok", "✓") if part.met else ("bad", "▲")
        state = node("span", f"status {look}", text=f"{glyph} {part.state}")
        goal = f"{part.readout} {part.goal}"
        unit = unit_text(part.unit)
        takes = f"{part.takes} {unit}".rstrip()
        rows.append(Row([plain(part.dial, 90), takes, part.limits, goal, plain(part.where, 90), state]))
    heading = ["Computed", "Takes", "Within", "To hold", "Where", "State"]
    return table("Holds: what is computed, and what it holds", heading, rows, words=range(6), searched=True)


def _balanced(found: Sequence[Provenance]) -> str:
    off = sum(not part.before.acceptable for part in found)
    return f"{len(found)} analyses, " + (f"▲ {off} out of balance" if off else "all balance")


def _data(found: Sequence[Provenance]) -> Node:
    rows = []
    for part in found:
        said = [text for text in (*part.remarks, part.note) if text]
        name = node("span", "", node("span", text=plain(f"{part.water}, {part.season}", 90)),
                    *(node("small", text=plain(text, 390)) for text in said))  # fmt: skip
        after = f"{_percent(part.after)} with {part.closed_with}" if part.closed_with else "left open"
        origin = (part.lab, part.sampled, part.file, part.by)
        figures = (f"{part.before.cations:.2f}", f"{part.before.anions:.2f}")
        rows.append(Row([name, *(plain(text, 90) or NO_VALUE for text in origin), *figures,
                         _before(part.before), after]))  # fmt: skip
    heading = ["Analysis", "Laboratory", "Sampled", "File", "Entered by", over("Cations", "meq/L"),
               over("Anions", "meq/L"), "Charge balance", "After closing"]  # fmt: skip
    return table("Analyses: where they are from and whether their charges balance", heading, rows,
                 words=(0, 1, 2, 3, 4, 7, 8), searched=True)  # fmt: skip


def _percent(balance: Balance) -> str:
    return f"{number_text(balance.percent, 1, signed=True)} %"


def _before(balance: Balance) -> Node:
    look, glyph = ("ok", "✓") if balance.acceptable else ("bad", "▲")
    return node(
        "span", "", node("span", f"status {look}", text=f"{glyph} {_percent(balance)}"),
        node("small", text=f"allowed {balance.limit}"),
    )  # fmt: skip


def _notes(found: Rests) -> Node:
    if not found.notes:
        return node("p", "nothing", text="There is nothing to say.", data_words=True)
    rows = []
    for note in found.notes:
        level = node("span", f"level {note.level}", text=f"{GLYPHS[note.level]} {note.level}")
        where = place_of(found.outcome, note.where) or note.where
        rows.append(Row([level, plain(where, 80), plain(note.text, 390), note.source]))
    heading = ["Level", "Where", "What", "Source"]
    return table("Notes and alarms", heading, rows, words=range(4), searched=True)


def _hazards(found: Sequence[Hazard]) -> Node:
    if not found:
        return node("p", "nothing", text="No chemical with a caution is dosed.", data_words=True)
    rows = [
        Row([part.chemical, plain(", ".join(part.steps), 160), plain("; ".join(part.cautions), 390)])
        for part in found
    ]
    heading = ["Chemical", "Where", "Beware"]
    return table("What to beware of", heading, rows, words=range(3), searched=True)


def _tests(found: Sequence[Trial]) -> Node:
    return node("ol", "told", *(
        node("li", "", node("span", text=plain(test.what, 390)), node("small", text=plain(test.why, 390)),
             data_words=True)
        for test in found
    ))  # fmt: skip


def _validity(found: Rests) -> Node:
    strength = format_value(found.strength, READOUTS["ionic_strength"])
    return _list([VALIDITY, f"Highest ionic strength in this plant: {strength} mol/L."])


def _methods(caption: str, methods: Sequence[Method]) -> Node:
    rows = [
        Row([one.name, " ".join(map(formula_text, one.text.split(" "))), formula_text(one.source)])
        for one in methods
    ]
    return table(
        caption, ["Subject", "What it is", "Source"], rows, words=range(3), searched=True, look="loose"
    )
