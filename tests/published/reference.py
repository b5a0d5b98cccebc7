"""Published figures, read from the files beside this module, and the engine's figures for the same cases.

A case is one table or statement of a publication: its citation, the conditions, the printed figures and the
tolerance with its reason. A function marked ``@figure(id)`` computes the engine's figures for it; the tests
and the comparison table both ask that one function.

Fields of a case in ``cases/*.json``: ``id``; ``what`` and ``unit`` of the figures; ``source``; ``confidence``
("seen": the figure was read in the publication or a copy of it; "from memory"); ``given``: fixed conditions;
``along``: conditions that vary, each an axis of ``printed``, first axis first; ``printed``: figures, null
where the publication has none; ``within``: absolute tolerance and/or ``within_percent`` of the printed
figure, the wider one counting; ``reason`` for the tolerance; ``note``: what to know. Where model and
publication are known to part, ``parts_within`` or ``parts_within_percent`` bounds by how much, and the note
says why.
"""

import json
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

FOLDER = Path(__file__).parent / "cases"


@dataclass(frozen=True, eq=False)
class Case:
    """Figures of one publication; the arrays have one axis for each entry of ``along``.

    ``parting``: by how much engine and publication are known to part, None where they agree."""

    id: str
    topic: str
    what: str
    unit: str
    source: str
    confidence: str
    reason: str
    note: str
    given: dict[str, Any]
    along: dict[str, list[Any]]
    printed: NDArray
    tolerance: NDArray
    parting: NDArray | None

    def __getitem__(self, condition: str) -> Any:
        """A fixed condition as it stands, or a varying one as an array that broadcasts along its axis."""
        if condition in self.given:
            return self.given[condition]
        axis = list(self.along).index(condition)
        return np.reshape(np.array(self.along[condition]), (-1,) + (1,) * (len(self.along) - axis - 1))

    def points(self) -> Iterator[tuple[tuple[int, ...], str]]:
        """Index and wording of every point that has a printed figure."""
        for index in np.ndindex(self.printed.shape):
            if np.isfinite(self.printed[index]):
                at = zip(self.along.items(), index, strict=True)
                yield index, ", ".join(_wording(name, values[i]) for (name, values), i in at)


def _wording(condition: str, value: str | float) -> str:
    if isinstance(value, str):
        return value.replace("_", " ")
    return f"{value} °C" if condition == "temperature" else f"{condition.replace('_', ' ')} {value}"


def _case(topic: str, entry: dict[str, Any]) -> Case:
    printed = np.array(entry["printed"], dtype=float)
    along = entry.get("along", {})
    if printed.shape != tuple(len(values) for values in along.values()):
        raise ValueError(f"{entry['id']}: printed figures of shape {printed.shape} do not fit {list(along)}")
    words = {name: entry[name] for name in ("id", "what", "unit", "source", "confidence", "reason")}
    return Case(
        **words, topic=topic, note=entry.get("note", ""), given=entry.get("given", {}), along=along,
        printed=printed, tolerance=_bound(entry, "within", printed),
        parting=_bound(entry, "parts_within", printed) if entry.keys() & PARTING else None,
    )  # fmt: skip


PARTING = {"parts_within", "parts_within_percent"}


def _bound(entry: dict[str, Any], name: str, printed: NDArray) -> NDArray:
    """The wider of an absolute bound and one in percent of the printed figures."""
    share = np.abs(printed) * np.array(entry.get(f"{name}_percent", 0.0)) / 100.0
    return np.maximum(np.broadcast_to(np.array(entry.get(name, 0.0)), printed.shape), share)


def _read() -> dict[str, Case]:
    cases: dict[str, Case] = {}
    for path in sorted(FOLDER.glob("*.json")):
        for entry in json.loads(path.read_text(encoding="utf-8")):
            if entry["id"] in cases:
                raise ValueError(f"{path.name}: {entry['id']} is there twice")
            cases[entry["id"]] = _case(path.stem, entry)
    return cases


CASES: dict[str, Case] = _read()
"""Every case by id, topic by topic."""

_FIGURES: dict[str, Callable[[Case], ArrayLike]] = {}


def figure(*ids: str) -> Callable[[Callable[[Case], ArrayLike]], Callable[[Case], ArrayLike]]:
    """Mark a function of a case as the one that computes the engine's figures for these cases."""

    def register(function: Callable[[Case], ArrayLike]) -> Callable[[Case], ArrayLike]:
        for case_id in ids:
            if case_id in _FIGURES or case_id not in CASES:
                raise ValueError(f"{case_id}: no such case, or a second function for it")
            _FIGURES[case_id] = function
        return function

    return register


def without_figure() -> list[str]:
    """Ids of cases that no function computes."""
    return [case_id for case_id in CASES if case_id not in _FIGURES]


@cache
def engine(case_id: str) -> NDArray:
    """The engine's figures, in the shape and unit of the printed ones; nan where nothing is printed."""
    case = CASES[case_id]
    figures = np.broadcast_to(np.asarray(_FIGURES[case_id](case), dtype=float), case.printed.shape)
    return np.where(np.isfinite(case.printed), figures, np.nan)


def difference(case_id: str) -> NDArray:
    """Engine minus publication."""
    return engine(case_id) - CASES[case_id].printed


def _outside(case_id: str, bound: NDArray) -> list[str]:
    """Points that differ by more than a bound, in words."""
    case, figures = CASES[case_id], engine(case_id)
    return [
        f"{where or case.what}: printed {case.printed[index]:.6g}, engine {figures[index]:.6g} {case.unit},"
        f" allowed {bound[index]:.3g}"
        for index, where in case.points()
        if not abs(figures[index] - case.printed[index]) <= bound[index]
    ]


def assert_agreement(case_id: str) -> None:
    """Fail, listing the points, unless every printed figure is met within the tolerance of its case."""
    case = CASES[case_id]
    outside = _outside(case_id, case.tolerance)
    assert not outside, f"{case_id} ({case.source}):\n" + "\n".join(outside)


def assert_parting(case_id: str) -> None:
    """Fail unless engine and publication part as the case says: beyond its tolerance, within its bound."""
    case = CASES[case_id]
    assert case.parting is not None, f"{case_id} is not known to part"
    outside = _outside(case_id, case.parting)
    assert not outside, f"{case_id} ({case.source}):\n" + "\n".join(outside)
    assert _outside(case_id, case.tolerance), f"{case_id} agrees: it need no longer be listed as parting"
