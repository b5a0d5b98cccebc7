"""The engine beside the publications: ``python -m tests.published.table [--all]``.

Prints a Markdown table, a section a topic: for each case the point that differs most for its tolerance, or
with ``--all`` every printed figure. The engine's figures come from the functions that the tests use.
"""

import argparse
from collections.abc import Iterator

import numpy as np

from . import (  # noqa: F401  each registers its figures
    test_ammonia_chlorine,
    test_buffers,
    test_calcium_carbonate,
    test_conductivity,
    test_constants,
    test_ph_standards,
    test_treatment,
)
from .reference import CASES, Case, difference, engine

HEAD = """
| case | conditions | printed | engine | difference | tolerance | source |
|---|---|---:|---:|---:|---:|---|"""


def rows(case: Case, every: bool = False) -> Iterator[str]:
    """Lines of the table: every point of a case, or the one that differs most for its tolerance."""
    figures, off = engine(case.id), difference(case.id)
    points = list(case.points())
    if not every:
        points = [max(points, key=lambda point: abs(off[point[0]]) / case.tolerance[point[0]])]
    unit = f" [{case.unit}]" if case.unit not in ("", "pH") else ""
    source = case.source + (" (from memory)" if case.confidence != "seen" else "")
    for index, where in points:
        mark = " (parts)" if case.parting is not None else ""
        yield (
            f"| {case.what}{unit} | {where} | {case.printed[index]:.6g} | {figures[index]:.5g} |"
            f" {off[index]:+.2g} | {case.tolerance[index]:.2g}{mark} | {source} |"
        )


def lines(every: bool = False) -> Iterator[str]:
    """The whole document."""
    for topic in dict.fromkeys(case.topic for case in CASES.values()):
        cases = [case for case in CASES.values() if case.topic == topic]
        yield f"\n## {topic.replace('_', ' ').capitalize().replace('Ph ', 'pH ')}"
        yield HEAD
        for case in cases:
            yield from rows(case, every)
        for case in cases:
            if case.parting is not None:
                most = np.nanmax(np.abs(difference(case.id)))
                yield f"\n{case.what} parts by up to {most:.2g}: {case.note}."


if __name__ == "__main__":
    parser = argparse.ArgumentParser(prog="python -m tests.published.table", description=__doc__)
    parser.add_argument("--all", action="store_true", help="every printed figure")
    print("\n".join(lines(parser.parse_args().all)).strip())
