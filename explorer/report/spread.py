"""The tolerance statement: how far results may be off when the entered tolerances are used up."""

from collections.abc import Iterator, Sequence

import numpy as np

from explorer.report.case import Case, span_text, value_text
from explorer.report.markup import Markup, Part, element
from explorer.report.tables import Row, table, unit_cell
from explorer.scenario.errors import ScenarioError
from explorer.scenario.readouts import NO_VALUE, READOUTS, Readout
from explorer.scenario.words import short_number, unit_text
from explorer.studies.corners import extremes
from explorer.studies.pictures import Layer, rising
from explorer.studies.spread import spread_of
from explorer.studies.tolerance import ToleranceStudy, tolerance

POINTS, SAMPLES = 31, 1024
"""Points along the sweep and samples of the tolerances that the band is made of."""

MOST = (2.5, 97.5)
"""Percentiles between which 95 % of the outcomes lie."""

NOTHING_ENTERED = "No tolerances are entered, so nothing can be said of how far these results may be off."


class Tolerances:
    """What the entered tolerances do to some readouts: along the sweep by samples, here also by corners."""

    def __init__(self, case: Case, keys: Sequence[str]) -> None:
        self.case, self.keys = case, tuple(keys)
        self.spread = spread_of(case.scenario)
        self.study: ToleranceStudy | None = None
        if len(self.spread):
            *_, self.study = tolerance(case.scenario, points=POINTS, readouts=self.keys, samples=SAMPLES)

    def fan(self, key: str, x: np.ndarray) -> tuple[Layer, ...]:
        """The band that holds most outcomes of a readout, at places of the dial, which rise."""
        if self.study is None or key not in self.study.fan.values:
            return ()
        low, high = (
            np.interp(x, rising(self.study.x, self.study.x), rising(self.study.x, row))
            for row in self.study.fan.percentiles(key, MOST)
        )
        return (Layer(MOST[1] - MOST[0], low, high),)

    def section(self) -> list[Part]:
        """Everything there is to say of the tolerances."""
        if self.study is None:
            return [element("p", NOTHING_ENTERED)]
        made = (
            f"From {self.study.samples} samples with everything below off at once by chance; extremes by"
            " search over the ends of all tolerances. Nothing else is off."
        )
        return [
            element("ul", self.statements()),
            self.outcomes(),
            element("p", made, class_="small"),
            self.entered(),
        ]

    def statements(self) -> Iterator[Markup]:
        """The statement for every readout with a target, or for pH where there are none."""
        aimed = dict.fromkeys(target.readout for target in self.case.scenario.targets)
        for key in aimed or ("ph",):
            yield element("li", self._statement(READOUTS[key]))

    def _statement(self, readout: Readout) -> str:
        case = self.case
        here = value_text(case.value(readout.key), readout)
        try:
            low, high = extremes(case.scenario, readout.key)
        except ScenarioError as error:
            return f"{readout.label} {here}{readout.unit_text}; {error}"
        span = f"{span_text(low.value, high.value, readout)}{readout.unit_text}"
        extent = f"{span} at the extremes of all tolerances; not a guarantee."
        return f"{readout.label} {here}{readout.unit_text}; {extent}"

    def outcomes(self) -> Markup | None:
        """What is likely: 95 % of the outcomes, and the chance of every target."""
        study = self.study
        if study is None:
            return None
        rows: list[Row] = []
        for position, target in enumerate(study.targets):
            readout = READOUTS[target.readout]
            low, high = study.here.percentiles(readout.key, MOST)[:, 0]
            chance = float(study.here.chance(position)[0])
            span = span_text(float(low), float(high), readout)
            rows.append(
                [
                    readout.label,
                    span if np.isfinite(low) else NO_VALUE,
                    unit_text(readout.unit),
                    _percent(chance),
                ]
            )
        if len(rows) > 1:
            rows.append(
                ["All entered targets together", "", "", _percent(float(study.here.chance_of_all()[0]))]
            )
        heading = ["Result", "95 % of the outcomes", "Unit", "Meets the entered target"]
        return table("outcomes", heading, rows, left=(0, 2))

    def entered(self) -> Markup | None:
        """The tolerances themselves."""
        rows: list[Row] = []
        for part in self.spread.inputs:
            for move in part.moves:
                dial = self.spread.plan.dials[move.address]
                factor, words = (100.0, "%") if move.relative else (1.0, dial.unit)
                kind = "normal, ends at two standard deviations" if move.normal else "uniform"
                shared = part.label if len(part.moves) > 1 else ""
                sides = _sides(factor * move.minus, factor * move.plus)
                rows.append([dial.label, sides, unit_cell(words), kind, shared])
        heading = ["What may be off", "By", "Unit", "Distribution", "Together as"]
        if not any(row[-1] for row in rows):
            heading, rows = heading[:-1], [row[:-1] for row in rows]
        return table("tolerances", heading, rows, left=(0, 2, 3, 4), look="dense")


def _sides(minus: float, plus: float) -> str:
    return f"± {short_number(plus)}" if minus == plus else f"− {short_number(minus)}, + {short_number(plus)}"


def _percent(part: float) -> str:
    """A chance without the certainty that samples cannot give."""
    if part > 0.995:
        return "over 99 %"
    return "under 1 %" if part < 0.005 else f"{100 * part:.0f} %"
