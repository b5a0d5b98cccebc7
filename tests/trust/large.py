"""Files that are too much: each is refused in words, soon, and without filling the memory."""

import json
from collections.abc import Callable
from copy import deepcopy
from typing import Any

from explorer.scenario.shipped import default_scenario_path

PLANT: dict[str, Any] = json.loads(default_scenario_path().read_text(encoding="utf-8"))
WATER: dict[str, Any] = PLANT["waters"][0]
SEASONS: list[str] = PLANT["seasons"]
ENTRY = {"value": 1, "unit": "mg/L"}
WARMER = {"step": "temperature", "temperature": {"value": 5, "unit": "°C"}}


def plant(**parts: Any) -> str:
    """A shipped scenario with some parts exchanged."""
    return json.dumps(PLANT | parts, ensure_ascii=False)


def water(**parts: Any) -> str:
    """The same with the first water changed."""
    return plant(waters=[WATER | parts, *PLANT["waters"][1:]])


def points(number: int) -> str:
    """A set of so many measured points."""
    return plant(measured=[{"name": "a", "dial": "flow", "readout": "ph", "points": [[1, 2]] * number}])


def aside(levels: int, width: int, mark: str = "s") -> list[dict[str, Any]]:
    """Side streams in each other, ``width`` steps in each."""
    ids = [f"{mark}{n}" for n in range(width)]
    if not levels:
        return [{"id": one, **WARMER} for one in ids]
    inner = {one: aside(levels - 1, width, f"{one}_") for one in ids}
    return [{"id": one, "step": "side_stream", "fraction": 50, "train": inner[one]} for one in ids]


TOO_LARGE, TOO_MANY = "the file is too large; allowed 5 MB", "the file has "

TOO_MUCH: dict[str, tuple[Callable[[], str], str]] = {
    "50 MB of spaces": (lambda: " " * 50_000_000, TOO_LARGE),
    "50 MB of numbers": (lambda: "[" + "1," * 25_000_000 + "1]", TOO_LARGE),
    "50 MB of text": (lambda: plant(note="x" * 50_000_000), TOO_LARGE),
    "5 MB of empty lists": (lambda: "[" + "[]," * 1_600_000 + "[]]", TOO_MANY),
    "5 MB of empty objects": (lambda: "[" + "{}," * 1_600_000 + "{}]", TOO_MANY),
    "5 MB of brackets": (lambda: "[" * 4_900_000, TOO_MANY),
    "5 MB of tags": (lambda: "<script " * 600_000, "the file is a page without a scenario"),
    "5 MB of digits": (lambda: '{"a": ' + "9" * 4_900_000 + "}", "format: missing"),
    "5 MB of decimals": (lambda: '{"a": 0.' + "1" * 4_900_000 + "}", "format: missing"),
    "5 MB of keys": (lambda: json.dumps(dict.fromkeys(map(str, range(350_000)), 1)), "format: missing"),
    "480,000 keys, the first again": (
        lambda: "{" + ",".join(f'"{n:x}":1' for n in range(480_000)) + ',"0":1}',
        "0: this key stands twice",
    ),
    "nesting of 100,000": (lambda: '{"a": ' * 100_000 + "1" + "}" * 100_000, TOO_MANY),
    "nesting of 40,000": (lambda: '{"a": ' * 40_000 + "1" + "}" * 40_000, "the file has too many objects in"),
    "a title of 4 MB": (lambda: plant(title="x" * 4_000_000), "title: 4000000 characters are too many"),
    "a unit of 1,500,000 signs": (
        lambda: plant(flow={"value": 1, "unit": "ﷺ" * 1_500_000}), 'flow.unit: "ﷺ',
    ),
    "a key of 4 MB": (lambda: plant(**{"x" * 4_000_000: 1}), "xxxxx"),
    "an id of 4 MB": (lambda: water(id="x" * 4_000_000), "waters[0].id: "),
    "1,000,000 pKa": (
        lambda: plant(acids=[{"id": "q", "molar_mass": 60, "pka": [1] * 1_000_000}]),
        "acids[0].pka: the list has 1000000 parts",
    ),
    "1,000,000 seasons": (lambda: plant(seasons=["s"] * 900_000), "seasons: the list has 900000 parts"),
    "2,000 analyses": (
        lambda: water(analyses={f"s{n}": WATER["analyses"][SEASONS[0]] for n in range(2_000)}),
        "waters[0].analyses: 2000 parts are too many; allowed 12",
    ),
    "500,000 measured points": (lambda: points(500_000), TOO_MANY),
    "100,000 measured points": (lambda: points(100_000), "measured[0].points: the list has 100000 parts"),
    "a sweep of 1,000,000,000 points": (
        lambda: plant(sweep=PLANT["sweep"] | {"points": 1_000_000_000}),
        "sweep.points: 1000000000 is out of range",
    ),
    "100,000 tolerances": (
        lambda: plant(tolerances={f"a{n}": {"plus_minus": 1} for n in range(100_000)}), TOO_MANY,
    ),
    "10,000 tolerances": (
        lambda: plant(tolerances={f"a{n}": {"plus_minus": 1} for n in range(10_000)}),
        "tolerances: 10000 parts are too many; allowed 500",
    ),
    "10,000 held dials": (
        lambda: plant(holds={f"a{n}": {"readout": "ph", "value": 8} for n in range(10_000)}),
        "holds: 10000 parts are too many",
    ),
    "10,000 entries of an analysis": (
        lambda: water(analyses={SEASONS[0]: {f"a{n}": ENTRY for n in range(10_000)}}),
        f"waters[0].analyses.{SEASONS[0]}: 10000 parts are too many",
    ),
    "100,000 components of a chemical": (
        lambda: plant(chemicals=[{"id": "q", "adds": {f"a{n}": 1 for n in range(100_000)}}]),
        "chemicals[0].adds: 100000 parts are too many",
    ),
    "1,500 waters": (
        lambda: plant(waters=[WATER | {"id": f"w{n}", "train": []} for n in range(1_500)]),
        "waters: the list has 1500 parts",
    ),
    "10,000 targets": (
        lambda: plant(targets=[{"readout": "ph", "low": 1}] * 10_000), "targets: the list has 10000 parts",
    ),
    "1,000 steps in side streams": (
        lambda: plant(train=aside(2, 10), tolerances={}, sweep=None, holds={}),
        "train: there are 1110 steps in all trains together; allowed 200",
    ),
    "500 options": (
        lambda: plant(options=[{"name": f"o{n}", "scenario": deepcopy(PLANT)} for n in range(500)]),
        "options: the list has 500 parts",
    ),
}  # fmt: skip
"""By name: how the text is made, and how the sentence starts with which it is refused."""


def full_plant() -> str:
    """About as large as a scenario can be: 50 waters, 12 seasons, 200 steps, 10 options."""
    seasons = [f"season {n}" for n in range(12)]
    analysis = WATER["analyses"][SEASONS[0]]
    one = WATER | {"share": 2, "train": [], "analyses": dict.fromkeys(seasons, analysis)}
    waters = [one | {"id": f"w{n}", "name": f"Water {n}"} for n in range(50)]
    train = [{"id": f"t{n}", "step": "side_stream", "fraction": 50, "train": []} for n in range(4)]
    for n, step in enumerate(train):
        step["train"] = [{"id": f"t{n}_{m}", **WARMER} for m in range(48)]
    small = {key: part for key, part in PLANT.items() if key != "options"}
    options = [{"name": f"option {n}", "scenario": small} for n in range(10)]
    return plant(seasons=seasons, season=seasons[0], waters=waters, train=train, options=options,
                 tolerances={}, holds={}, sweep=None, balance_water=None, measured=[])  # fmt: skip
