"""What the sweep plots show, as data."""

import numpy as np
import pytest

from explorer.studies.pictures import (
    Quantity,
    axis,
    band_of,
    crossing_marks,
    readout_picture,
    rising,
    species_picture,
)

X = np.linspace(0, 100, 101)
SHARE = axis("Share of Chalk", "%", X)
PH = Quantity("pH", "", 2)


def test_axis_has_the_decimals_its_range_deserves() -> None:
    """Neighbouring points of the sweep differ in print."""
    assert SHARE.at(52.3) == "52 %"
    assert axis("Dose", "mg/L", np.array([0.0, 20.0])).at(16.94) == "16.9 mg/L"
    assert axis("pH", "", np.array([7.0, 8.0])).at(7.256) == "7.26"


@pytest.mark.parametrize(
    ("targets", "band"),
    [
        ([], None),
        ([(7.4, None)], (7.4, None)),
        ([(7.4, 8.5), (7.0, 8.2)], (7.4, 8.2)),
        ([(None, 5.0), (6.0, None)], None),
    ],
)
def test_band_meets_all_targets(targets: list, band: tuple | None) -> None:
    """Several targets narrow the band; targets that exclude each other leave none."""
    assert band_of(targets) == band


def test_crossings_carry_place_direction_and_bound() -> None:
    """A curve that dips under its lower bound crosses it twice."""
    y = (X - 40.2) ** 2 / 100
    marks = crossing_marks(X, y, [(4.0, None)], SHARE)
    assert [mark.text for mark in marks] == ["20 %", "60 %"]
    assert [mark.rising for mark in marks] == [False, True]
    assert all(mark.y == 4.0 and not mark.upper for mark in marks)


def test_value_held_at_a_bound_has_no_crossings() -> None:
    """Rounding of a held value is no crossing."""
    y = 8.0 + 1e-10 * np.sin(X)
    assert crossing_marks(X, y, [(8.0, 8.4)], SHARE, slack=1e-6) == ()


def test_no_crossing_across_a_gap() -> None:
    """Between a solved and an unsolved point nothing is claimed."""
    y = np.where(X < 50, 1.0, np.nan)
    y[60:] = 9.0
    assert crossing_marks(X, y, [(5.0, None)], SHARE) == ()


def test_picture_says_in_words_what_it_shows() -> None:
    """Screen readers hear the ends, the extremes, the crossings and the gaps."""
    y = 7.0 + (X - 40) ** 2 / 1600
    picture = readout_picture(PH, X, y, SHARE, [(7.5, None)], (), None)
    assert picture.note == "target at least 7.5"
    assert picture.words.startswith(
        "pH against share of Chalk: 8.00 at 0 %, 9.25 at 100 %, lowest 7.00 at 40 %"
    )
    assert "crosses 7.5 at 12 %, crosses 7.5 at 68 %" in picture.words


def test_gap_is_named_with_its_reason() -> None:
    """An unsolved stretch stays out of the curve and in the words."""
    y = np.where(X > 90, np.nan, 8.0)
    picture = readout_picture(PH, X, y, SHARE, (), ((90.5, 100.0, "alkalinity exhausted"),), None)
    assert np.isnan(picture.lines[0].y[-1])
    assert picture.words.endswith("no result from 90 % to 100 %: alkalinity exhausted.")
    assert picture.empty == ""


def test_plot_without_any_value_says_why() -> None:
    """A plot is never blank without a word."""
    picture = readout_picture(
        PH, X, np.full(101, np.nan), SHARE, (), ((0.0, 100.0, "no chlorine"),), (4.0, 9.0)
    )
    assert picture.empty == "no chlorine"
    assert picture.limits == (4.0, 9.0)


CARBONATE = {
    "CO2(aq)": np.full(101, 1e-4),
    "HCO3-": np.full(101, 2e-3),
    "CO3-2": np.full(101, 5e-6),
    "CaHCO3+": np.full(101, 3e-5),
    "CaCO3(aq)": np.full(101, 1e-6),
}


def test_species_as_shares_add_up_and_pairs_are_one_line() -> None:
    """Shares add to 100 %; pairs with metals are shown as their sum."""
    picture = species_picture("carbonate", CARBONATE, X, SHARE)
    assert [line.name for line in picture.lines] == ["CO₂", "HCO₃⁻", "CO₃²⁻", "ion pairs"]
    assert sum(line.y[0] for line in picture.lines) == pytest.approx(100)
    assert picture.limits == (0.0, 100.0)


def test_species_keep_their_place_when_amounts_change() -> None:
    """A species has the same colour and dash in every water."""
    swapped = CARBONATE | {"CO2(aq)": np.full(101, 5e-3)}
    names = [line.name for line in species_picture("carbonate", swapped, X, SHARE).lines]
    assert names == [line.name for line in species_picture("carbonate", CARBONATE, X, SHARE).lines]


def test_log_axis_is_not_stretched_by_a_trace() -> None:
    """A species many decades down leaves the axis to those that matter."""
    trace = CARBONATE | {"CO3-2": np.full(101, 1e-25)}
    picture = species_picture("carbonate", trace, X, SHARE, logarithmic=True)
    assert picture.limits[0] > -12


def test_family_that_is_not_there() -> None:
    """A water without chlorine says so instead of dividing by nothing."""
    picture = species_picture("chlorine", {"HOCl": np.zeros(101), "OCl-": np.zeros(101)}, X, SHARE)
    assert picture.lines == () and picture.empty == "No chlorine in this water."


def test_downward_sweep_is_drawn_upward() -> None:
    """A sweep from 100 to 0 has the same axis as one from 0 to 100."""
    down = X[::-1]
    assert rising(down, down).tolist() == X.tolist()
    assert rising(down, 2 * down).tolist() == (2 * X).tolist()
