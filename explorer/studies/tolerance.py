"""Tolerance: how far the results spread when everything that may be off is off by chance.

The chances are a scrambled Sobol sequence with a seed: quasi-random numbers, which settle far sooner than
random ones. The same seed gives the same digits.
"""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import ArrayLike
from scipy.stats import qmc

from explorer.scenario.dials import Dial
from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.evaluate import Outcome, follow
from explorer.scenario.model import Scenario, Target
from explorer.scenario.readouts import READOUTS
from explorer.studies.progress import UNWATCHED, Watch, batch
from explorer.studies.spread import NOTHING_OFF, Input, spread_of
from explorer.studies.sweep import headed, listed, swept_dial

FIRST_SAMPLES, USUAL_SAMPLES, MOST_SAMPLES = 64, 2048, 65_536
"""Samples of the first picture, of the last one if nothing else is asked, and at most."""

MOST_CELLS = 10_000_000
"""Outcomes that are kept of a readout: 80 MB."""

GROWTH = 4
"""Factor between the numbers of samples of one picture and the next."""

USUAL_SEED = 20

PERCENTS = (2.5, 25.0, 50.0, 75.0, 97.5)
"""Percentiles of a fan: the middle half and 95 % of all outcomes."""


@dataclass(frozen=True)
class Results:
    """Outcomes at columns (of a sweep, or the operating point alone).

    ``values``: by readout, (samples, columns), nan where there is no answer. ``met``: (targets, samples,
    columns); an outcome without an answer meets nothing. ``nominal``: by readout with nothing off,
    (columns,).
    """

    values: Mapping[str, np.ndarray]
    met: np.ndarray
    nominal: Mapping[str, np.ndarray]

    def percentiles(self, key: str, percents: Sequence[float] = PERCENTS) -> np.ndarray:
        """Percentiles of a readout among the outcomes that have an answer, (percents, columns)."""
        values = self.values[key]
        answered = np.isfinite(values).any(axis=0)
        found = np.full((len(percents), values.shape[1]), np.nan)
        found[:, answered] = np.nanpercentile(values[:, answered], percents, axis=0)
        return found

    def chance(self, target: int) -> np.ndarray:
        """Part of the outcomes (0 to 1) that meet the target at this position, (columns,)."""
        return self.met[target].mean(axis=0)

    def chance_of_all(self) -> np.ndarray:
        """Part of the outcomes (0 to 1) that meet every target, (columns,)."""
        return self.met.all(axis=0).mean(axis=0)

    def answered(self, key: str) -> np.ndarray:
        """Part of the outcomes (0 to 1) that have the readout, (columns,)."""
        return np.isfinite(self.values[key]).mean(axis=0)


@dataclass(frozen=True)
class ToleranceStudy:
    """The spread along a dial (``fan``, over ``x``) and at the operating point (``here``, one column), both
    from the same ``samples`` of the ``inputs``. ``final``: no finer picture follows."""

    x: np.ndarray
    dial: Dial
    fan: Results
    here: Results
    inputs: tuple[Input, ...]
    targets: tuple[Target, ...]
    samples: int
    seed: int
    final: bool

    def histogram(self, key: str, bins: int = 40) -> tuple[np.ndarray, np.ndarray]:
        """Outcomes at the operating point by size: counts (bins,) and edges (bins + 1,)."""
        values = self.here.values[key][:, 0]
        return np.histogram(values[np.isfinite(values)], bins)

    def to_dict(self) -> dict[str, Any]:
        """Plain lists by name; None where there is no answer."""
        return {
            "dial": self.dial.address,
            "unit": self.dial.unit,
            "x": self.x.tolist(),
            "samples": self.samples,
            "seed": self.seed,
            "inputs": [{"name": part.name, "label": part.label} for part in self.inputs],
            "percents": list(PERCENTS),
            "fan": {key: [listed(row) for row in self.fan.percentiles(key)] for key in self.fan.values},
            "here": {
                key: {
                    "nominal": listed(self.here.nominal[key])[0],
                    "percentiles": listed(self.here.percentiles(key)[:, 0]),
                }
                for key in self.here.values
            },
            "targets": [
                {
                    "readout": target.readout,
                    "low": target.low,
                    "high": target.high,
                    "chance": float(self.here.chance(position)[0]),
                    "chance_along": self.fan.chance(position).tolist(),
                }
                for position, target in enumerate(self.targets)
            ],
            "chance_of_all": float(self.here.chance_of_all()[0]),
            "chance_of_all_along": self.fan.chance_of_all().tolist(),
        }

    def table(self) -> list[list[Any]]:
        """Rows for a spreadsheet, the heading first: dial, nominal value and percentiles of every readout,
        and the chances in percent of meeting the targets."""
        columns = [[headed(self.dial.label, self.dial.unit), *self.x.tolist()]]
        for readout in (READOUTS[key] for key in self.fan.values):
            columns.append([headed(readout.label, readout.unit), *listed(self.fan.nominal[readout.key])])
            for percent, row in zip(PERCENTS, self.fan.percentiles(readout.key), strict=True):
                columns.append([f"{readout.short}, percentile {percent:g}", *listed(row)])
        for position, target in enumerate(self.targets):
            heading = f"Chance of meeting the target of {READOUTS[target.readout].short} [%]"
            columns.append([heading, *(100 * self.fan.chance(position)).tolist()])
        columns.append(["Chance of meeting all targets [%]", *(100 * self.fan.chance_of_all()).tolist()])
        return [list(row) for row in zip(*columns, strict=True)]


def tolerance(
    scenario: Scenario,
    dial: str | None = None,
    start: float | None = None,
    stop: float | None = None,
    points: int | None = None,
    readouts: Sequence[str] = (),
    season: str | None = None,
    overrides: Mapping[str, ArrayLike] = MappingProxyType({}),
    samples: int = USUAL_SAMPLES,
    seed: int = USUAL_SEED,
    watch: Watch = UNWATCHED,
) -> Iterator[ToleranceStudy]:
    """The spread of the targets' and other ``readouts`` along a dial and at the operating point.

    The dial and its values are chosen as for :func:`explorer.studies.sweep.sweep`. The first picture comes
    from 64 samples, then four times as many, up to ``samples`` (rounded up to a power of two), whose first
    ones they are. ``overrides``: other dials.

    Raises ScenarioError at once for what cannot be asked, and Stopped while a picture is made.
    """
    swept, x = swept_dial(scenario, dial, start, stop, points, season)
    spread = spread_of(scenario, season)
    targets = spread.plan.targets
    keys = tuple(dict.fromkeys([*(target.readout for target in targets), *readouts]))
    for key in readouts:
        if key not in READOUTS:
            raise ScenarioError("readouts", unknown(key, "a readout", READOUTS))
    if not len(spread):
        raise ScenarioError("tolerances", NOTHING_OFF)
    if not 1 <= samples <= MOST_SAMPLES:
        raise ScenarioError("samples", f"{samples} is out of range; allowed 1 to {MOST_SAMPLES}")
    others = {key: np.asarray(value, float) for key, value in overrides.items() if key != swept.address}
    if samples * (len(x) + 1) > MOST_CELLS:
        most = f"allowed {MOST_CELLS:,} together".replace(",", " ")
        raise ScenarioError("samples", f"{samples} of {len(x)} points are too many; {most}")
    # The operating point is the last column. A dial that is held there is turned by hand along the sweep, so
    # that the two are calculated apart.
    apart = swept.address not in overrides and any(g.address == swept.address for g in spread.plan.holds)
    here = np.asarray(overrides.get(swept.address, swept.value), float)
    around = [others | {swept.address: x if apart else np.append(x, here)}, *([others] if apart else [])]
    widths = [len(x), 1] if apart else [len(x) + 1]

    def pictures() -> Iterator[ToleranceStudy]:
        parts = chances(len(spread), samples, seed)
        columns = len(x) + 1
        nominal = _joined(
            [
                _kept(follow(spread.plan, place), keys, (width,))
                for place, width in zip(around, widths, strict=True)
            ]
        )
        parts_done: list[Results] = []
        done, wanted = 0, min(FIRST_SAMPLES, parts.shape[1])
        while True:
            while done < wanted:
                watch.done(done / parts.shape[1])
                some = parts[:, done : min(wanted, done + max(1, batch(spread.plan) // columns)), None]
                found = [
                    _kept(follow(spread.plan, spread.sampled(some, place)), keys, (some.shape[1], width))
                    for place, width in zip(around, widths, strict=True)
                ]
                parts_done.append(_joined(found))
                done += some.shape[1]
            values = {key: np.concatenate([part.values[key] for part in parts_done]) for key in keys}
            met = np.concatenate([part.met for part in parts_done], axis=1)
            fan, at_point = (
                Results(
                    {key: rows[:, part] for key, rows in values.items()},
                    met[..., part],
                    {key: row[part] for key, row in nominal.values.items()},
                )
                for part in (slice(0, -1), slice(-1, None))
            )
            final = done == parts.shape[1]
            watch.done(done / parts.shape[1])
            yield ToleranceStudy(x, swept, fan, at_point, spread.inputs, targets, done, seed, final)
            if final:
                return
            wanted = min(GROWTH * wanted, parts.shape[1])

    return pictures()


def chances(inputs: int, samples: int, seed: int) -> np.ndarray:
    """Quasi-random numbers from 0 to 1, (inputs, samples rounded up to a power of two).

    Scrambled Sobol sequence (Owen 1998, as in scipy.stats.qmc); any power of two from the start is itself a
    balanced sample.
    """
    exponent = max(0, int(np.ceil(np.log2(samples))))
    return np.ascontiguousarray(qmc.Sobol(inputs, rng=np.random.default_rng(seed)).random_base2(exponent).T)


def _joined(parts: Sequence[Results]) -> Results:
    """Columns beside each other."""
    if len(parts) == 1:
        return parts[0]
    values = {key: np.concatenate([part.values[key] for part in parts], axis=-1) for key in parts[0].values}
    return Results(values, np.concatenate([part.met for part in parts], axis=-1), {})


def _kept(outcome: Outcome, keys: Sequence[str], shape: tuple[int, ...]) -> Results:
    """What is kept of an outcome, spread to ``shape``."""
    met = [np.broadcast_to(met, shape) for _, _, met, _ in outcome.targets()]
    values = {key: np.broadcast_to(outcome.readout(key), shape) for key in keys}
    return Results(values, np.array(met, bool).reshape(len(met), *shape), {})
