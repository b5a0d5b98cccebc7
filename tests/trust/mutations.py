"""Hostile files through the two doors of the program: ``python -m tests.trust.mutations [N]``.

Every mutant goes through ``blendwright check`` and through the Open of the page. It must be taken, and then
be evaluated without an exception or a warning and written again as it was read; or be refused in one clear
sentence, and then everything stays as it was. Prints how many were taken and refused by kind, the slowest and
the memory.
"""

import argparse
import contextlib
import io
import json
import logging
import resource
import sys
import tempfile
import time
import warnings
from collections import Counter, defaultdict
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np

from explorer import cli
from explorer.app.files import FileDesk
from explorer.app.state import Session
from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import LARGEST_FILE, dumps, open_scenario, read_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import READOUTS
from explorer.scenario.shipped import default_scenario_path, shipped
from explorer.studies.sweep import sweep

from .hostile import KINDS, Mutant, mutant

LONGEST = 300
"""Characters of a sentence that a user still reads."""

MACHINE_WORDS = (
    "<class", "Traceback", "object at 0x", "NoneType", "numpy", "np.", "dtype", "Error(",
    "Exception", "explorer.", "dict_", "list index", "not subscriptable", "unhashable", "KeyError",
    "could not be calculated",
)  # fmt: skip
"""Words that only a program says to a programmer."""

TAKEN, NO_ANSWER, REFUSED = "taken", "no answer", "refused"
"""A scenario; a scenario with an analysis that contradicts itself, said in a sentence; no scenario."""

SAVED = Path(__file__).parents[1] / "scenario" / "saved"


class Defect(AssertionError):
    """A file to which the program has the wrong answer."""


def sources() -> list[Any]:
    """The scenarios that are shipped and those that use everything the format has, parsed."""
    paths = [*shipped().values(), *sorted(SAVED.glob("*.json"))]
    return [json.loads(path.read_text(encoding="utf-8")) for path in paths]


def clear_sentence(told: str) -> str:
    """What keeps ``told`` from being one clear sentence, "" where nothing does."""
    if not told or not told.isprintable():
        return "empty, several lines or hidden characters"
    if len(told) > LONGEST:
        return f"{len(told)} characters"
    return next((f"says {word}" for word in MACHINE_WORDS if word in told), "")


def check(content: bytes, folder: Path) -> tuple[int, str]:
    """Exit status of ``blendwright check`` for a file, and its sentence where it refuses."""
    path = folder / "hostile.json"
    path.write_bytes(content)
    out, err = io.StringIO(), io.StringIO()
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
        status = cli.main(["check", str(path)])
    told = err.getvalue()
    if status == 0:
        return status, told
    if out.getvalue() or told.count("\n") != 1:
        raise Defect(f"check printed {out.getvalue()!r} and {told!r}")
    return status, told.removesuffix("\n").removeprefix(f"{path}: ")


class Desk:
    """The Open of a page with a scenario on it."""

    def __init__(self) -> None:
        self.session = Session(open_scenario(default_scenario_path()))
        self.session.solve_now()
        self.files = FileDesk(self.session)
        self._known = self.state()

    def state(self) -> tuple[Any, ...]:
        """Everything that a refused file must leave alone."""
        session = self.session
        steps = len(session.work.past), len(session.work.future), session.unsaved, session.structure
        return dumps(session.scenario), session.file_name, *steps, id(session.point), id(session.swept)

    def open(self, content: bytes) -> str:
        """Why a file is refused, or "". Raises Defect where that is not all that happens."""
        refused = self.files.open_bytes(content, "hostile.json")
        before, self._known = self._known, self.state()
        if refused and self._known != before:
            raise Defect("a refused file changed the session")
        if refused and self.session.message != refused:
            raise Defect("the page does not say why a file is refused")
        return refused.removeprefix("hostile.json was not opened: ")


def evaluated(scenario: Scenario) -> str:
    """Why a scenario has no answer, "" where it has one. Raises what an evaluation must not raise."""
    try:
        outcome = evaluate(scenario)
    except ScenarioError as error:
        return str(error)
    for key in READOUTS:
        value = outcome.readout(key)
        if np.isinf(value) or (np.isnan(value) and not str(outcome.reasons(readout=key))):
            raise Defect(f"{key} is {value} without a reason")
    _ = outcome.notes, outcome.held, outcome.targets()
    sweep(scenario, points=3).outcome.readout("ph")
    return ""


def judged(content: bytes, desk: Desk, folder: Path) -> tuple[str, str]:
    """What becomes of a file, and the sentence. Raises Defect where that is not as it must be."""
    status, told = check(content, folder)
    if fault := told and clear_sentence(told):
        raise Defect(f"{fault}: {told}")
    if refused := desk.open(content):
        # the page refuses what is too large before it arrives, in its own words
        agree = " ".join(refused.split()) == told or len(content) > LARGEST_FILE
        if status != cli.USER_ERROR or not agree or clear_sentence(refused):
            raise Defect(f"check says {told!r}, the page {refused!r}")
        return REFUSED, refused
    scenario = desk.session.scenario
    text = dumps(scenario)
    again = read_scenario(text)
    if dumps(again) != text or again.to_dict() != scenario.to_dict():
        raise Defect("it is not written as it was read")
    missing = evaluated(scenario)
    # check looks at every season, the page at the one it shows
    if desk.session.message != missing or (missing and not status):
        raise Defect(f"check says {told!r}, the page {desk.session.message!r}, the evaluation {missing!r}")
    return (NO_ANSWER if status else TAKEN), told


@dataclass
class Tally:
    """What became of many files."""

    outcomes: dict[str, Counter[str]] = field(default_factory=lambda: defaultdict(Counter))
    seconds: list[tuple[float, int]] = field(default_factory=list)
    growth: list[tuple[float, int]] = field(default_factory=list)
    longest: tuple[int, str] = (0, "")
    defects: list[str] = field(default_factory=list)


def tried(mutants: Iterable[Mutant], progress: bool = False) -> Tally:
    """All mutants through both doors, with warnings as errors."""
    tally, desk = Tally(), Desk()
    logging.disable(logging.CRITICAL)
    try:
        with tempfile.TemporaryDirectory() as name, warnings.catch_warnings():
            warnings.simplefilter("error")
            for position, one in enumerate(mutants):
                began, before = time.perf_counter(), peak_memory()
                try:
                    what, told = judged(one.content, desk, Path(name))
                    tally.outcomes[one.kind][what] += 1
                    tally.longest = max(tally.longest, (len(told), told))
                except Exception as error:  # whatever it is, it is what is looked for
                    tally.outcomes[one.kind]["defect"] += 1
                    tally.defects.append(f"seed {one.seed} ({one.kind}): {type(error).__name__}: {error}")
                    if progress:
                        print(tally.defects[-1], file=sys.stderr, flush=True)
                    desk = Desk()
                tally.seconds.append((time.perf_counter() - began, one.seed))
                tally.growth.append((peak_memory() - before, one.seed))
                if progress and position % 1000 == 999:
                    print(f"{position + 1} files, {len(tally.defects)} defects", file=sys.stderr, flush=True)
    finally:
        logging.disable(logging.NOTSET)
    return tally


def peak_memory() -> float:
    """MB that the process has taken at most so far."""
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024


def mutants(count: int, first: int = 0) -> Iterator[Mutant]:
    """``count`` mutants with consecutive seeds."""
    found = sources()
    return (mutant(found, seed) for seed in range(first, first + count))


def report(tally: Tally) -> Iterator[str]:
    """The table."""
    columns = (TAKEN, NO_ANSWER, REFUSED, "defect")
    yield f"{'kind of change':<16}" + "".join(f"{column:>11}" for column in columns)
    total: Counter[str] = Counter()
    for kind in KINDS:
        found = tally.outcomes[kind]
        total += found
        yield f"{kind:<16}" + "".join(f"{found[column]:>11}" for column in columns)
    yield f"{'all':<16}" + "".join(f"{total[column]:>11}" for column in columns)
    yield ""
    seconds = np.array([second for second, _ in tally.seconds])
    slowest, seed = max(tally.seconds)
    yield f"median {np.median(seconds) * 1000:.0f} ms, 99 % within {np.quantile(seconds, 0.99) * 1000:.0f} ms"
    yield f"slowest {slowest * 1000:.0f} ms (seed {seed})"
    growth, seed = max(tally.growth)
    yield f"peak memory of the process {peak_memory():.0f} MB"
    yield f"most that a file added to it {growth:.0f} MB (seed {seed})"
    yield f"longest sentence {tally.longest[0]} characters: {tally.longest[1]}"
    yield from tally.defects[:40]


if __name__ == "__main__":
    parser = argparse.ArgumentParser(prog="python -m tests.trust.mutations", description=__doc__)
    parser.add_argument("number", type=int, nargs="?", default=20_000)
    parser.add_argument("--seed", type=int, default=0, help="seed of the first file")
    options = parser.parse_args()
    tally = tried(mutants(options.number, options.seed), progress=True)
    print("\n".join(report(tally)))
    sys.exit(bool(tally.defects))
