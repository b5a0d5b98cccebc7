"""Hand checks: the current case, checked in a few steps that a sceptic can follow on paper.

Each takes figures as printed, does the arithmetic with them, and sets the result beside that of the engine.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from explorer.chemistry.elements import molar_mass
from explorer.scenario.evaluate import Outcome
from explorer.scenario.model import Scenario
from explorer.scenario.operations import Dose
from explorer.scenario.outcome import BLEND
from explorer.scenario.readouts import MINUS, READOUTS
from explorer.scenario.stage import Stage
from explorer.studies.plain import known
from explorer.treatment.chemicals import density, dose_in
from explorer.treatment.floc import ALKALINITY_PER_METAL
from explorer.treatment.units import from_base, to_base

MOST = 3

CACO3_PER_EQUIVALENT = molar_mass("CaCO3") / 2
"""mg of CaCO3 per meq."""

CONSERVATIVE = ("nitrate", "chloride", "sulfate", "sodium", "potassium")
"""Ions whose blend is plain arithmetic, the most telling first."""

METALS = {"dissolved_aluminium": "Al", "dissolved_iron": "Fe"}
"""Readouts of what a coagulant leaves dissolved, with their formulas."""

WORTH_A_TERM = 1e-3
"""Part of the result from which a term is written down."""

KELVIN = 273.15


@dataclass(frozen=True)
class HandCheck:
    """``sentence``: the arithmetic in words and figures; ``hand`` and ``engine`` in ``unit``."""

    key: str
    sentence: str
    hand: float
    engine: float
    unit: str

    @property
    def percent(self) -> float:
        """Difference of the hand result from the engine's, in percent of the latter."""
        return 100 * (self.hand - self.engine) / self.engine if self.engine else float("nan")

    def text(self) -> str:
        """The whole check in one sentence."""
        unit = f" {self.unit}" if self.unit else ""
        percent = f"{self.percent:+.1f}".replace("-", MINUS)
        percent = "0.0" if percent[1:] == "0.0" else percent
        return (
            f"{self.sentence} = {figure(self.hand)}{unit}; the engine has {figure(self.engine)} ({percent} %)"
        )

    def to_dict(self) -> dict[str, Any]:
        """Plain data."""
        return {
            "key": self.key,
            "text": self.text(),
            "hand": self.hand,
            "engine": self.engine,
            "unit": self.unit,
            "percent": known(self.percent),
        }


def figure(value: float, digits: int = 4) -> str:
    """A number as one writes it on paper."""
    return np.format_float_positional(float(f"{value:.{digits}g}"), trim="-").replace("-", MINUS)


def written(value: float, digits: int = 4) -> tuple[str, float]:
    """A number as printed, and the value that this print has."""
    return figure(value, digits), float(f"{value:.{digits}g}")


def hand_checks(scenario: Scenario, outcome: Outcome, most: int = MOST) -> list[HandCheck]:
    """The most telling checks of an outcome of a single point, at most ``most``."""
    found: list[HandCheck] = []
    for check in _CHECKS:
        found += [made for made in check(scenario, outcome) if np.isfinite(made.engine)]
        if len(found) >= most:
            break
    return found[:most]


def _dose_on_alkalinity(_: Scenario, outcome: Outcome) -> Iterator[HandCheck]:
    """Alkalinity that the dose with the largest effect gives or takes."""
    best: tuple[float, HandCheck] | None = None
    for before, stage in zip(outcome.stages, outcome.stages[1:], strict=False):
        dose = outcome.dosing.get(stage.id)
        if dose is None or not float(dose.moles) or _chlorine_reacts(before, stage, dose):
            continue
        adds = dose.chemical.totals
        metals = adds.get("aluminium", 0.0) + adds.get("iron", 0.0)
        equivalents = adds.get("alkalinity", 0.0) - ALKALINITY_PER_METAL * metals
        if not equivalents:
            continue
        (amount_text, amount), unit, mass = _weighed(dose)
        factor_text, factor = written(abs(equivalents) * CACO3_PER_EQUIVALENT / mass, 3)
        change = float(stage.readout("alkalinity") - before.readout("alkalinity"))
        verb = "gives" if equivalents > 0 else "takes"
        sentence = (
            f"{stage.name} {verb} alkalinity: {amount_text} {unit} × {factor_text}"
            f" ({figure(abs(equivalents))} eq × {figure(CACO3_PER_EQUIVALENT)} / {figure(mass)})"
        )
        hand = amount * factor
        for metal, formula in METALS.items():
            dissolved_text, dissolved = written(float(stage.readout(metal) - before.readout(metal)), 3)
            per_metal_text, per_metal = written(
                ALKALINITY_PER_METAL * CACO3_PER_EQUIVALENT / molar_mass(formula), 3
            )
            if dissolved * per_metal > WORTH_A_TERM * hand:
                sentence += f" {MINUS} {dissolved_text} mg/L of {formula} left dissolved × {per_metal_text}"
                hand -= dissolved * per_metal
        made = HandCheck("dose_alkalinity", sentence, hand, abs(change), "mg/L as CaCO3")
        if best is None or made.hand > best[0]:
            best = made.hand, made
    if best is not None:
        yield best[1]


def _weighed(dose: Dose) -> tuple[tuple[str, float], str, float]:
    """A dose as printed in a unit of mass, that unit, and g of it per mol of chemical."""
    mass_unit = dose.unit.startswith("mg/L") and not dose.unit.endswith("product")
    unit = dose.unit if mass_unit else "mg/L"
    amount = float(dose_in(dose.chemical, dose.moles, unit))
    return written(amount), unit, 1e-3 / dose.chemical.units[unit]


def _chlorine_reacts(before: Stage, after: Stage, dose: Dose) -> bool:
    expected = before.total("free_chlorine") + dose.moles * dose.chemical.totals.get("free_chlorine", 0.0)
    return not np.allclose(after.total("free_chlorine"), expected, rtol=1e-9, atol=0.0)


def _conservative_blend(scenario: Scenario, outcome: Outcome) -> Iterator[HandCheck]:
    """The conservative ion in which the waters differ most."""
    parts = {water: float(part) for water, part in outcome.parts.items() if part > 0}
    if len(parts) < 2:
        return
    best: tuple[float, str, dict[str, float]] | None = None
    for ion in CONSERVATIVE:
        amounts = {water: _entered(scenario, outcome, water, ion) for water in parts}
        if any(
            not np.isclose(amount, float(outcome.ends[water].readout(ion)), rtol=1e-6)
            for water, amount in amounts.items()
        ):
            continue
        mean = sum(amounts.values()) / len(amounts)
        spread = (max(amounts.values()) - min(amounts.values())) / mean if mean else 0.0
        if spread and (best is None or spread > best[0]):
            best = spread, ion, amounts
    if best is None:
        return
    _, ion, amounts = best
    terms, hand = [], 0.0
    for water, part in parts.items():
        (part_text, part_value), (amount_text, amount_value) = written(part), written(amounts[water])
        terms.append(f"{part_text} × {amount_text}")
        hand += part_value * amount_value
    sentence = f"{READOUTS[ion].label} of the blend: {' + '.join(terms)}"
    engine = float(outcome.readout(ion, BLEND))
    yield HandCheck("blend", sentence, hand, engine, READOUTS[ion].unit)


def _entered(scenario: Scenario, outcome: Outcome, water: str, ion: str) -> float:
    """An ion of an analysis as entered, in the unit of its readout; 0 where it is not in the analysis."""
    entry = scenario.water(water).analyses[outcome.season].entries.get(ion)
    if entry is None:
        return 0.0
    value = float(outcome.inputs[f"waters.{water}.analysis.{ion}"])
    return value if entry.unit == READOUTS[ion].unit else _converted(value, entry.unit, ion)


def _converted(value: float, unit: str, ion: str) -> float:
    return float(from_base(to_base(value, unit, ion), READOUTS[ion].unit, ion))


def _pump(_: Scenario, outcome: Outcome) -> Iterator[HandCheck]:
    """Rate of the largest dosing pump."""
    rates = {step: float(dose.pump_rate) for step, dose in outcome.dosing.items()}
    rates = {step: rate for step, rate in rates.items() if np.isfinite(rate) and rate > 0}
    if not rates:
        return
    step = max(rates, key=rates.get)
    dose = outcome.dosing[step]
    strength = float(dose.chemical.usual_strength if dose.strength is None else dose.strength)
    amount_text, amount = written(float(dose_in(dose.chemical, dose.moles, "mg/L")))
    flow_text, flow = written(float(dose.flow))
    part_text, part = written(strength / 100)
    heavy_text, heavy = written(float(density(dose.chemical, strength)))
    sentence = (
        f"Pump for {outcome.stage(step).name}: {amount_text} mg/L × {flow_text} m³/h"
        f" / ({part_text} × {heavy_text} kg/L × 1000)"
    )
    yield HandCheck("pump", sentence, amount * flow / (part * heavy * 1000), rates[step], "L/h")


def _hypochlorous(_: Scenario, outcome: Outcome) -> Iterator[HandCheck]:
    """Morris 1966, J. Phys. Chem. 70:3798 (from memory): pKa = 3000/T − 10.0686 + 0.0253 T, less 0.5 √I."""
    if not float(outcome.stage().total("free_chlorine")) > 0:
        return
    ph_text, ph = written(float(outcome.readout("ph")), 3)
    kelvin = float(outcome.readout("temperature")) + KELVIN
    strength_text, strength = written(float(outcome.readout("ionic_strength")), 2)
    dilute_text, dilute = written(3000 / kelvin - 10.0686 + 0.0253 * kelvin, 3)
    pka_text, pka = written(dilute - 0.5 * strength**0.5, 3)
    sentence = (
        f"HOCl part of the free chlorine: pKa {dilute_text} at {figure(kelvin - KELVIN, 3)} °C (Morris 1966)"
        f" {MINUS} 0.5 √{strength_text} = {pka_text}; 100 / (1 + 10^({ph_text} {MINUS} {pka_text}))"
    )
    hand = 100 / (1 + 10 ** (ph - pka))
    yield HandCheck("hocl", sentence, hand, float(outcome.readout("hocl_percent")), "%")


def _hardness(_: Scenario, outcome: Outcome) -> Iterator[HandCheck]:
    """Total hardness of the finished water."""
    (calcium_text, calcium), (magnesium_text, magnesium) = (
        written(float(outcome.readout(ion))) for ion in ("calcium", "magnesium")
    )
    factors = [written(molar_mass("CaCO3") / molar_mass(ion)) for ion in ("Ca", "Mg")]
    sentence = f"Total hardness: {calcium_text} × {factors[0][0]} + {magnesium_text} × {factors[1][0]}"
    hand = calcium * factors[0][1] + magnesium * factors[1][1]
    yield HandCheck("hardness", sentence, hand, float(outcome.readout("hardness")), "mg/L as CaCO3")


def _heat(_: Scenario, outcome: Outcome) -> Iterator[HandCheck]:
    """Temperature of the blend."""
    parts = {water: float(part) for water, part in outcome.parts.items() if part > 0}
    if len(parts) < 2:
        return
    terms, hand = [], 0.0
    for water, part in parts.items():
        (part_text, part_value), (text, value) = (
            written(part),
            written(float(outcome.ends[water].temperature)),
        )
        terms.append(f"{part_text} × {text}")
        hand += part_value * value
    engine = float(outcome.readout("temperature", BLEND))
    yield HandCheck("heat", f"Temperature of the blend: {' + '.join(terms)}", hand, engine, "°C")


def _ratio(_: Scenario, outcome: Outcome) -> Iterator[HandCheck]:
    """Chloride over sulfate by mass."""
    (chloride_text, chloride), (sulfate_text, sulfate) = (
        written(float(outcome.readout(ion))) for ion in ("chloride", "sulfate")
    )
    if sulfate > 0:
        engine = float(outcome.readout("chloride_sulfate_ratio"))
        sentence = f"Chloride over sulfate by mass: {chloride_text} / {sulfate_text}"
        yield HandCheck("ratio", sentence, chloride / sulfate, engine, "")


def _equivalents(_: Scenario, outcome: Outcome) -> Iterator[HandCheck]:
    """Alkalinity in meq/L."""
    text, value = written(float(outcome.readout("alkalinity")))
    sentence = f"Alkalinity in meq/L: {text} / {figure(CACO3_PER_EQUIVALENT)}"
    engine = 1000 * float(outcome.stage().total("alkalinity"))
    hand = value / float(figure(CACO3_PER_EQUIVALENT))
    yield HandCheck("equivalents", sentence, hand, engine, "meq/L")


_CHECKS: tuple[Callable[[Scenario, Outcome], Iterator[HandCheck]], ...] = (
    _dose_on_alkalinity,
    _conservative_blend,
    _pump,
    _hypochlorous,
    _hardness,
    _heat,
    _ratio,
    _equivalents,
)
"""The most telling first."""
