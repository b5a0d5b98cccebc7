"""Readouts: every result quantity once, in its unit, never infinite, and how it is written."""

import numpy as np
import pytest

from explorer.scenario.evaluate import evaluate
from explorer.scenario.readouts import READOUTS, format_value, in_words, status

CORE = (
    "ph", "temperature", "alkalinity", "carbonate_alkalinity", "dic", "co2", "calcium", "magnesium",
    "hardness", "sodium", "potassium", "chloride", "sulfate", "nitrate", "fluoride", "silica", "boron",
    "ammonia", "phosphate", "tds", "ionic_strength", "conductivity", "charge_balance", "si_calcite",
    "si_aragonite", "ccpp", "langelier_index", "ryznar_index", "aggressiveness_index", "larson_ratio",
    "chloride_sulfate_ratio", "buffer_intensity", "hocl_percent", "free_chlorine", "monochloramine",
    "unionised_ammonia", "dissolved_aluminium", "dissolved_iron", "solids", "cost",
)  # fmt: skip


@pytest.fixture(scope="module")
def well(plant):
    return evaluate(plant({"well": 100}))


def value(outcome, key, stage="finished"):
    return float(outcome.readout(key, stage))


@pytest.mark.parametrize("key", CORE)
def test_every_core_readout_is_there_with_unit_meaning_and_source(key):
    """What a table, a help text and a target need to know of it."""
    readout = READOUTS[key]
    assert readout.key == key
    assert readout.label and readout.short and readout.meaning and readout.source and readout.group
    assert 0 <= readout.digits <= 4


@pytest.mark.parametrize(
    ("key", "unit"),
    [
        ("alkalinity", "mg/L as CaCO3"), ("hardness", "mg/L as CaCO3"), ("ccpp", "mg/L as CaCO3"),
        ("dic", "mg/L as C"), ("co2", "mg/L"), ("ammonia", "mg/L as N"), ("phosphate", "mg/L as P"),
        ("silica", "mg/L as SiO2"), ("buffer_intensity", "mmol/L per pH"), ("free_chlorine", "mg/L as Cl2"),
        ("monochloramine", "mg/L as Cl2"), ("unionised_ammonia", "mg/L as N"), ("calcium", "mg/L"),
        ("nitrate", "mg/L"), ("boron", "mg/L"), ("conductivity", "µS/cm"), ("charge_balance", "%"),
    ],
)  # fmt: skip
def test_default_units(key, unit):
    """The basis is always beside the number."""
    assert READOUTS[key].unit == unit


def test_entered_ions_come_out_as_entered(well):
    """The sheet of the well, read back in the sheet's units."""
    entered = {"calcium": 116, "magnesium": 12.5, "sodium": 21, "chloride": 38, "nitrate": 29, "silica": 16}
    for key, amount in entered.items():
        assert value(well, key) == pytest.approx(amount, rel=1e-12)
    assert value(well, "hardness") == pytest.approx(
        116 * 100.086 / 40.078 + 12.5 * 100.086 / 24.305, rel=1e-4
    )
    assert value(well, "carbonate_hardness") == pytest.approx(272)


def test_charge_balance_and_conductivity_of_the_well(well):
    """−0.9 % (worked out from the sheet by hand) and 782 µS/cm (estimate within 5 %)."""
    assert value(well, "charge_balance") == pytest.approx(-0.9, abs=0.1)
    assert value(well, "conductivity") == pytest.approx(782, rel=0.05)


def test_conductivity_at_20_degrees_is_about_a_tenth_lower(well):
    """2500 µS/cm at 20 °C are 2790 at 25 °C (EN 27888)."""
    assert value(well, "conductivity") / value(well, "conductivity_20") == pytest.approx(
        2790 / 2500, rel=0.01
    )


def test_langelier_and_ryznar_belong_together(well):
    """pHs from either is the same; Langelier is a little above the index that counts ion pairs."""
    ph, langelier = value(well, "ph"), value(well, "langelier_index")
    assert value(well, "ryznar_index") == pytest.approx(ph - 2 * langelier, abs=1e-12)
    assert 0 < langelier - value(well, "si_calcite") < 0.1


def test_langelier_by_hand(well):
    """pHs of Standard Methods 2330 B: pK2 10.476 and pKs 8.414 at 11 °C (Plummer & Busenberg 1982), Davies.

    All alkalinity is bicarbonate at pH 7.25 but for 0.1 %.
    """
    strength = value(well, "ionic_strength")
    slope = 1.82e6 * (83.9 * 284.15) ** -1.5
    pfm = slope * (strength**0.5 / (1 + strength**0.5) - 0.3 * strength)
    saturated = 10.476 - 8.414 - np.log10(0.116 / 40.078) - np.log10(0.272 / 50.043) + 5 * pfm
    assert value(well, "langelier_index") == pytest.approx(7.25 - saturated, abs=0.01)


def test_aggressiveness_index_by_hand(well):
    """pH + log10(Ca × Alk) with Ca 289.7 and Alk 272 mg/L as CaCO3 (AWWA C400)."""
    assert value(well, "aggressiveness_index") == pytest.approx(7.25 + np.log10(289.7 * 272), abs=1e-3)


def test_corrosion_ratios_by_hand(well):
    """Larson in equivalents, chloride to sulfate by mass."""
    chloride, sulfate, alkalinity = 38 / 35.45, 2 * 46 / 96.06, 272 / 50.043
    assert value(well, "larson_ratio") == pytest.approx((chloride + sulfate) / alkalinity, rel=1e-3)
    assert value(well, "chloride_sulfate_ratio") == pytest.approx(38 / 46, rel=1e-9)


def test_hypochlorous_acid_share(plant):
    """54.7 % at pH 7.5 and 20 °C, 27.6 % at 8.0 (Morris 1966, at zero ionic strength)."""
    raw = plant.dict({"river": 100})
    dilute = dict.fromkeys(("magnesium", "potassium", "sulfate", "nitrate", "silica"))
    raw["waters"][0]["analyses"]["winter"] = plant.sheet(
        "river", **dilute, temperature=20, free_chlorine=0.5, alkalinity=5, calcium=1, sodium=1, chloride=1
    )
    outcome = evaluate(plant.read(raw), {"waters.river.analysis.ph": np.array([7.5, 8.0])})
    assert outcome.readout("hocl_percent") == pytest.approx([54.7, 27.6], abs=1.0)


def test_chlorine_to_nitrogen_is_5_06_for_pure_monochloramine(plant):
    """One mole of chlorine to one of nitrogen, by mass 70.9 to 14.0."""
    raw = plant.dict({"river": 100})
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("river", monochloramine=2)
    outcome = evaluate(plant.read(raw))
    assert value(outcome, "chlorine_to_nitrogen") == pytest.approx(5.06, abs=0.01)
    assert value(outcome, "total_chlorine") == pytest.approx(2)


def test_saturation_indices_see_only_what_is_there(well):
    """No fluoride, no fluorite index; the reason names what is missing."""
    assert np.isnan(value(well, "si_fluorite"))
    assert str(well.reasons(readout="si_fluorite")) == "there is no calcium or fluoride in this water"
    assert value(well, "si_gypsum") < -1


@pytest.mark.parametrize(
    ("key", "missing", "reason"),
    [
        ("larson_ratio", {"alkalinity": 0, "ph": 5.0}, "there is no alkalinity in this water"),
        ("chloride_sulfate_ratio", {"sulfate": None}, "there is no sulfate in this water"),
        ("si_calcite", {"calcium": None}, "there is no calcium or carbonate in this water"),
        (
            "langelier_index",
            {"calcium": None},
            "there is no calcium or no carbonate alkalinity in this water",
        ),
        ("aggressiveness_index", {"calcium": 0}, "there is no calcium or no alkalinity in this water"),
        ("hocl_percent", {}, "there is no free chlorine in this water"),
        ("cost", {}, "no price is entered"),
    ],
)
def test_what_has_no_meaning_is_nan_with_a_reason(plant, key, missing, reason):
    """A division by nothing or a logarithm of nothing is no value, never infinity."""
    raw = plant.dict({"river": 100})
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("river", **missing)
    outcome = evaluate(plant.read(raw))
    assert np.isnan(value(outcome, key))
    assert str(outcome.reasons(readout=key)) == reason
    assert str(outcome.reasons()) == ""


def test_no_readout_is_ever_infinite(plant):
    """Pure water with traces, at every stage, for every readout."""
    nothing = dict.fromkeys(("magnesium", "sodium", "potassium", "chloride", "sulfate", "nitrate", "silica"))
    raw = plant.dict({"river": 100})
    raw["waters"][0]["analyses"]["winter"] = plant.sheet(
        "river", **nothing, calcium=None, ph=7, alkalinity=0.5
    )
    outcome = evaluate(plant.read(raw))
    for key in READOUTS:
        assert not np.isinf(outcome.readout(key)).any(), key


def test_calcium_carbonate_potential_without_calcium_is_what_would_dissolve(plant):
    """CCPP is defined without calcium: the water dissolves some."""
    raw = plant.dict({"river": 100})
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("river", calcium=None, ph=7)
    assert value(evaluate(plant.read(raw)), "ccpp") < -5


# ---- how numbers are written -------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("key", "number", "text"),
    [
        ("ph", 8.204, "8.20"),
        ("ph", 12.0, "12.00"),
        ("calcium", 116.04, "116"),
        ("calcium", 26.44, "26.4"),
        ("calcium", 3.62, "3.6"),
        ("conductivity", 1307.4, "1307"),
        ("ccpp", -8.64, "−8.6"),
        ("ccpp", -0.04, "0.0"),
        ("ccpp", 0.0, "0.0"),
        ("si_calcite", -0.004, "0.00"),
        ("dissolved_aluminium", 0.0414, "0.041"),
        ("ionic_strength", 0.01234, "0.0123"),
        ("calcium", 99.96, "100"),
        ("larson_ratio", np.nan, "—"),
        ("larson_ratio", np.inf, "—"),
    ],
)
def test_a_number_has_the_digits_it_deserves(key, number, text):
    """At most three figures where they mean something, a true minus sign, no minus zero, a dash for none."""
    assert format_value(number, READOUTS[key]) == text


@pytest.mark.parametrize(
    ("key", "number", "text"),
    [
        ("ccpp", -8.64, "dissolves 8.6 mg/L as CaCO3"),
        ("ccpp", 4.0, "precipitates 4.0 mg/L as CaCO3"),
        ("ph", 7.4, "7.40"),
        ("calcium", np.nan, "—"),
    ],
)
def test_the_sign_of_the_potential_is_a_word(key, number, text):
    """Dissolves or precipitates, so that no national sign rule can be mistaken."""
    assert in_words(number, READOUTS[key]) == text


@pytest.mark.parametrize(
    ("number", "low", "high", "words"),
    [
        (7.4, 7.4, 8.5, "in range"), (7.39, 7.4, None, "below"), (8.51, None, 8.5, "above"),
        (8.0, None, None, "in range"), (np.nan, 7.4, 8.5, "no value"), (8.500001, 7.4, 8.5, "in range"),
    ],
)  # fmt: skip
def test_status_against_a_target(number, low, high, words):
    """Limits belong to the band; what is far below the last digit does not count."""
    assert status(number, low, high, READOUTS["ph"].slack) == words
