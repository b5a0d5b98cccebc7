"""Root search over many functions at once."""

import numpy as np
import pytest

from explorer.scenario.roots import find_roots

POWERS = np.array([1.0, 2.0, 3.0, 7.0, 0.3])


def powers(x, point):
    """x to a power of its own, less a half; the root is 0.5 to the inverse power."""
    return x ** POWERS[point] - 0.5


def search(function, low, high, number=POWERS.size):
    return find_roots(function, np.full(number, low), np.full(number, high), relative=1e-13)


def test_every_function_gets_its_own_root():
    """Straight, steep and flat ones side by side, to the asked precision."""
    roots = search(powers, 0.0, 1.0)
    assert roots.found.all()
    assert roots.x == pytest.approx(0.5 ** (1 / POWERS), abs=1e-12)


def test_the_ends_may_come_in_either_order():
    """A range that runs downwards has the same roots."""
    assert search(powers, 1.0, 0.0).x == pytest.approx(0.5 ** (1 / POWERS), abs=1e-12)


def test_a_straight_line_takes_one_step():
    """The first step is the secant, so a linear function is done after three calls."""
    calls = []
    search(lambda x, point: calls.append(x.size) or 3 * x - 1 - point / 10, 0.0, 1.0)
    assert len(calls) <= 4


def test_without_a_change_of_sign_there_is_no_root():
    """Not found, nan, and the values at the ends to judge by."""
    roots = search(lambda x, point: x + 1 + point, 0.0, 1.0)
    assert not roots.found.any()
    assert np.isnan(roots.x).all()
    assert roots.at_low == pytest.approx([1, 2, 3, 4, 5])


def test_a_root_at_an_end_is_found():
    """Zero at the lower end for one function, at the upper for another."""
    roots = search(lambda x, point: x - point, 0.0, 1.0, number=2)
    assert roots.found.all()
    assert roots.x.tolist() == [0, 1]


@pytest.mark.parametrize("upwards", [True, False])
def test_an_end_without_a_value_is_drawn_in(upwards):
    """Only near one end has the function values; the root is found there all the same."""

    def partly(x, point):
        inside = x <= 1 if upwards else x >= 999
        return np.where(inside, x - (0.3 + point / 10 if upwards else 999.3 + point / 10), np.nan)

    roots = search(partly, 0.0, 1000.0)
    assert roots.found.all()
    assert roots.x == pytest.approx(np.arange(5) / 10 + (0.3 if upwards else 999.3), abs=1e-9)


def test_an_end_drawn_in_without_a_root_still_has_its_value():
    """No root up to where the values end: not found, and the end is the last that has one."""
    roots = search(lambda x, point: np.where(x <= 1, -2.0 + x, np.nan), 0.0, 1000.0)
    assert not roots.found.any()
    assert roots.high == pytest.approx(1.0, abs=1e-9)
    assert roots.at_high == pytest.approx(-1.0, abs=1e-9)
