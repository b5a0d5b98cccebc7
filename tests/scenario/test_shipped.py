"""The shipped scenarios tell their stories: each opens, solves, and shows what its note promises."""

import numpy as np
import pytest

from explorer.chemistry import System
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.shipped import shipped
from explorer.treatment.analysis import examine

PATHS = shipped()


def opened(name: str) -> Scenario:
    """A shipped scenario by name."""
    return open_scenario(PATHS[name])


def option(name: str, number: int = 0) -> Scenario:
    """A kept option of a shipped scenario."""
    return opened(name).options[number].scenario


def test_all_demonstrations_are_shipped() -> None:
    """Eight plants and the faulty analyses."""
    expected = {"amber", "dune", "moss", "quartz", "harbor", "cinder", "ember", "juniper", "faulty_analyses"}
    assert set(PATHS) == expected


@pytest.mark.parametrize("name", PATHS)
def test_every_season_and_option_can_be_solved(name: str) -> None:
    """pH and the precipitation potential are numbers, and no note is an error."""
    scenario = opened(name)
    for kept in [scenario, *(part.scenario for part in scenario.options)]:
        for season in kept.seasons:
            outcome = evaluate(kept, season=season)
            assert np.isfinite(outcome.readout("ph"))
            assert np.isfinite(outcome.readout("ccpp"))
            assert not [note for note in outcome.notes if note.level == "error"]


@pytest.mark.parametrize("name", PATHS)
def test_the_sweep_of_every_scenario_can_be_solved(name: str) -> None:
    """The dial it names turns over the whole range it names."""
    scenario = opened(name)
    sweep = scenario.sweep
    outcome = evaluate(scenario, {sweep.dial: np.linspace(sweep.start, sweep.stop, 7)})
    assert np.isfinite(outcome.readout("ph")).all()
    # The pH may be held; what holds it shows in the alkalinity.
    assert len(set(outcome.readout("alkalinity"))) == 7


@pytest.mark.parametrize("name", PATHS)
def test_every_scenario_says_that_its_data_are_invented(name: str) -> None:
    """The note is where a reader looks first."""
    assert "invented" in opened(name).note


def test_amber_two_good_waters_make_a_bad_blend() -> None:
    """Each source alone is above or near saturation; in between the blend dissolves more than is allowed."""
    ccpp = evaluate(opened("amber"), {"waters.well.share": np.array([0.0, 40.0, 100.0])}).readout("ccpp")
    assert ccpp[0] > -1
    assert ccpp[1] < -5
    assert ccpp[2] > 0


def test_dune_meets_its_targets_with_half_the_flow_over_limestone() -> None:
    """All targets hold at the shipped split; far less over the contactor is too little."""
    scenario = opened("dune")
    assert all(met for _, _, met, _ in evaluate(scenario).targets())
    less = evaluate(scenario, {"waters.permeate.train.contactor.fraction": 30.0})
    assert less.readout("alkalinity") < 80


def test_moss_a_small_dosing_error_moves_the_ph_far_and_lime_helps() -> None:
    """Three percent of the caustic is more than 0.2 pH; with lime and CO2 the buffer is stronger."""
    error = np.array([0.97, 1.0, 1.03])
    ph = evaluate(opened("moss"), {"train.last_caustic.dose": 11.78 * error}).readout("ph")
    assert ph[1] == pytest.approx(8.2, abs=0.02)
    assert np.ptp(ph) > 0.4
    limed = evaluate(option("moss"), {"train.last_caustic.dose": 10.3 * error}).readout("ph")
    assert limed[1] == pytest.approx(8.2, abs=0.05)
    assert np.ptp(limed) < 0.7 * np.ptp(ph)


def test_quartz_softening_meets_its_targets_and_leaves_magnesium() -> None:
    """Hardness cannot fall below what the magnesium makes."""
    scenario = opened("quartz")
    assert all(met for _, _, met, _ in evaluate(scenario).targets())
    every = evaluate(scenario, {"train.softener.fraction": 100.0})
    assert every.readout("magnesium") == pytest.approx(31, rel=1e-3)
    assert every.readout("hardness") > 127


def test_harbor_the_residual_vanishes_where_the_waters_meet() -> None:
    """Both waters carry chlorine, some blends hardly any; with wells turned to chloramine all blends do."""
    share = {"waters.import.share": np.array([0.0, 35.0, 100.0])}
    residual = evaluate(opened("harbor"), share).readout("total_chlorine")
    assert residual[1] < 0.5 < residual[0] < residual[2]
    for number in range(2):
        assert (evaluate(option("harbor", number), share).readout("total_chlorine") >= 0.85).all()


def test_cinder_ammonia_is_the_limit() -> None:
    """All but the ammonia target hold at four cycles; the water is not for drinking."""
    scenario = opened("cinder")
    missed = [target.readout for target, _, met, _ in evaluate(scenario).targets() if not met]
    assert missed == ["ammonia"]
    assert not scenario.potable


def test_ember_stripping_saves_caustic_and_costs_potential() -> None:
    """Without the stripper the potential is higher, for six times the caustic."""
    stripped, plain = evaluate(opened("ember")), evaluate(option("ember"))
    assert stripped.readout("ccpp") < 3 < plain.readout("ccpp")
    assert plain.doses["caustic"][0] > 5 * stripped.doses["caustic"][0]


def test_juniper_the_other_coagulant_raises_chloride_over_sulfate() -> None:
    """At equal metal and equal pH the ratio rises by more than the 0.2 that is allowed."""
    alum, iron = evaluate(opened("juniper")), evaluate(option("juniper"))
    assert iron.readout("ph") == pytest.approx(float(alum.readout("ph")), abs=1e-3)
    assert iron.readout("chloride_sulfate_ratio") > alum.readout("chloride_sulfate_ratio") + 0.2


def test_the_faulty_analyses_are_found_and_the_others_are_not() -> None:
    """Two do not balance, and their likely cause is said; the two that are easily misread balance, with their
    calcium partly paired and their alkalinity partly not carbonate."""
    scenario = opened("faulty_analyses")
    found = {
        water.id: examine(water.analyses[scenario.season].entries, System()) for water in scenario.waters
    }
    wrong = {name: made.likely_cause for name, made in found.items() if not made.balance.acceptable}
    assert set(wrong) == {"granite", "cobble"}
    assert "calcium 290 may be mg/L as CaCO3" in wrong["granite"] and "sulfate" in wrong["cobble"]
    outcome = evaluate(scenario)
    gypsum, mixed = (outcome.stage(name).solution for name in ("gypsum_well", "mixed"))
    paired = 1 - gypsum.concentration("Ca+2") / gypsum.totals[System().index["calcium"]]
    assert 0.2 < paired < 0.3
    held = outcome.readout("carbonate_alkalinity", "mixed") / outcome.readout("alkalinity", "mixed")
    assert held < 0.8 and mixed.ph > 8.5


def test_every_plant_that_doses_has_prices_with_their_date() -> None:
    """Cost per ML is a number in every season, in a currency that is named."""
    for name in PATHS:
        scenario = opened(name)
        outcome = evaluate(scenario)
        if outcome.dosing:
            assert scenario.currency and scenario.price_date, name
            assert np.isfinite(outcome.readout("cost")), name
            assert all(np.isfinite(dose.price) for dose in outcome.dosing.values()), name


def test_the_readout_a_scenario_shows_is_one_that_its_sweep_moves() -> None:
    """Nobody opens an example on a flat line."""
    for name in PATHS:
        scenario = opened(name)
        plan = scenario.sweep
        shown = plan.readout or "ccpp"
        values = evaluate(scenario, {plan.dial: np.linspace(plan.start, plan.stop, 21)}).readout(shown)
        assert np.isfinite(values).sum() > 15, name
        assert np.ptp(values[np.isfinite(values)]) > 0.05 * np.nanmax(np.abs(values)), name
