"""Readouts: every result quantity, once. Tiles, targets, sweeps, tables, report and help take it from here.

A readout is computed from a *stage* (a water at one place of the plant, for any number of points); the value
comes in the readout's unit. Where the quantity has no meaning (a ratio without its denominator, saturation
without calcium) the value is nan and ``undefined`` says why; it is never infinite.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cached_property
from types import MappingProxyType
from typing import Protocol

import numpy as np

from explorer.chemistry import Solution, System
from explorer.chemistry.calcium_carbonate import precipitation_potential
from explorer.chemistry.conductivity import conductivity
from explorer.scenario import indices
from explorer.treatment.ions import balance_percent, dissolved_solids
from explorer.treatment.units import default_unit, from_base

MINUS = "−"
NO_VALUE = "—"


class Stage(Protocol):
    """What a readout may ask of a water."""

    system: System
    totals: np.ndarray
    temperature: np.ndarray
    solids: Mapping[str, np.ndarray]
    cost: np.ndarray

    @property
    def solution(self) -> Solution: ...

    def total(self, key: str) -> np.ndarray: ...


Compute = Callable[[Stage], np.ndarray]


@dataclass(frozen=True)
class Readout:
    """One result quantity.

    ``digits``: decimals at most; ``significant``: figures at most (None: always ``digits`` decimals).
    ``sign_words``: words for a negative and a positive value. ``undefined``: why a solved water may have no
    such value. ``equilibrium``: whether the value needs the equilibrium, not only the totals.
    """

    key: str
    label: str
    short: str
    unit: str
    digits: int
    meaning: str
    source: str
    compute: Compute
    group: str
    significant: int | None = 3
    sign_words: tuple[str, str] | None = None
    undefined: str = ""
    equilibrium: bool = True

    @cached_property
    def unit_text(self) -> str:
        """The unit with a space before it, "" for a readout without unit."""
        return f" {self.unit}" if self.unit else ""

    @property
    def slack(self) -> float:
        """Difference that counts as none where a value meets a limit: a thousandth of the last digit."""
        return 10.0 ** -(self.digits + 3)


CONSERVED = "conserved on mixing"
DEFINITION = "definition"
ENGINE = "equilibrium of this engine; constants under Basis"


def _amount(key: str, base: Callable[[Stage], np.ndarray]) -> Compute:
    """Readout in the default unit of ``key`` from an amount in base units."""
    unit = default_unit(key)
    return lambda stage: from_base(base(stage), unit, key)


def _total(key: str, row: str | None = None) -> Compute:
    return _amount(key, lambda stage: stage.total(row or key))


def _saturation(solid: str) -> Compute:
    return lambda stage: stage.solution.saturation_index(solid)


def _hardness(stage: Stage) -> np.ndarray:
    return stage.total("calcium") + stage.total("magnesium")


def _carbonate_hardness(stage: Stage) -> np.ndarray:
    return np.clip(stage.total("alkalinity") / 2, 0.0, _hardness(stage))


def _total_chlorine(stage: Stage) -> np.ndarray:
    return stage.total("free_chlorine") + stage.total("monochloramine")


def _solids(stage: Stage) -> np.ndarray:
    return sum(stage.solids.values(), np.zeros(()))


def _readout(
    key: str, group: str, label: str, short: str, digits: int, meaning: str, source: str, compute: Compute, *,
    unit: str | None = None, **more: object,
) -> Readout:  # fmt: skip
    return Readout(
        key=key, label=label, short=short, unit=default_unit(key) if unit is None else unit, digits=digits,
        meaning=meaning, source=source, compute=compute, group=group, **more,
    )  # fmt: skip


def _ion(
    key: str, label: str, short: str, digits: int = 1, note: str = "", row: str | None = None
) -> Readout:
    meaning = note or f"Total dissolved {label[0].lower()}{label[1:]}, free and paired."
    return _readout(
        key, "Ions", label, short, digits, meaning, CONSERVED, _total(key, row), equilibrium=False
    )  # fmt: skip


def _saturation_index(key: str, solid: str, label: str, short: str, needs: str, note: str = "") -> Readout:
    meaning = (
        f"log10 of ion activity product over solubility of {label}: above 0 it may form, below 0 it"
        f" dissolves; says nothing of the amount.{note}"
    )
    return _readout(
        key, "Saturation", f"Saturation index, {label}", short, 2, meaning, ENGINE, _saturation(solid),
        unit="", significant=None, undefined=f"there is no {needs} in this water",
    )  # fmt: skip


_ALL: tuple[Readout, ...] = (
    _readout(
        "ph", "Acid and base", "pH", "pH", 2, "Minus log10 of the activity of H+.", ENGINE,
        lambda stage: stage.solution.ph, significant=None,
    ),
    _readout(
        "temperature", "Acid and base", "Temperature", "Temp.", 1, "Of the water at this place.",
        "heat balance of equal heat capacities", lambda stage: stage.temperature, significant=None,
        equilibrium=False,
    ),
    _readout(
        "alkalinity", "Acid and base", "Alkalinity", "Alk", 1,
        "Acid taken up to the carbon dioxide end point by all bases, not only carbonate.", CONSERVED,
        _total("alkalinity"), equilibrium=False,
    ),
    _readout(
        "carbonate_alkalinity", "Acid and base", "Carbonate alkalinity", "Carb. alk", 1,
        "The part of the alkalinity that bicarbonate and carbonate carry, with their ion pairs.", ENGINE,
        _amount("carbonate_alkalinity", lambda stage: stage.solution.carbonate_alkalinity),
    ),
    _readout(
        "dic", "Acid and base", "Dissolved inorganic carbon", "DIC", 1,
        "Carbon dioxide, bicarbonate and carbonate together, as carbon.", CONSERVED, _total("dic"),
        equilibrium=False,
    ),
    _readout(
        "co2", "Acid and base", "Carbon dioxide", "CO2", 2, "Dissolved carbon dioxide, as CO2.", ENGINE,
        _amount("co2", lambda stage: stage.solution.concentration("CO2(aq)")),
    ),
    _readout(
        "buffer_intensity", "Acid and base", "Buffer intensity", "β", 3,
        "Base needed to raise the pH by one unit, at constant totals; below 0.2 the pH is hard to hold.",
        "d(alkalinity)/d(pH) from the balance matrix of this engine",
        _amount("buffer_intensity", lambda stage: stage.solution.buffer_intensity),
    ),
    _ion("calcium", "Calcium", "Ca"),
    _ion("magnesium", "Magnesium", "Mg"),
    _readout(
        "hardness", "Ions", "Total hardness", "Hardness", 0, "Calcium and magnesium together.", CONSERVED,
        _amount("hardness", _hardness),
        equilibrium=False,
    ),
    _readout(
        "carbonate_hardness", "Ions", "Carbonate hardness", "Carb. hardness", 0,
        "The part of the hardness that alkalinity matches.", "the smaller of hardness and alkalinity",
        _amount("hardness", _carbonate_hardness),
        unit=default_unit("hardness"), equilibrium=False,
    ),
    _ion("sodium", "Sodium", "Na"),
    _ion("potassium", "Potassium", "K"),
    _ion("chloride", "Chloride", "Cl"),
    _ion("sulfate", "Sulfate", "SO4"),
    _ion("nitrate", "Nitrate", "NO3"),
    _ion("fluoride", "Fluoride", "F", 2),
    _ion("silica", "Silica", "SiO2"),
    _ion("boron", "Boron", "B", 2),
    _ion("ammonia", "Free ammonia", "NH3-N", 2, "Ammonia and ammonium as N; chloramine is not counted."),
    _ion("phosphate", "Orthophosphate", "P", 2),
    _readout(
        "tds", "Whole water", "Total dissolved solids", "TDS", 0,
        "Sum of the ions and silica that a dried residue would hold: bicarbonate counts as the carbonate it"
        " dries to; dissolved gas, chlorine and organic matter do not count.",
        "Standard Methods 1030 E (from memory)",
        lambda stage: dissolved_solids(stage.solution),
    ),
    _readout(
        "ionic_strength", "Whole water", "Ionic strength", "I", 4,
        "Half the sum of concentration times charge squared; results are a guide only above 0.1.", DEFINITION,
        lambda stage: stage.solution.ionic_strength, unit="mol/L",
    ),
    _readout(
        "conductivity", "Whole water", "Conductivity at 25 °C", "EC25", 0,
        "Electrical conductivity as a meter referred to 25 °C shows it, from all ions.",
        "McCleskey et al. 2012, Geochim. Cosmochim. Acta 77:369-382 (from memory); constants under Basis",
        lambda stage: conductivity(stage.solution),
    ),
    _readout(
        "conductivity_20", "Whole water", "Conductivity at 20 °C", "EC20", 0,
        "The same referred to 20 °C, as European limits are.",
        "McCleskey et al. 2012, Geochim. Cosmochim. Acta 77:369-382 (from memory); constants under Basis",
        lambda stage: conductivity(stage.solution, at=20.0), unit=default_unit("conductivity"),
    ),
    _readout(
        "charge_balance", "Whole water", "Charge balance", "Balance", 1,
        "100 (cations − anions) / (cations + anions) in meq/L. A rest comes from the analysis; it stays out"
        " of the pH.", "common practice (Standard Methods 1030 E)",
        lambda stage: balance_percent(stage.solution), unit="%", significant=None,
        undefined="there are no ions in this water",
    ),
    _saturation_index("si_calcite", "calcite", "calcite", "SI calcite", "calcium or carbonate"),
    _saturation_index("si_aragonite", "aragonite", "aragonite", "SI arag.", "calcium or carbonate"),
    _readout(
        "ccpp", "Calcium carbonate", "Calcium carbonate precipitation potential", "CCPP", 1,
        "Calcium carbonate that would precipitate (+) or dissolve (−) on the way to calcite equilibrium in"
        " closed water.", "closed equilibrium with calcite, this engine",
        _amount("ccpp", lambda stage: precipitation_potential(stage.solution)),
        sign_words=("dissolves", "precipitates"),
    ),
    _readout(
        "langelier_index", "Calcium carbonate", "Langelier index", "LI", 2,
        "pH less the saturation pH by the hand formula: constants of this engine, ion pairs and bases other"
        " than carbonate left out. The saturation index of calcite counts them.",
        "Standard Methods 2330 B", lambda stage: stage.solution.ph - indices.saturation_ph(stage.solution),
        unit="", significant=None, undefined="there is no calcium or no carbonate alkalinity in this water",
    ),
    _readout(
        "ryznar_index", "Calcium carbonate", "Ryznar index", "RI", 2,
        "Twice the saturation pH of the Langelier index less the pH; an old rule of thumb.",
        "2 pHs − pH (common practice)",
        lambda stage: 2 * indices.saturation_ph(stage.solution) - stage.solution.ph,
        unit="", significant=None, undefined="there is no calcium or no carbonate alkalinity in this water",
    ),
    _readout(
        "aggressiveness_index", "Corrosion", "Aggressiveness index", "AI", 2,
        "pH + log10(calcium × alkalinity), both as CaCO3; made for asbestos-cement pipe: below 10 highly"
        " aggressive, 12 and above not.", "AWWA C400 (classes from memory)",
        lambda stage: indices.aggressiveness(stage.solution),
        unit="", significant=None, undefined="there is no calcium or no alkalinity in this water",
    ),
    _readout(
        "larson_ratio", "Corrosion", "Larson ratio", "Larson", 2,
        "(chloride + 2 sulfate) / alkalinity in equivalents; a rise means more attack on iron.",
        "Larson & Skold 1958 (from memory)",
        lambda stage: indices.ratio(
            stage.total("chloride") + 2 * stage.total("sulfate"), stage.total("alkalinity")
        ),
        unit="", undefined="there is no alkalinity in this water", equilibrium=False,
    ),
    _readout(
        "chloride_sulfate_ratio", "Corrosion", "Chloride to sulfate ratio", "Cl/SO4", 2,
        "By mass; a rise is a reason to test for galvanic attack on lead solder.",
        "Nguyen, Stone & Edwards 2011, J. AWWA (abstract)",
        lambda stage: indices.ratio(
            from_base(stage.total("chloride"), "mg/L", "chloride"),
            from_base(stage.total("sulfate"), "mg/L", "sulfate"),
        ),
        unit="", undefined="there is no sulfate in this water", equilibrium=False,
    ),
    _readout(
        "hocl_percent", "Chlorine and ammonia", "Hypochlorous acid share", "HOCl", 1,
        "Part of the free chlorine present as HOCl, its stronger form.", ENGINE,
        lambda stage: indices.ratio(
            stage.solution.concentration("HOCl"), stage.total("free_chlorine"), 100.0
        ),
        unit="%", undefined="there is no free chlorine in this water",
    ),
    _readout(
        "free_chlorine", "Chlorine and ammonia", "Free chlorine", "Free Cl2", 2,
        "Hypochlorous acid and hypochlorite; decay is not modelled.", "completed stoichiometry",
        _total("free_chlorine"), equilibrium=False,
    ),
    _readout(
        "monochloramine", "Chlorine and ammonia", "Monochloramine", "NH2Cl", 2,
        "Combined chlorine by completed stoichiometry; kinetics are not modelled.", "completed stoichiometry",
        _total("monochloramine"), equilibrium=False,
    ),
    _readout(
        "total_chlorine", "Chlorine and ammonia", "Total chlorine", "Total Cl2", 2,
        "Free chlorine and monochloramine.", "completed stoichiometry",
        _amount("free_chlorine", _total_chlorine),
        unit=default_unit("free_chlorine"), equilibrium=False,
    ),
    _readout(
        "chlorine_to_nitrogen", "Chlorine and ammonia", "Chlorine to nitrogen ratio", "Cl2:N", 2,
        "Total chlorine over ammonia nitrogen, free and combined, by mass; 5.06 is all monochloramine.",
        DEFINITION,
        lambda stage: indices.ratio(
            from_base(_total_chlorine(stage), "mg/L as Cl2", "free_chlorine"),
            from_base(stage.total("ammonia") + stage.total("monochloramine"), "mg/L as N", "ammonia"),
        ),
        unit="", undefined="there is no ammonia in this water",
        equilibrium=False,
    ),
    _readout(
        "unionised_ammonia", "Chlorine and ammonia", "Un-ionised ammonia", "NH3", 3,
        "Ammonia present as NH3, as N; harmful to fish.", ENGINE,
        _amount("unionised_ammonia", lambda stage: stage.solution.concentration("NH3(aq)")),
    ),
    _ion("dissolved_aluminium", "Dissolved aluminium", "Al", 3,
         "Dissolved after the hydroxide has formed; flocs are not counted.", "aluminium"),
    _ion("dissolved_iron", "Dissolved iron", "Fe", 3,
         "Iron(III) dissolved after the hydroxide has formed; flocs are not counted.", "iron"),
    _saturation_index("si_vaterite", "vaterite", "vaterite", "SI vat.", "calcium or carbonate"),
    _saturation_index("si_brucite", "brucite", "brucite", "SI Mg(OH)2", "magnesium"),
    _saturation_index("si_gypsum", "gypsum", "gypsum", "SI gypsum", "calcium or sulfate"),
    _saturation_index("si_fluorite", "fluorite", "fluorite", "SI CaF2", "calcium or fluoride"),
    _saturation_index(
        "si_amorphous_silica", "amorphous_silica", "amorphous silica", "SI SiO2", "silica"
    ),
    _saturation_index(
        "si_hydroxyapatite", "hydroxyapatite", "hydroxyapatite", "SI apatite", "calcium or phosphate",
        " For information: it forms slowly and is far exceeded in many stable waters.",
    ),
    _saturation_index(
        "si_struvite", "struvite", "struvite", "SI struvite", "magnesium, ammonia or phosphate"
    ),
    _readout(
        "solids", "Solids and cost", "Solids formed", "Solids", 1,
        "Dry mass of hydroxides and carbonates formed by the steps so far.", "stoichiometry", _solids,
        equilibrium=False,
    ),
    _readout(
        "cost", "Solids and cost", "Chemical cost", "Cost", 2,
        "Price of the chemicals dosed so far, per ML of this water; only doses with a price count.",
        "entered prices", lambda stage: stage.cost, unit="per ML", undefined="no price is entered",
        equilibrium=False,
    ),
)  # fmt: skip

READOUTS: Mapping[str, Readout] = MappingProxyType({readout.key: readout for readout in _ALL})
"""Every readout by key, in the order of lists and tables."""


def format_value(value: float, readout: Readout) -> str:
    """The number as shown everywhere: at most ``digits`` decimals and ``significant`` figures, true minus
    sign, no digit that is only noise, no "−0". A missing value is a dash."""
    value = float(value)
    if not np.isfinite(value):
        return NO_VALUE
    decimals = readout.digits
    if readout.significant is not None and value:
        rounded = float(f"{value:.{readout.significant}g}")
        leading = int(np.floor(np.log10(abs(rounded)))) + 1
        decimals = min(decimals, max(readout.significant - leading, 0))
    text = f"{value:.{decimals}f}"
    if not text.strip("-0."):
        text = text.lstrip("-")
    return text.replace("-", MINUS)


def in_words(value: float, readout: Readout) -> str:
    """The number with its unit; with the sign word instead of the sign where the readout has one."""
    text = format_value(value, readout)
    if readout.sign_words and text != NO_VALUE:
        word = readout.sign_words[0 if text.startswith(MINUS) else 1]
        text = f"{word} {text.lstrip(MINUS)}"
    return text if text == NO_VALUE else text + readout.unit_text


def status(value: float, low: float | None, high: float | None, slack: float = 0.0) -> str:
    """``in range``, ``below`` or ``above`` against the entered limits; ``no value`` for a missing value."""
    if not np.isfinite(value):
        return "no value"
    if low is not None and value < low - slack:
        return "below"
    if high is not None and value > high + slack:
        return "above"
    return "in range"
