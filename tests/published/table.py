"""The engine beside the publications: ``python -m tests.published.table [--all | --write]``.

Prints a Markdown table, a section a topic: for each case the point that differs most for its tolerance, or
with ``--all`` every printed figure. The engine's figures come from the functions that the tests use.
``--write`` brings the table of the package, which Basis and report show, and its summary in the README up to
date.
"""

import argparse
from collections.abc import Iterator
from dataclasses import astuple, fields
from pathlib import Path

import numpy as np

from explorer.studies.outside_checks import FILE, OutsideCheck

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


ROOT = Path(__file__).parents[2]
PACKAGED, README = ROOT / "explorer" / "studies" / FILE, ROOT / "README.md"
BEGIN, END = "<!-- outside checks, written by python -m tests.published.table --write -->", "<!-- end -->"


def title(topic: str) -> str:
    """A topic as a heading."""
    return topic.replace("_", " ").capitalize().replace("Ph ", "pH ")


def worst(case: Case) -> tuple[tuple[int, ...], str]:
    """Index and wording of the point that differs most for its tolerance."""
    off = difference(case.id)
    return max(case.points(), key=lambda point: abs(off[point[0]]) / case.tolerance[point[0]])


def two_figures(value: float, sign: str = "") -> str:
    """A number to two figures, whole ones as such."""
    return f"{value:{sign}.0f}" if abs(value) >= 10 else f"{value:{sign}.2g}"


def check_of(case: Case) -> OutsideCheck:
    """The line of a case in the table of the package."""
    index, where = worst(case)
    memory = "" if case.confidence == "seen" or case.source == "common practice" else " (from memory)"
    return OutsideCheck(
        topic=title(case.topic), case=case.what, unit=case.unit,
        figures=str(np.isfinite(case.printed).sum()), conditions=where,
        printed=f"{case.printed[index]:.6g}", engine=f"{engine(case.id)[index]:.5g}",
        difference=two_figures(difference(case.id)[index], "+"), tolerance=two_figures(case.tolerance[index]),
        parts="" if case.parting is None else two_figures(case.parting[index]),
        reason=case.reason, source=case.source + memory, note=case.note,
    )  # fmt: skip


def packaged() -> str:
    """Text of the table of the package."""
    lines = [[field.name for field in fields(OutsideCheck)], *(astuple(check_of(c)) for c in CASES.values())]
    return "".join("\t".join(line) + "\n" for line in lines)


def summary(text: str) -> str:
    """The table of the README from the table of the package: the worst case of each topic, and what parts."""
    checks = [OutsideCheck(*line.split("\t")) for line in text.splitlines()[1:]]
    shown = ["| topic | figures | largest difference for its tolerance | printed | engine | allowed |"]
    shown.append("|---|---:|---|---:|---:|---:|")
    for topic in dict.fromkeys(check.topic for check in checks):
        found = [check for check in checks if check.topic == topic]
        agreeing = [check for check in found if not check.parts]
        most = max(agreeing, key=lambda check: abs(float(check.difference)) / float(check.tolerance))
        unit = f" {most.unit}" if most.unit not in ("", "pH") else ""
        case = f"{most.case}, {most.conditions}" if most.conditions else most.case
        figures, allowed = sum(int(check.figures) for check in found), f"± {most.tolerance}{unit}"
        shown.append(f"| {topic} | {figures} | {case} | {most.printed} | {most.engine} | {allowed} |")
    shown.append("\nKnown to part, each with its reason:\n")
    shown += [
        f"* {one.case}: {one.difference} {one.unit}".rstrip() + f"; {one.note}" for one in checks if one.parts
    ]
    return "\n".join(shown)


def readme(text: str, table: str) -> str:
    """The README with the summary of a table of the package between its marks."""
    before, _, rest = text.partition(BEGIN)
    _, _, after = rest.partition(END)
    return f"{before}{BEGIN}\n\n{summary(table)}\n\n{END}{after}"


def rows(case: Case, every: bool = False) -> Iterator[str]:
    """Lines of the table: every point of a case, or the one that differs most for its tolerance."""
    figures, off = engine(case.id), difference(case.id)
    points = list(case.points()) if every else [worst(case)]
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
        yield f"\n## {title(topic)}"
        yield HEAD
        for case in cases:
            yield from rows(case, every)
        for case in cases:
            if case.parting is not None:
                most = np.nanmax(np.abs(difference(case.id)))
                yield f"\n{case.what} parts by up to {most:.2g}: {case.note}."


def write() -> None:
    """Bring the table of the package and the README up to date."""
    table = packaged()
    PACKAGED.write_text(table, encoding="utf-8")
    README.write_text(readme(README.read_text(encoding="utf-8"), table), encoding="utf-8")


if __name__ == "__main__":
    parser = argparse.ArgumentParser(prog="python -m tests.published.table", description=__doc__)
    what = parser.add_mutually_exclusive_group()
    what.add_argument("--all", action="store_true", help="every printed figure")
    what.add_argument("--write", action="store_true", help="write the table of the package and the README's")
    options = parser.parse_args()
    if options.write:
        write()
    else:
        print("\n".join(lines(options.all)).strip())
