"""The verdict: from data to the sentence."""

import numpy as np
import pytest

from explorer.studies.verdict import TargetState, calcium_carbonate, shared, stretches, verdict, where

X = np.linspace(0, 100, 101)


def state(name: str, value: float, low: float | None, high: float | None, **more: object) -> TargetState:
    return TargetState(name, value, f"{value:.2f}", more.pop("unit", ""), low, high, **more)


def test_limiting_target_and_where_it_would_be_met() -> None:
    """The finding, the carbonate sentence, the limiting target and the place along the sweep."""
    states = [
        state("pH", 8.05, 7.8, 8.4, along=np.full(101, 8.05)),
        state("Buffer intensity", 0.19, 0.3, None, unit="mmol/L per pH", along=0.1 + 0.01 * X / 2.6),
    ]
    said = verdict(states, 5.06, X, "%", "Chalk")
    assert said.lead == "Meets 1 of 2 entered targets."
    assert said.rest == (
        "Precipitates 5.1 mg/L CaCO₃. Limiting: buffer intensity 0.19 mmol/L per pH, target at least 0.3,"
        " met from 52 % Chalk."
    )
    assert said.good is False


def test_all_met_names_the_closest_bound() -> None:
    """With everything met the tightest target is named and nothing is said of the sweep."""
    states = [state("pH", 8.39, 7.8, 8.4), state("Nitrate", 10, None, 50)]
    said = verdict(states, -2.04, X, "%", "Chalk")
    assert said.lead == "Meets all 2 entered targets."
    assert said.rest == "Dissolves 2.0 mg/L CaCO₃. Closest to its bound: pH 8.39, target 7.8 to 8.4."
    assert said.good is True


def test_single_target() -> None:
    """One target is spoken of in the singular."""
    assert verdict([state("pH", 8.0, 7.8, 8.4)]).lead == "Meets the entered target."
    assert verdict([state("pH", 9.0, 7.8, 8.4)]).lead == "Meets none of 1 entered target."


def test_without_targets_nothing_is_judged() -> None:
    """No target, no tick and no cross."""
    said = verdict([], 3.0)
    assert said.good is None
    assert str(said) == "No targets entered. Precipitates 3.0 mg/L CaCO₃."


def test_value_of_calcium_carbonate_is_not_said_twice() -> None:
    """Where the limiting target is the carbonate potential itself its number stands once."""
    said = verdict([state("CaCO₃ potential", -8.5, -5, None, said=True)], -8.5)
    assert said.rest.count("8.5") == 1


def test_point_without_result_gives_its_reason() -> None:
    """No value is judged where there is none."""
    said = verdict([state("pH", np.nan, 7, 8)], reason="no water has the entered analysis")
    assert str(said) == "No result at this setting: no water has the entered analysis."


def test_value_held_at_a_bound_counts_as_met() -> None:
    """Rounding of a held value does not turn a target red."""
    assert state("pH", 8.0 - 1e-10, 8.0, 8.4, slack=1e-6).met
    assert not state("pH", 8.0 - 1e-3, 8.0, 8.4, slack=1e-6).met


def test_unmet_everywhere() -> None:
    """A target out of reach is said to be so."""
    said = verdict([state("pH", 9.0, 7.8, 8.4, along=np.full(101, 9.0))], np.nan, X, "%", "Chalk")
    assert "met nowhere along this sweep" in said.rest


def test_all_targets_met_together_is_said_where_it_differs() -> None:
    """Meeting the limiting target is not enough where another one fails."""
    states = [
        state("A", 1.0, 2.0, None, along=X / 10),
        state("B", 5.0, None, 6.0, along=X / 10),
    ]
    said = verdict(states, np.nan, X, "%", "Chalk")
    assert said.rest.endswith("met from 20 % Chalk; all met between 20 and 60 %.")


def test_stretches_end_between_points() -> None:
    """Ends are interpolated; a gap without values ends a stretch."""
    y = np.array([0.0, 1.0, 2.0, np.nan, 2.0, 0.0])
    x = np.arange(6.0)
    assert stretches(x, y, 0.5, None) == [(0.5, 2.0), (4.0, pytest.approx(4.75))]
    assert stretches(x, y, None, None) == [(0.0, 2.0), (4.0, 5.0)]


def test_a_band_passed_between_two_points_is_found() -> None:
    """A narrow band that a steep curve crosses within one step is not overlooked."""
    found = stretches(np.array([0.0, 1.0]), np.array([0.0, 10.0]), 4.0, 6.0)
    assert found == [(pytest.approx(0.4), pytest.approx(0.6))]


def test_overlap_of_stretches() -> None:
    """Only what both lists hold remains."""
    assert shared([(0, 2), (4, 9)], [(1, 5)]) == [(1, 2), (4, 5)]


def test_places_in_words() -> None:
    """Places at the ends of the sweep are open."""
    assert where([(0, 16.2), (61.8, 100)], X, "%", "") == "up to 16 % and from 62 %"
    assert where([(0, 100)], X, "%", "") == "all along this sweep"


def test_calcium_carbonate_in_balance() -> None:
    """What rounds to nothing neither dissolves nor precipitates."""
    assert calcium_carbonate(0.02) == "In balance with calcium carbonate."
    assert calcium_carbonate(np.nan) == ""
