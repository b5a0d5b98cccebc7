"""The look: contrast, distinct lines, text on the page."""

import re

import pytest

from explorer.app.look import DASHES, PALETTES, Palette, css_variables, page_css, styles
from explorer.app.text import compact, esc, formula_text, in_sentence, plain, unit_text

LEAST_CONTRAST = 4.5
"""WCAG 2.1, success criterion 1.4.3."""


def luminance(colour: str) -> float:
    """Relative luminance, WCAG 2.1."""
    parts = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
    red, green, blue = (p / 12.92 if p <= 0.04045 else ((p + 0.055) / 1.055) ** 2.4 for p in parts)
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


def contrast(one: str, other: str) -> float:
    dark, light = sorted((luminance(one), luminance(other)))
    return (light + 0.05) / (dark + 0.05)


@pytest.mark.parametrize("palette", PALETTES.values(), ids=list(PALETTES))
def test_every_text_colour_is_readable(palette: Palette) -> None:
    """Texts, states and curve names stand out from what they are printed on."""
    on_card = (
        palette.ink,
        palette.soft,
        palette.accent,
        palette.ok,
        palette.warn,
        palette.bad,
        *palette.series,
    )
    for colour in on_card:
        assert contrast(colour, palette.card) >= LEAST_CONTRAST, colour
    for colour in (palette.ink, palette.soft, palette.accent):
        assert contrast(colour, palette.bg) >= LEAST_CONTRAST, colour
    for text, ground in (
        (palette.bar_ink, palette.bar),
        (palette.on_accent, palette.accent),
        (palette.ink, palette.accent_soft),
        (palette.accent, palette.accent_soft),
        (palette.bad, palette.bad_soft),
        (palette.warn, palette.warn_soft),
    ):
        assert contrast(text, ground) >= LEAST_CONTRAST, (text, ground)


@pytest.mark.parametrize("palette", PALETTES.values(), ids=list(PALETTES))
def test_each_curve_has_colour_and_dash_of_its_own(palette: Palette) -> None:
    """Colour never speaks alone."""
    assert len(set(palette.series)) == len(palette.series) == len({tuple(dash) for dash in DASHES})


def test_views_use_only_colours_of_the_palette() -> None:
    """Every CSS variable a view asks for is set by the page or by the views themselves."""
    sheets = "".join(styles(("look.css", "views.css", "live_view.css", "rail.css")))
    own = re.findall(r"(--[\w-]+)\s*:", sheets + css_variables(PALETTES["light"]))
    set_by_nodes = {"--from", "--wide", "--at", "--filled", "--colour"}
    set_by_scripts = {"--page-width", "--paper", "--views-height"}
    assert set(re.findall(r"var\((--[\w-]+)", sheets)) <= set(own) | set_by_nodes | set_by_scripts


def test_nothing_is_loaded_from_elsewhere() -> None:
    """Styles hold no address but the pictures drawn in place."""
    sheets = page_css() + "".join(styles(("views.css", "live_view.css", "rail.css")))
    assert not re.findall(r"url\((?!\"data:)|@import|https?://(?!www\.w3\.org/2000/svg)", sheets)


@pytest.mark.parametrize(
    ("name", "written"),
    [
        ("HCO3-", "HCO₃⁻"),
        ("CO3-2", "CO₃²⁻"),
        ("Ca+2", "Ca²⁺"),
        ("H2PO4-", "H₂PO₄⁻"),
        ("CaHCO3+", "CaHCO₃⁺"),
        ("HOCl", "HOCl"),
    ],
)
def test_formulas_are_written_as_chemists_do(name: str, written: str) -> None:
    """Subscripts for counts, superscripts for charges."""
    assert formula_text(name) == written


@pytest.mark.parametrize(
    ("label", "inside"),
    [
        ("Buffer intensity", "buffer intensity"),
        ("pH", "pH"),
        ("HOCl share", "HOCl share"),
        ("Langelier index", "Langelier index"),
        ("CaCO₃ potential", "CaCO₃ potential"),
        ("Un-ionised ammonia", "un-ionised ammonia"),
    ],
)
def test_labels_inside_a_sentence(label: str, inside: str) -> None:
    """Names and formulas keep their capitals."""
    assert in_sentence(label) == inside


def test_foreign_text_is_one_escaped_line() -> None:
    """Markup, line breaks and direction marks of a file do nothing on the page."""
    assert esc('<b a="1">\n\u202eok') == "&lt;b a=&quot;1&quot;&gt; ok"
    assert plain("x" * 200, 10) == "x" * 9 + "…"


def test_units_and_labels_in_print() -> None:
    """Formulas in units and labels are set as formulas."""
    assert unit_text("mg/L as CaCO3") == "mg/L as CaCO₃"
    assert compact("Calcium carbonate precipitation potential") == "CaCO₃ precipitation potential"
