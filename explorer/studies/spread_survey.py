"""Everything about the spread of one readout, in the order in which a meeting wants it."""

from collections.abc import Iterator
from dataclasses import dataclass, replace

from explorer.scenario.model import Scenario
from explorer.studies.corners import Extreme, extremes, worst
from explorer.studies.progress import UNWATCHED, Watch
from explorer.studies.ranking import Ranking, ranking
from explorer.studies.tolerance import USUAL_SAMPLES, USUAL_SEED, ToleranceStudy, tolerance

POINTS = 61
"""Points of the fan along the sweep."""

FAN_PART, HERE_PART, RANKING_PART = 0.3, 0.4, 0.65
"""Part of the work that is done after the fan, the extremes at the operating point, and the ranking."""


@dataclass(frozen=True)
class Survey:
    """What is known so far: ``study`` from the start and ever finer, then the extremes at the operating point
    (``here``), the ``ranking`` of what may be off, and the extremes ``anywhere`` on the sweep in all seasons.
    """

    readout: str
    study: ToleranceStudy
    here: tuple[Extreme, Extreme] | None = None
    ranking: Ranking | None = None
    anywhere: tuple[Extreme, Extreme] | None = None

    @property
    def final(self) -> bool:
        """Whether nothing more follows."""
        return self.anywhere is not None


def survey(
    scenario: Scenario,
    readout: str,
    samples: int = USUAL_SAMPLES,
    seed: int = USUAL_SEED,
    watch: Watch = UNWATCHED,
) -> Iterator[Survey]:
    """The spread of a readout along the scenario's sweep and at its operating point, coarse first.

    Raises ScenarioError where nothing may be off or nothing has an answer, Stopped when asked to.
    """
    first = watch.within(0, FAN_PART)
    studies = tolerance(scenario, points=POINTS, readouts=[readout], samples=samples, seed=seed, watch=first)
    for study in studies:
        found = Survey(readout, study)
        yield found
    found = replace(found, here=extremes(scenario, readout, watch=watch.within(FAN_PART, HERE_PART)))
    yield found
    ranks = ranking(scenario, readout, seed=seed, watch=watch.within(HERE_PART, RANKING_PART))
    found = replace(found, ranking=ranks)
    yield found
    anywhere = worst(scenario, readout, watch=watch.within(RANKING_PART, 1))
    yield replace(found, anywhere=anywhere)
