"""Hostile scenario files: seeded changes of real ones, in structure, numbers, texts, references and bytes.

A mutant is made from a seed alone: ``mutant(sources, seed)`` always gives the same bytes. Every kind of
change is a function ``(random, tree) -> tree or bytes``; a tree is parsed JSON that may also hold ``Raw`` (a
literal as it stands) and ``Pairs`` (an object that may repeat a key).
"""

import json
from collections.abc import Callable, Iterator, Sequence
from copy import deepcopy
from dataclasses import dataclass
from random import Random
from typing import Any

from .oddities import ADDRESSES, HEADS, JUNK, NUMBERS, READOUTS, TEXTS, UNITS, WRAPS

Place = tuple[Any, Any]
"""A list or dict, and the position or key of one of its parts."""


@dataclass(frozen=True)
class Raw:
    """A JSON literal exactly as it is to stand in the file, sensible or not."""

    text: str


@dataclass(frozen=True)
class Pairs:
    """An object as a list of keys and values, so that a key can stand twice."""

    items: tuple[tuple[str, Any], ...]


@dataclass(frozen=True)
class Mutant:
    """A file that was made to give trouble, and how."""

    kind: str
    seed: int
    content: bytes


def text_of(tree: Any) -> str:
    """JSON text of a tree, escaping what is not ASCII (so that lone surrogates survive encoding)."""
    if isinstance(tree, Raw):
        return tree.text
    if isinstance(tree, Pairs):
        return "{" + ", ".join(f"{json.dumps(key)}: {text_of(part)}" for key, part in tree.items) + "}"
    if isinstance(tree, dict):
        return "{" + ", ".join(f"{json.dumps(key)}: {text_of(part)}" for key, part in tree.items()) + "}"
    if isinstance(tree, list):
        return "[" + ", ".join(map(text_of, tree)) + "]"
    return json.dumps(tree)


def places(tree: Any, wanted: type | tuple[type, ...] = object) -> Iterator[Place]:
    """Every place of a tree whose part is of the wanted type."""
    parts = tree.items() if isinstance(tree, dict) else enumerate(tree) if isinstance(tree, list) else ()
    for key, part in parts:
        if isinstance(part, wanted):
            yield tree, key
        yield from places(part, wanted)


def named(tree: Any, *names: str) -> list[Place]:
    """Places of a tree with one of these keys."""
    return [(owner, key) for owner, key in places(tree) if isinstance(owner, dict) and key in names]


# ---- what is put in ----------------------------------------------------------------------------------------


def number(random: Random) -> Raw:
    """A number that no sheet has, or no number at all."""
    return Raw(random.choice(NUMBERS))


def anything(random: Random) -> Any:
    """A part of any kind."""
    make = random.choice(
        (
            lambda: random.choice((None, True, False)),
            lambda: random.choice(([], {}, [[]])),
            lambda: {"value": 1, "unit": random.choice(UNITS)},
            lambda: random.choice(TEXTS),
            lambda: number(random),
            lambda: random.randint(-5, 200),
            lambda: random.uniform(-10, 100),
        )
    )
    return make()


# ---- kinds of change ---------------------------------------------------------------------------------------


def other_type(random: Random, tree: Any) -> Any:
    """A part replaced by one of another kind."""
    owner, key = random.choice(list(places(tree)))
    owner[key] = anything(random)
    return tree


def odd_number(random: Random, tree: Any) -> Any:
    """A number replaced by one of no sensible size or form."""
    owner, key = random.choice(list(places(tree, (int, float))))
    owner[key] = number(random)
    return tree


def other_number(random: Random, tree: Any) -> Any:
    """One to three numbers made larger, smaller, zero or negative."""
    for _ in range(random.randint(1, 3)):
        owner, key = random.choice(list(places(tree, (int, float))))
        value = owner[key]
        scaled, moved = value * 10 ** random.uniform(-3, 3), value + random.gauss(0, 1)
        owner[key] = random.choice((-value, 0, scaled, moved))
    return tree


def nudged_numbers(random: Random, tree: Any) -> Any:
    """Every number of the analyses and steps a little different: mostly still a sensible plant."""
    for owner, key in named(tree, "value", "ceiling", "residual", "fraction", "approach", "plus_minus"):
        if isinstance(owner[key], int | float) and not isinstance(owner[key], bool):
            owner[key] = owner[key] * 10 ** random.gauss(0, 0.05)
    return tree


def odd_text(random: Random, tree: Any) -> Any:
    """A text replaced by one that is too long, hidden, a path, markup, a formula."""
    owner, key = random.choice(list(places(tree, str)))
    owner[key] = random.choice(TEXTS)
    return tree


def odd_key(random: Random, tree: Any) -> Any:
    """A key renamed, misspelt or added."""
    owner = random.choice([tree, *(o[k] for o, k in places(tree, dict))])
    keys = list(owner)
    if not keys or random.random() < 0.4:
        owner[random.choice((*TEXTS, "valu", "untis", "share", "id", "step"))] = anything(random)
        return tree
    old = random.choice(keys)
    new = random.choice((old + "s", old[:-1], old.upper(), old + " ", random.choice(TEXTS)))
    items = [(new if key == old else key, part) for key, part in owner.items()]
    owner.clear()
    owner.update(items)
    return tree


def missing_key(random: Random, tree: Any) -> Any:
    """A part taken out."""
    owner, key = random.choice(list(places(tree)))
    del owner[key]
    return tree


def swapped(random: Random, tree: Any) -> Any:
    """Two parts of the tree exchanged, or one copied over the other."""
    (one, first), (other, second) = (random.choice(list(places(tree))) for _ in range(2))
    a, b = deepcopy(one[first]), deepcopy(other[second])
    one[first] = b
    if random.random() < 0.5:
        other[second] = a
    return tree


def key_twice(random: Random, tree: Any) -> Any:
    """An object that says a key twice, with the same or another value."""
    owner, key = random.choice([(o, k) for o, k in places(tree, dict) if o[k]])
    items = list(owner[key].items())
    name, value = random.choice(items)
    again = value if random.random() < 0.5 else anything(random)
    owner[key] = Pairs((*items, (name, again)))
    return tree


def part_twice(random: Random, tree: Any) -> Any:
    """Parts of a list doubled (ids stand twice then), turned round, or emptied."""
    owner, key = random.choice([(o, k) for o, k in places(tree, list) if o[k]])
    parts = owner[key]
    change = random.randrange(4)
    if change == 0:
        parts.append(deepcopy(random.choice(parts)))
    elif change == 1:
        parts *= random.choice((2, 60, 300))
    elif change == 2:
        random.shuffle(parts)
    else:
        owner[key] = []
    return tree


def odd_id(random: Random, tree: Any) -> Any:
    """An id replaced by a path, a reserved word or that of another part."""
    ids = named(tree, "id")
    owner, key = random.choice(ids)
    owner[key] = random.choice((*TEXTS, *(o[k] for o, k in ids), "../../x", "a/b", "ph", "sodium_hydroxide"))
    return tree


def odd_unit(random: Random, tree: Any) -> Any:
    """A unit replaced by another, right or wrong."""
    owner, key = random.choice(named(tree, "unit"))
    owner[key] = random.choice(UNITS)
    return tree


def odd_header(random: Random, tree: Any) -> Any:
    """Format, version, seasons or the chosen season changed."""
    key = random.choice(("format", "version", "seasons", "season", "potable", "currency", "balance_water"))
    tree[key] = random.choice(HEADS)
    return tree


def odd_reference(random: Random, tree: Any) -> Any:
    """Dials, sweep, tolerances, holds, targets, options or points about what is not there, or in circles."""
    address, readout = random.choice(ADDRESSES), random.choice(READOUTS)
    known = [f"waters.{water['id']}.share" for water in tree["waters"]]
    known += [f"waters.{water['id']}.analysis.ph" for water in tree["waters"]]
    known += [f"train.{step['id']}.dose" for step in tree.get("train", [])]
    known += ["flow", "train.x.dose"]
    if random.random() < 0.5:
        address = random.choice(known) + random.choice(("", "", ".hold.value", ".hold.ceiling"))
    copy = {key: part for key, part in tree.items() if key != "options"}
    low, high, points = random.uniform(-2, 12), random.uniform(0, 40), random.choice((2, 9, 1_000_000_000))
    unit, name = random.choice(("%", "", "mg/L")), random.choice(("x", "ph", "acetate", "nobody", "../x"))
    formula = random.choice(("NaOH", "((", "H999999999", "Xx2"))
    pairs = random.sample(known, 2)
    changes: tuple[Callable[[], Any], ...] = (
        lambda: {"sweep": {"dial": address, "start": 0, "stop": 50, "points": points}},
        lambda: {"sweep": {"dial": address, "start": number(random), "stop": 1}},
        lambda: {"tolerances": {address: {"plus_minus": 1, "unit": unit}}},
        lambda: {"holds": {address: {"readout": readout, "value": low, "low": 0, "high": high}}},
        lambda: {"holds": {one: {"readout": readout, "value": 8, "high": 40} for one in pairs}},
        lambda: {"targets": [{"readout": readout, "low": low, "high": high}]},
        lambda: {"balance_water": random.choice((name, tree["waters"][0]["id"]))},
        lambda: {"measured": [{"name": name, "dial": address, "readout": readout, "points": [[1, 2]]}]},
        lambda: {"options": [{"name": name, "scenario": copy}] * random.choice((1, 2))},
        lambda: {"options": [{"name": name, "scenario": other_number(random, deepcopy(copy))}]},
        lambda: {"acids": [{"id": name, "molar_mass": 60, "pka": [4.7, random.choice((3.0, 6.0))]}]},
        lambda: {"chemicals": [{"id": name, "like": readout, "formula": formula}]},
    )
    return tree | random.choice(changes)()


def other_train(random: Random, tree: Any) -> Any:
    """Steps exchanged for other kinds, chemicals and settings, in any order and place."""
    goal, ceiling = random.uniform(-5, 14), {"value": 10 ** random.uniform(-3, 5), "unit": "mg/L"}
    chemical = random.choice(("sodium_hydroxide", "chlorine", "aluminium_sulfate", "carbon_dioxide", "gold"))
    hold = {"readout": random.choice(READOUTS), "value": goal, "ceiling": ceiling}
    percent, celsius, aside = random.uniform(-10, 110), random.uniform(-10, 70), tree.get("train", [])
    solids = ["calcite", "brucite"][: random.randint(0, 2)]
    kinds = (
        {"step": "dose", "chemical": chemical, "dose": ceiling},
        {"step": "dose", "chemical": chemical, "hold": hold},
        {"step": "air", "approach": percent, "co2_ppm": random.choice((0, 420, 1e6))},
        {"step": "limestone", "approach": percent},
        {"step": "settle", "residual": percent, "solids": solids},
        {"step": "settle", "full": True},
        {"step": "concentrate", "cycles": random.uniform(0.5, 60)},
        {"step": "temperature", "temperature": {"value": celsius, "unit": "°C"}},
        {"step": "side_stream", "fraction": percent, "train": aside},
        {"step": "boil"},
    )
    steps = [{"id": f"s{n}", **deepcopy(random.choice(kinds))} for n in range(random.randint(1, 4))]
    if random.random() < 0.3:
        random.choice(tree["waters"])["train"] = steps
    else:
        tree["train"] = [*tree.get("train", []), *steps] if random.random() < 0.5 else steps
        tree.update(sweep=None, tolerances={}, holds={})
    return tree


def nested(random: Random, tree: Any) -> Any:
    """A part wrapped into many lists, objects or side streams."""
    owner, key = random.choice(list(places(tree)))
    depth = random.choice((2, 20, 45, 1000))
    part: Any = text_of(owner[key])
    opening, closing = random.choice(WRAPS)
    owner[key] = Raw(opening * depth + part + closing * depth)
    return tree


def many(random: Random, tree: Any) -> Any:
    """A list or object with thousands of parts."""
    owner, key = random.choice(list(places(tree, (list, dict))))
    part = text_of(anything(random))
    count = min(random.choice((60, 500, 5000)), 6_000_000 // len(part))
    if isinstance(owner[key], list):
        owner[key] = Raw("[" + ", ".join([part] * count) + "]")
    else:
        owner[key] = Raw("{" + ", ".join(f'"k{n}": {part}' for n in range(count)) + "}")
    return tree


def several(random: Random, tree: Any) -> Any:
    """Two to five of the changes above, one after the other."""
    for _ in range(random.randint(2, 5)):
        before = tree
        try:
            # what was put in as it stands is read back, where that can be done, for the next change to find
            tree = random.choice(_REPEATABLE)(random, json.loads(text_of(before)))
        except (ValueError, LookupError, TypeError, AttributeError, ArithmeticError, RecursionError):
            return before  # changed so much already that the next change finds nothing to take hold of
    return tree


def cut_off(random: Random, tree: Any) -> bytes:
    """The text ends too early, begins too late, or lacks something in the middle."""
    content = text_of(tree).encode()
    start, end = sorted(random.randrange(len(content)) for _ in range(2))
    return random.choice((content[:end], content[start:], content[:start] + content[end:]))


def damaged(random: Random, tree: Any) -> bytes:
    """Bytes changed, put in or doubled."""
    content = bytearray(text_of(tree).encode())
    for _ in range(random.randint(1, 6)):
        at = random.randrange(len(content))
        content[at : at + random.randint(0, 3)] = random.choice(JUNK)
    return bytes(content)


def encoded(random: Random, tree: Any) -> bytes:
    """Another encoding, with or without a mark, once or twice."""
    text = json.dumps(json.loads(text_of(tree)), ensure_ascii=False)
    names = ("utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "utf-32", "latin-1", "cp1252", "utf-7", "cp037")
    content = text.encode(random.choice(names), errors="replace")
    return random.choice((b"", b"", b"\xef\xbb\xbf", b"\xef\xbb\xbf\xef\xbb\xbf", b"\x00")) + content


def noise(random: Random, tree: Any) -> bytes:
    """Nothing but chance: bytes, or signs of JSON."""
    if random.random() < 0.5:
        return random.randbytes(random.randrange(4000))
    return "".join(random.choice('{}[]",:0123456789.eE+-truefalsn \\u') for _ in range(3000)).encode()


def in_page(random: Random, tree: Any) -> bytes:
    """Inside a page, as in a report: whole, damaged, without an end, or twice."""
    text = text_of(tree)
    opening = '<script type="application/json" id="blendwright-scenario">'
    pages = (
        f"<!doctype html><p>x</p>{opening}{text}</script>",
        f"<html>{opening}{text}",
        f"<html>{opening}</script>{text}",
        "<script " * 20_000 + text,
        f"<html>{opening}{opening}{text}</script></script>",
        f"<html><script id='blendwright-scenario'>{text}</script>",
    )
    return random.choice(pages).encode()


_REPEATABLE = (
    other_type, odd_number, other_number, nudged_numbers, odd_text, odd_key, missing_key, swapped, part_twice,
    odd_unit, odd_reference, other_train,
)  # fmt: skip

_ONCE = (
    key_twice, odd_id, odd_header, nested, many, several, cut_off, damaged, encoded, noise, in_page,
)  # fmt: skip

KINDS: dict[str, Callable[[Random, Any], Any]] = {
    change.__name__.replace("_", " "): change for change in (*_REPEATABLE, *_ONCE)
}
"""Every kind of change by name."""


def mutant(sources: Sequence[Any], seed: int) -> Mutant:
    """The mutant of a seed, from one of the parsed scenarios."""
    random = Random(seed)
    kind = list(KINDS)[seed % len(KINDS)]
    made = KINDS[kind](random, deepcopy(random.choice(sources)))
    return Mutant(kind, seed, made if isinstance(made, bytes) else text_of(made).encode())
