"""The report as one page: its sections in order, its style, and the scenario it was made from."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime

from explorer.report import basis, entered, plant, results
from explorer.report.case import Case
from explorer.report.markup import Markup, Part, element, joined
from explorer.report.spread import Tolerances
from explorer.report.style import report_style, svg_style
from explorer.scenario.embedded import embedded
from explorer.scenario.files import dumps
from explorer.scenario.version import method
from explorer.scenario.words import in_sentence
from explorer.studies.cautions import NOT_POTABLE
from explorer.studies.compare import Case as Compared
from explorer.studies.compare import compare, current_case, option_cases, season_cases
from explorer.studies.finding import foot_line

USUAL_FIGURES = ("ph", "buffer_intensity", "ccpp")
MOST_FIGURES = 5
"""Readouts drawn; with the species that makes three rows of two."""

POLICY = "default-src 'none'; style-src 'unsafe-inline'; base-uri 'none'; form-action 'none'"
"""The page may load nothing and run nothing."""


@dataclass(frozen=True)
class Section:
    """A heading with what stands below it, which may be nothing."""

    name: str
    title: str
    content: Markup

    def drawn(self) -> Markup:
        return element("section", element("h2", self.title), self.content, id=self.name)


def page(case: Case, figures: Sequence[str], family: str, written: datetime) -> str:
    """The whole page. ``figures``: readouts drawn, the usual ones and those with targets where empty."""
    drawn = _sections(case, figures or usual_figures(case), family)
    return "<!DOCTYPE html>\n" + element(
        "html",
        element(
            "head",
            element("meta", charset="utf-8"),
            element("meta", http_equiv="Content-Security-Policy", content=POLICY),
            element("meta", name="viewport", content="width=device-width, initial-scale=1"),
            element("title", case.scenario.title),
            element("style", Markup(_style(case.scenario.title))),
        ),
        element("body", _head(case, written), _contents(drawn), [section.drawn() for section in drawn],
                element("footer", foot_line(case.outcome)), Markup(embedded(dumps(case.scenario)))),
        lang="en",
    ) + "\n"  # fmt: skip


def usual_figures(case: Case) -> list[str]:
    """The usual figures, what the scenario shows of its sweep, then targets, missed ones first; as many as
    there is room for."""
    sweep = case.scenario.sweep
    wanted = [sweep.readout] if sweep is not None and sweep.readout else []
    aimed = sorted(case.outcome.targets(), key=lambda found: bool(found[2]))
    drawn = [*USUAL_FIGURES, *wanted, *(target.readout for target, *_ in aimed)]
    return list(dict.fromkeys(drawn))[:MOST_FIGURES]


def _style(title: str) -> str:
    """The style sheet, with the title for the foot of printed pages."""
    safe = "".join(sign if sign.isalnum() or sign == " " else f"\\{ord(sign):x} " for sign in title)
    return report_style().replace('"TITLE"', f'"{safe}"') + svg_style()


def _head(case: Case, written: datetime) -> Markup:
    scenario, verdict = case.scenario, case.verdict
    glyph = {True: "✓", False: "✕", None: ""}[verdict.good]
    tone = {True: "good", False: "bad", None: "open"}[verdict.good]
    banner = None if scenario.potable else element("p", f"▲ {NOT_POTABLE}", class_="banner")
    mark = element("span", glyph, class_="glyph")
    made = f"Made {written:%Y-%m-%d %H:%M} (UTC{written:%z}), {method()}. For screening: see the cautions."
    return element(
        "header",
        banner,
        element("p", results.season_line(case), class_="season"),
        element("h1", scenario.title),
        element("p", scenario.note, class_="note") if scenario.note else None,
        element("p", mark, element("strong", verdict.lead), " ", verdict.rest, class_=f"finding {tone}"),
        element("p", element("strong", "As it stands: "), results.doses_line(case), "."),
        element("p", made, class_="small"),
    )  # fmt: skip


def _contents(sections: Sequence[Section]) -> Markup:
    links = [element("a", section.title, href=f"#{section.name}") for section in sections]
    return element("nav", [joined(link, " ") for link in links], aria_label="Contents")


def _sections(case: Case, figures: Sequence[str], family: str) -> list[Section]:
    spread = Tolerances(case, figures)
    current = current_case(case.scenario)
    dial = in_sentence(case.along.name)
    plots = results.figures(case, figures, family, spread)
    parts: dict[tuple[str, str], Sequence[Part]] = {
        ("targets", "Targets"): [results.targets(case)],
        ("alarms", "What to look at"): [basis.alarms(case)],
        ("holds", "Computed to hold a value"): [basis.holds(case)],
        ("sweep", f"Along the {dial}"): [
            element("div", plots, class_="figures"),
            element("p", _legend(case, spread), class_="small"),
            results.along_table(case),
        ],
        ("options", "Options, what differs"): _compared(case, [current, *option_cases(case.scenario)]),
        ("seasons", "Seasons, what differs"): _compared(case, [current, *season_cases(case.scenario)]),
        ("entered", "What was entered"): [entered.waters(case), entered.train(case)],
        ("stages", "From the sources to the finished water"): [plant.stages(case)],
        ("ledger", "Ledger"): [plant.ledger_tables(case)],
        ("checks", "Checks by hand"): [plant.checks(case)],
        ("tolerance", "Tolerance"): spread.section(),
        ("measured", "Measured points"): [plant.measured(case)],
        ("quantities", "Quantities and cost"): [plant.amounts(case)],
        ("cautions", "Cautions"): [basis.cautions(case)],
        ("excluded", "Not counted"): [basis.exclusions()],
        ("tests", "To be tested next"): [basis.tests(case)],
        ("assumptions", "Basis: assumptions"): [basis.register(case)],
        ("data", "Basis: where the data are from"): [basis.data(case)],
        ("results", "Basis: every result of the finished water"): [results.everything(case)],
        ("method", "Basis: method and limits"): [basis.method_text(case)],
        ("constants", "Basis: constants"): [basis.constants(case)],
        ("outside", "Basis: outside checks"): list(basis.outside_checks()),
    }
    drawn = [Section(name, title, joined(*content)) for (name, title), content in parts.items()]
    return [section for section in drawn if section.content]


def _compared(case: Case, cases: Sequence[Compared]) -> list[Part]:
    """Cases beside the one as it stands; nothing where there are none. The CSV has all that differs."""
    if len(cases) < 2:
        return []
    made, whole = compare(cases, [*case.results(results.RESULTS), "cost"]), compare(cases)
    return [results.comparison(cases[1].kind, made, whole)]


def _legend(case: Case, spread: Tolerances) -> str:
    said = [
        "Dotted line and ring: as it stands.",
        "Green between dashed lines: entered target; ◆ where it is crossed.",
        "Grey band: 95 % of the outcomes within the entered tolerances." if spread.study else "",
        "Thin lines: options, by their letters." if case.scenario.options else "",
        "× measured." if case.scenario.measured else "",
        "▼ ▲ below or above the entered target.",
    ]
    return " ".join(filter(None, said))
