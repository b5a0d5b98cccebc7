"""The published cases as a whole: complete, cited, and shown as tested."""

import numpy as np
import pytest

from explorer.studies.outside_checks import by_topic, outside_checks

from . import table
from .reference import CASES, assert_agreement, assert_parting, difference, engine, without_figure

HOW = "out of date: run python -m tests.published.table --write"


def test_every_case_has_a_function_that_computes_it():
    """No case lies unused in the files."""
    assert without_figure() == []


@pytest.mark.parametrize("case_id", CASES)
def test_a_case_is_met_or_known_to_part(case_id):
    """Whatever the tests above say of it, each case is met or parts as its note explains."""
    case = CASES[case_id]
    if case.parting is None:
        assert_agreement(case_id)
    else:
        assert case.note
        assert_parting(case_id)


@pytest.mark.parametrize("case_id", CASES)
def test_a_case_says_where_it_comes_from(case_id):
    """Citation, confidence and the reason of the tolerance are there, and no tolerance is zero."""
    case = CASES[case_id]
    assert case.source
    assert case.reason
    assert case.confidence in ("seen", "from memory")
    assert (case.tolerance[np.isfinite(case.printed)] > 0).all()


def test_the_table_shows_every_figure():
    """A line for each printed figure, with the engine's figure for it; a line a case in the short form."""
    shown = [line for line in table.lines(every=True) if line.startswith("| ")]
    assert len(shown) == sum(np.isfinite(case.printed).sum() for case in CASES.values())
    assert len([line for line in table.lines() if line.startswith("| ")]) == len(CASES)
    worst = next(line for line in shown if "lime water at 25" in line)
    assert f"| {engine('LIME-SAT'):.5g} |" in worst


def test_the_table_of_the_package_is_what_the_engine_says():
    """Each case is a line; its texts are those of the case, and its figures those of the engine at a point
    that differs most: all but the rounding of another machine."""
    lines = {(check.case, check.source): check for check in outside_checks()}
    assert len(lines) == len(CASES)
    for case in CASES.values():
        now = table.check_of(case)
        kept = lines[now.case, now.source]
        texts = ("topic", "unit", "figures", "tolerance", "parts", "reason", "note")
        if kept.conditions == now.conditions:
            assert [getattr(kept, name) for name in (*texts, "printed")] == [
                getattr(now, name) for name in (*texts, "printed")
            ]
        index = next(index for index, where in case.points() if where == kept.conditions)
        slack = 1e-3 * case.tolerance[index] + 1e-4 * abs(case.printed[index])
        assert float(kept.engine) == pytest.approx(engine(case.id)[index], abs=slack), HOW
        assert float(kept.difference) == pytest.approx(difference(case.id)[index], rel=0.06, abs=slack), HOW
        ratio, most = (
            abs(difference(case.id)[at]) / case.tolerance[at] for at in (index, table.worst(case)[0])
        )
        assert ratio == pytest.approx(most, abs=1e-3), HOW


def test_a_line_of_the_package_is_within_its_tolerance_or_says_why_not():
    """What a reader of Basis or report sees of each case is complete."""
    for check in outside_checks():
        difference, tolerance = abs(float(check.difference)), float(check.tolerance)
        if check.parts:
            assert tolerance < difference <= float(check.parts)
            assert check.note
        else:
            assert difference <= tolerance
        assert check.reason and check.source


def test_the_readme_shows_the_summary_of_the_table():
    """Between its marks, topic by topic, with the cases that part; nothing there is out of date."""
    text = table.README.read_text(encoding="utf-8")
    assert table.BEGIN in text and table.END in text
    assert table.readme(text, table.PACKAGED.read_text(encoding="utf-8")) == text, HOW
    for topic, _ in by_topic():
        assert f"| {topic} |" in text
