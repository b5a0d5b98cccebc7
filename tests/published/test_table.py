"""The published cases as a whole: complete, cited, and shown as tested."""

import numpy as np
import pytest

from . import table
from .reference import CASES, assert_agreement, assert_parting, engine, without_figure


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
