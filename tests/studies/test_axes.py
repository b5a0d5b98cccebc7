"""Axis arithmetic: calm limits, number texts."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from explorer.scenario.words import number_text, range_text, short_number
from explorer.studies.axes import nice_step, outward, steady_limits

numbers = st.floats(-1e6, 1e6, allow_nan=False)


@given(numbers, st.floats(1e-3, 1e6))
def test_limits_snap_outwards_to_whole_steps(low: float, span: float) -> None:
    """Limits take in the data and are multiples of the step."""
    high = low + span
    start, stop = outward(low, high)
    step = nice_step(high - low)
    assert start <= low + 1e-6 * step and high <= stop + 1e-6 * step
    assert start / step == pytest.approx(round(start / step), abs=1e-6)
    assert stop - start <= high - low + 2 * step * (1 + 1e-6)


def test_limits_stay_while_the_data_move_a_little() -> None:
    """A slider that moves the curve within the axis leaves the axis alone."""
    before = steady_limits([7.1, 8.9])
    assert steady_limits([7.2, 8.7], before) == before


def test_limits_follow_when_the_data_leave_or_shrink() -> None:
    """Data beyond the axis widen it; data in a small part of it tighten it."""
    before = steady_limits([7.1, 8.9])
    assert steady_limits([7.1, 9.6], before)[1] >= 9.6
    tight = steady_limits([7.4, 7.6], before, least_span=0.1)
    assert tight[1] - tight[0] < before[1] - before[0]


def test_noise_on_a_constant_does_not_fill_the_axis() -> None:
    """A held value is a flat line in the middle of the least span."""
    low, high = steady_limits(8.0 + 1e-9 * np.sin(np.arange(50)), least_span=0.2)
    assert high - low >= 0.2 * (1 - 1e-9)
    assert low < 8.0 < high


def test_a_flat_zero_does_not_show_negative_amounts() -> None:
    """Nothing below zero is drawn for a quantity that is zero all along."""
    assert steady_limits([0.0, 0.0], least_span=2.0)[0] == 0.0


def test_target_bounds_come_into_view_with_room_beyond() -> None:
    """A bound near the data is inside the axis, not on its edge."""
    low, high = steady_limits([7.0, 8.0], marks=[8.4])
    assert low <= 7.0 and high > 8.4


def test_far_target_does_not_squeeze_the_data() -> None:
    """A limit far above what is reached stays out of the picture."""
    assert steady_limits([10.0, 20.0], marks=[250.0])[1] < 50


def test_without_data_the_old_limits_stay() -> None:
    """Points that cannot be solved do not move the axis."""
    assert steady_limits([np.nan], (4.0, 9.0)) == (4.0, 9.0)
    assert steady_limits([], None, 2.0) == (0.0, 2.0)


@pytest.mark.parametrize(
    ("value", "digits", "signed", "text"),
    [
        (7.256, 2, False, "7.26"),
        (-8.54, 1, True, "−8.5"),
        (5.06, 1, True, "+5.1"),
        (-0.004, 2, True, "0.00"),
        (float("nan"), 1, False, "–"),
    ],
)
def test_number_texts(value: float, digits: int, signed: bool, text: str) -> None:
    """Real minus, no signed zero, a dash for no value."""
    assert number_text(value, digits, signed) == text


@pytest.mark.parametrize(
    ("low", "high", "text"),
    [(7.4, 8.5, "7.4 to 8.5"), (0.3, None, "at least 0.3"), (None, 50, "at most 50"), (-5, 10, "−5 to 10")],
)
def test_targets_in_words(low: float | None, high: float | None, text: str) -> None:
    """Bounds are printed as people write them."""
    assert range_text(low, high) == text
    assert short_number(0.30) == "0.3"
