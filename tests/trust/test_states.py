"""A few of a million random waters: solved or flagged, none wrong (``python -m tests.trust.states``)."""

import numpy as np
import pytest

from explorer.chemistry import System
from explorer.chemistry.equilibrium import LARGEST_TOTAL, NO_PH, REASONS, TOO_MUCH

from .states import Books, Tally, many_digits, outside, strange_states, within

SEED = 20_000_000


@pytest.fixture
def tally() -> Tally:
    return Tally()


@pytest.mark.filterwarnings("error")
def test_states_within_the_range_are_all_solved_and_balance(system, tally):
    """pH 1–13, 0–60 °C, to 0.5 mol/L: components, charge, ionic strength, by an independent bookkeeping."""
    within(system, 20_000, SEED, tally)
    assert tally.faults == []
    assert tally.counts["within"] > 19_000


@pytest.mark.filterwarnings("error")
def test_states_outside_the_range_are_solved_or_say_why_not(system, tally):
    """Up to 5 mol/L, −20 to 100 °C, negative, infinite, not a number, nothing at all: no warning, no wrong
    number."""
    outside(system, 4_000, SEED, tally)
    assert tally.faults == []
    assert all(tally.counts[f"outside, {words}"] for code, words in enumerate(REASONS) if code not in (0, 4))
    assert tally.counts["outside, solved"] > 4_000


def test_waters_agree_with_the_same_at_fifty_digits(system, tally):
    """pH and every concentration, from electroneutrality instead of an alkalinity, by another solver."""
    many_digits(system, 12, SEED, tally)
    assert tally.faults == []
    assert tally.counts["at fifty digits"] == 12


def test_a_wrong_engine_would_be_found(system, tally):
    """The bookkeeping is no tautology: an activity model that differs a little breaks it."""
    other = System(organic_charge_density=9.0)
    totals, temperature, ph = strange_states(system, 2_000, SEED)
    Books(system).audit(other.solve(totals, temperature, ph=ph), tally)
    assert "balance of alkalinity" in " ".join(tally.faults)


@pytest.mark.parametrize("ph", [None, 7.0])
def test_more_than_water_can_hold_is_flagged(system, ph):
    """A total beyond the limit has no answer, with its reason; at the limit there is still one."""
    amounts = np.array([LARGEST_TOTAL, 2 * LARGEST_TOTAL, 1e300])
    water = system.solve(
        system.totals(sodium=amounts, chloride=amounts, dic=1e-3, alkalinity=1e-3), 20.0, ph=ph
    )
    assert water.reason.tolist() == [0, TOO_MUCH, TOO_MUCH]
    assert np.isnan(water.ph[1:]).all()


def test_a_ph_that_no_water_has_is_flagged(system):
    """Asked for at a pH beyond all sense, a water has no answer, with its reason, and no number overflows."""
    water = system.solve(system.totals(dic=1e-3), 20.0, ph=[-1e30, -2.5, 7.0, 16.5, 1e12])
    assert water.reason.tolist() == [NO_PH, NO_PH, 0, NO_PH, NO_PH]
