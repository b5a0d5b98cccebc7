"""Ammonia and free chlorine: the share of each form by pH and temperature."""

import numpy as np
import pytest
from numpy.typing import ArrayLike

from .reference import Case, assert_agreement, figure
from .solutions import SYSTEM
from .test_constants import constant

TRACE = 1e-6
"""mol/L; the tables are for fresh water, without activity correction."""


def share(case: Case, component: str, family: str, species: str) -> ArrayLike:
    """Percent of a trace in pure water that is one species, at a held pH."""
    water = SYSTEM.solve(SYSTEM.totals(**{component: TRACE}), case["temperature"], ph=case["pH"])
    forms = water.family(family)
    return 100 * forms[species] / sum(forms.values())


@figure("NH3-FRACTION")
def unionised_ammonia(case: Case) -> ArrayLike:
    return share(case, "ammonia", "ammonia", "NH3(aq)")


@figure("HOCL-SHARE", "HOCL-DAVIS")
def hypochlorous_acid(case: Case) -> ArrayLike:
    return share(case, "free_chlorine", "chlorine", "HOCl")


@figure("NH3-EMERSON")
def pka_of_ammonium(case: Case) -> ArrayLike:
    return -constant("NH3(aq)", case["temperature"])


@figure("HOCL-MORRIS")
def pka_of_hypochlorous_acid(case: Case) -> ArrayLike:
    return -constant("OCl-", case["temperature"])


@pytest.mark.parametrize("table", ["NH3-FRACTION", "NH3-EMERSON"])
def test_unionised_ammonia(table):
    """The share that is toxic to fish, and the pKa behind it, are those of the tables."""
    assert_agreement(table)


@pytest.mark.parametrize("table", ["HOCL-MORRIS", "HOCL-SHARE", "HOCL-DAVIS"])
def test_hypochlorous_acid(table):
    """The share that disinfects, and the pKa behind it, are those of the tables."""
    assert_agreement(table)


def test_salt_moves_the_shares():
    """In brackish water more of the chlorine is hypochlorite than the fresh-water tables say."""
    salt = np.array([0.0, 0.05])
    totals = SYSTEM.totals(free_chlorine=TRACE, sodium=salt, chloride=salt)
    fresh, brackish = SYSTEM.solve(totals, 20.0, ph=7.5).concentration("HOCl")
    assert 0.85 < brackish / fresh < 0.95
