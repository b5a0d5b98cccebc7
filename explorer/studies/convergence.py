"""Convergence: whether more samples would have said the same."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.evaluate import follow
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import READOUTS
from explorer.studies.progress import UNWATCHED, Watch, batch
from explorer.studies.spread import NOTHING_OFF, spread_of
from explorer.studies.sweep import listed
from explorer.studies.tolerance import USUAL_SAMPLES, USUAL_SEED, chances

MORE = 10
"""At least this many times as many samples are drawn."""

PERCENTS = (2.5, 50.0, 97.5)


@dataclass(frozen=True)
class Convergence:
    """Percentiles (``PERCENTS``) of a readout at the operating point from ``samples`` and from ``more``
    samples, of which the former are the first."""

    readout: str
    samples: int
    more: int
    few: np.ndarray
    many: np.ndarray

    @property
    def shift(self) -> float:
        """How far the percentiles moved at most, in the unit of the readout."""
        return float(np.max(np.abs(self.many - self.few)))

    def to_dict(self) -> dict[str, Any]:
        """Plain numbers by name; None where there is no answer."""
        return {
            "samples": self.samples,
            "more": self.more,
            "percents": list(PERCENTS),
            "few": listed(self.few),
            "many": listed(self.many),
        }


def convergence(
    scenario: Scenario,
    readouts: Sequence[str],
    samples: int = USUAL_SAMPLES,
    seed: int = USUAL_SEED,
    season: str | None = None,
    overrides: Mapping[str, ArrayLike] = MappingProxyType({}),
    watch: Watch = UNWATCHED,
) -> dict[str, Convergence]:
    """Readouts at the operating point from ``samples``, rounded up to a power of two as in a study of
    tolerances, and from ten times as many or more.

    Raises ScenarioError for what cannot be asked, Stopped when asked to.
    """
    for key in readouts:
        if key not in READOUTS:
            raise ScenarioError("readouts", unknown(key, "a readout", READOUTS))
    spread = spread_of(scenario, season)
    if not len(spread):
        raise ScenarioError("tolerances", NOTHING_OFF)
    around = {address: np.asarray(value, float) for address, value in overrides.items()}
    few = 1 << max(0, samples - 1).bit_length()
    parts = chances(len(spread), MORE * few, seed)
    more, step = parts.shape[1], max(1, batch(spread.plan))
    values: dict[str, list[np.ndarray]] = {key: [] for key in readouts}
    for start in range(0, more, step):
        watch.done(start / more)
        some = parts[:, start : start + step]
        outcome = follow(spread.plan, spread.sampled(some, around))
        for key, kept in values.items():
            kept.append(np.broadcast_to(outcome.readout(key), some.shape[1:]))
    watch.done(1.0)
    whole = {key: np.concatenate(kept) for key, kept in values.items()}
    return {
        key: Convergence(key, few, more, _percentiles(all_of_it[:few]), _percentiles(all_of_it))
        for key, all_of_it in whole.items()
    }


def _percentiles(values: np.ndarray) -> np.ndarray:
    answered = values[np.isfinite(values)]
    return np.percentile(answered, PERCENTS) if answered.size else np.full(len(PERCENTS), np.nan)
