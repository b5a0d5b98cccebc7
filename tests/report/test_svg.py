"""Figures: readable in grey, with every gap and crossing."""

from dataclasses import replace

import numpy as np
import pytest

from explorer.report.svg import plot
from explorer.studies.pictures import Dots, Layer, Line, Quantity, axis, readout_picture, species_picture
from tests.report.conftest import tree, words

X = np.linspace(0.0, 100.0, 101)
SHARE = axis("Share of the well", "%", X)
PH = Quantity("pH", "", 2)


def picture(y, targets=(), missing=()):
    return readout_picture(PH, X, np.asarray(y, float), SHARE, targets, missing)


def texts(svg) -> list[str]:
    return [words(part) for part in svg.iter("text")]


def numbers(path: str) -> list[float]:
    for letter in "MLh":
        path = path.replace(letter, " ")
    return [float(word) for word in path.split()]


def drawn(svg, look):
    return [part for part in svg.iter() if part.get("class") == look]


def test_a_curve_lies_between_the_ends_of_its_axes():
    """From the left end of the dial to the right one, lower values lower on the paper."""
    svg = tree(plot(picture(8 - X / 100), SHARE, 40.0, "one"))
    _, _, width, height = map(float, svg.get("viewBox").split())
    places = numbers(drawn(svg, "curve")[0].get("d").replace("h0", ""))
    across, down = places[::2], places[1::2]
    assert across == sorted(across) and 0 < across[0] < across[-1] < width
    assert down == sorted(down) and 0 < down[0] < down[-1] < height


def test_a_gap_is_left_out_of_the_curve_and_hatched_with_its_reason():
    """The pen is lifted; a pattern that needs no colour fills the stretch."""
    y = np.where((X > 30) & (X < 60), np.nan, 8.0)
    svg = tree(plot(picture(y, missing=((30.5, 59.5, "alkalinity exhausted"),)), SHARE, 40.0, "one"))
    assert drawn(svg, "curve")[0].get("d").count("M") == 2
    hatched = [part for part in svg.iter("rect") if "gap" in (part.get("fill") or "")]
    assert len(hatched) == 1
    assert "alkalinity exhausted" in words(svg.find(".//title"))
    assert hatched[0].get("fill") == f"url(#{svg.find('.//pattern').get('id')})"


def test_a_target_is_a_band_with_drawn_bounds():
    """Its edges are lines, so that the band shows in grey print."""
    svg = tree(plot(picture(7 + X / 50, targets=[(7.4, 8.5)]), SHARE, 40.0, "one"))
    looks = [part.get("class") for part in svg.iter()]
    assert looks.count("target") == 1 and looks.count("bound") == 2


def test_crossings_carry_the_value_of_the_dial():
    """A diamond where the curve passes a bound, and where that is."""
    svg = tree(plot(picture(7 + X / 50, targets=[(7.4, 8.5)]), SHARE, 40.0, "one"))
    assert {"20 %", "75 %"} <= set(texts(svg))
    assert [part.get("class") for part in svg.iter("path")].count("mark") == 2


def test_the_operating_point_has_a_line_a_ring_and_its_value():
    """On the curve at the dial as it stands."""
    svg = tree(plot(picture(8 - X / 100), SHARE, 40.0, "one"))
    (ring,), (line,) = drawn(svg, "ring"), drawn(svg, "here")
    assert ring.get("cx") == line.get("x1") == line.get("x2")
    assert "40 %" in texts(svg)


def test_an_operating_point_outside_the_sweep_is_not_drawn():
    """There is no place for it."""
    svg = tree(plot(picture(8 - X / 100), SHARE, 140.0, "one"))
    assert svg.find(".//circle") is None


def test_every_species_has_a_dash_a_colour_and_a_name_of_its_own():
    """Names stand at the ends of the curves and do not meet."""
    members = {"CO2(aq)": 0.1 + 0 * X, "HCO3-": 0.8 + 0 * X, "CO3-2": 0.1001 + 0 * X}
    svg = tree(plot(species_picture("carbonate", members, X, SHARE), SHARE, 40.0, "one"))
    curves = drawn(svg, "curve")
    assert (
        len({part.get("stroke") for part in curves})
        == len({part.get("stroke-dasharray") for part in curves})
        == 3
    )
    named = [part for part in svg.iter("text") if words(part) in ("CO₂", "HCO₃⁻", "CO₃²⁻")]
    heights = sorted(float(part.get("y")) for part in named)
    assert len(heights) == 3 and min(np.diff(heights)) >= 11


def test_the_axis_holds_the_whole_band_of_outcomes_and_the_measured_points():
    """Nothing that belongs to the figure is cut off."""
    y = 8 - X / 100
    fan = (Layer(95.0, y - 1.5, y + 1.5),)
    dots = (Dots("bench", np.array([50.0]), np.array([10.2])),)
    svg = tree(plot(replace(picture(y), fan=fan, dots=dots), SHARE, 40.0, "one"))
    heights = [float(pair.split(",")[1]) for pair in svg.find(".//polygon").get("points").split()]
    clip = svg.find(".//clipPath/rect")
    top, tall = float(clip.get("y")), float(clip.get("height"))
    assert top <= min(heights) and max(heights) <= top + tall
    (cross,) = drawn(svg, "measured")
    assert top <= numbers(cross.get("d").split("l")[0])[1] + 3 <= top + tall


def test_options_are_thinner_lines_with_their_letters():
    """Each with a dash of its own, below the curve of the scenario as it stands."""
    y = 8 - X / 100
    others = (Line("A", y + 0.2, 1, 1), Line("B", y - 0.2, 2, 2))
    svg = tree(plot(replace(picture(y), others=others), SHARE, 40.0, "one"))
    looks = [part.get("class") for part in svg.iter("path") if part.get("class") in ("option", "curve")]
    assert looks == ["option", "option", "curve"]
    assert len({part.get("stroke-dasharray") for part in drawn(svg, "option")}) == 2
    assert {"A", "B"} <= set(texts(svg))


@pytest.mark.parametrize("y", [np.full(101, np.nan), np.where(X == 50, 8.0, np.nan)])
def test_a_curve_without_points_or_with_one_is_still_a_figure(y):
    """Said or dotted; well-formed in any case."""
    svg = tree(plot(picture(y, missing=((0.0, 100.0, "no solution"),)), SHARE, 50.0, "one"))
    assert svg.get("aria-label")


def test_names_cannot_break_out():
    """A label is text."""
    hostile = axis('</svg><script>"', "<b>", X)
    svg = tree(plot(readout_picture(PH, X, 8 + 0 * X, hostile), hostile, 40.0, "one"))
    assert svg.find(".//script") is None
    assert '</svg><script>", <b>' in texts(svg)
