"""Pictures as rows for a spreadsheet."""

from dataclasses import replace

import numpy as np

from explorer.studies.picture_table import picture_table
from explorer.studies.pictures import Dots, Layer, Line, Quantity, axis, readout_picture, species_picture

X = np.linspace(0.0, 10.0, 11)
DOSE = axis("Dose", "mg/L", X)


def picture(y=None, missing=(), dots=()):
    y = 7 + X / 10 if y is None else y
    return readout_picture(Quantity("pH", "", 2), X, y, DOSE, (), missing, dots=dots)


def test_a_curve_is_a_column_beside_the_dial():
    """Label and unit head each column; every place has a row."""
    heading, *rows = picture_table(picture(), DOSE)
    assert heading == ["Dose [mg/L]", "pH"]
    assert rows == [[x, 7 + x / 10] for x in X.tolist()]


def test_a_gap_is_empty_and_says_why():
    """No number stands where there is none."""
    y = np.where(X > 7.5, np.nan, 7.0)
    heading, *rows = picture_table(picture(y, ((7.5, 10.0, "alkalinity exhausted"),)), DOSE)
    assert heading[-1] == "No answer because"
    assert rows[7][1:] == [7.0, ""] and rows[8][1:] == [None, "alkalinity exhausted"]


def test_bands_and_options_follow_the_curve():
    """Both ends of a band, then the curves of options by their letters."""
    fan, other = Layer(95.0, X - 1, X + 1), Line("A", 2 * X)
    heading, first, *_ = picture_table(replace(picture(), fan=(fan,), others=(other,)), DOSE)
    assert heading[2:] == ["95 % of the outcomes, low", "95 % of the outcomes, high", "pH, A"]
    assert first[2:] == [-1.0, 1.0, 0.0]


def test_measured_points_stand_below_the_curve():
    """With a heading of their own, after an empty row."""
    dots = Dots("jar test", np.array([2.0, 5.0]), np.array([7.1, 7.6]))
    rows = picture_table(picture(dots=(dots,)), DOSE)
    assert rows[12:] == [[], ["Dose [mg/L]", "pH, jar test"], [2.0, 7.1], [5.0, 7.6]]


def test_species_say_what_their_numbers_are():
    """Shares in percent, logarithms of mol/L."""
    members = {"HOCl": np.full(11, 1e-5), "OCl-": np.full(11, 3e-5)}
    shares = picture_table(species_picture("chlorine", members, X, DOSE), DOSE)
    assert shares[0][1:] == ["Chlorine species, HOCl [%]", "Chlorine species, OCl⁻ [%]"]
    assert np.allclose(shares[1][1:], [25, 75])
    logs = picture_table(species_picture("chlorine", members, X, DOSE, logarithmic=True), DOSE)
    assert logs[0][1] == "Chlorine species, HOCl [log mol/L]" and np.isclose(logs[1][1], -5)
