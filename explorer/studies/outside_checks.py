"""The engine beside the publications: figures that played no part in building it, one line a case.

The lines are in ``outside_checks.tsv`` beside this module, written by the specifications that compute them
(``python -m tests.published.table --write``) and held by them to what the engine says.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from importlib.resources import files

from explorer.scenario.words import MINUS

FILE = "outside_checks.tsv"


@dataclass(frozen=True)
class OutsideCheck:
    """One published case at the point that differs most for its tolerance.

    ``figures``: how many figures it has in all. ``printed``, ``engine``, ``difference``, ``tolerance``: in
    ``unit``, as text. ``parts``: by how much engine and publication are known to part, "" where they agree;
    ``note`` says why. ``source`` ends with "from memory" where the figure was not seen.
    """

    topic: str
    case: str
    unit: str
    figures: str
    conditions: str
    printed: str
    engine: str
    difference: str
    tolerance: str
    parts: str
    reason: str
    source: str
    note: str

    @property
    def numbers(self) -> list[str]:
        """Printed, engine, difference and tolerance as people write them."""
        written = (self.printed, self.engine, self.difference, f"± {self.tolerance}")
        return [text.replace("-", MINUS) for text in written]

    @property
    def about(self) -> str:
        """The conditions, and the number of figures where there are several."""
        several = f"worst of {self.figures}" if self.figures != "1" else ""
        return "; ".join(filter(None, (self.conditions, several)))

    @property
    def why(self) -> str:
        """The reason of the tolerance, and of parting where the two part."""
        return f"parts: {self.note}" if self.parts else self.reason


@cache
def outside_checks() -> tuple[OutsideCheck, ...]:
    """Every case, topic by topic."""
    lines = files("explorer.studies").joinpath(FILE).read_text(encoding="utf-8").splitlines()
    return tuple(OutsideCheck(*line.split("\t")) for line in lines[1:])


def by_topic() -> Iterator[tuple[str, list[OutsideCheck]]]:
    """Topics with their cases."""
    for topic in dict.fromkeys(one.topic for one in outside_checks()):
        yield topic, [one for one in outside_checks() if one.topic == topic]
