"""Whatever the declared fields allow comes back from a file as it was written."""

import json
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from explorer.scenario.chemicals import Acid, OwnChemical
from explorer.scenario.entity import Child, Children, Entity, Table
from explorer.scenario.fields import Amounts, Choice, Choices, Field, Flag, Id, Number, Numbers, Text, Texts
from explorer.scenario.files import dumps, read_scenario
from explorer.scenario.measured import ENTRY_RULES
from explorer.scenario.model import STEP_KINDS, Analysis, SweepSetting, Target, Tolerance, Water
from explorer.scenario.quantity import DOSE, Amount
from explorer.scenario.water import PROVENANCE_KEYS, Step
from explorer.treatment.units import from_base, units_for

IDS = st.from_regex(r"[a-z][a-z0-9_-]{0,8}", fullmatch=True)
SEEN = st.characters(
    exclude_categories=("Cc", "Cs", "Zl", "Zp"),
    exclude_characters="\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069",
)


def texts(limit: int = 30) -> st.SearchStrategy[str]:
    """Texts that can be seen and are not blank."""
    return st.text(SEEN, min_size=1, max_size=min(limit, 30)).filter(str.strip)


def numbers(low: float | None, high: float | None, whole: bool = False) -> st.SearchStrategy[float]:
    """Integers and floats within bounds; both kinds must survive."""
    low, high = -1e9 if low is None else low, 1e9 if high is None else high
    integers = st.integers(int(-(-low // 1)), int(high // 1))
    return integers if whole else integers | st.floats(low, high)


def shuffled(parts: dict[str, Any]) -> st.SearchStrategy[dict[str, Any]]:
    """The same object with its keys in another order."""
    return st.permutations(list(parts.items())).map(dict)


@st.composite
def quantities(draw: st.DrawFn, field: Amount) -> dict[str, Any]:
    """A value with a unit, either first."""
    units = ("mg/L", "mmol/L") if field.quantity == DOSE else units_for(field.quantity)
    unit = draw(st.sampled_from(units))
    low, high = field.bounds
    if high is not None:
        # A little inside the bounds, so that °F does not fall over the edge by rounding.
        low, high = (float(from_base(end, unit, field.quantity)) for end in (low + 0.1, high - 0.1))
    return draw(shuffled({"value": draw(numbers(low, high)), "unit": unit}))


@st.composite
def analyses(draw: st.DrawFn) -> dict[str, Any]:
    """Entries with any of their parts, beside provenance and the closing ion."""
    parts: dict[str, Any] = {}
    for key in draw(st.sets(st.sampled_from(list(ENTRY_RULES)), max_size=6)):
        rule = ENTRY_RULES[key]
        entry: dict[str, Any] = {"unit": units_for(key)[0]}
        detected = not rule.non_detect or draw(st.booleans())
        entry["value" if detected else "below"] = draw(numbers(rule.bounds[0] or 0, rule.bounds[1]))
        if rule.read_at:
            entry["read_at"] = draw(numbers(0, 60))
        optional = {
            "note": draw(texts()),
            "assumed": draw(st.booleans()),
            "plus_minus": draw(numbers(0, None) | st.none()),
        }
        entry |= {key: optional[key] for key in draw(st.sets(st.sampled_from(list(optional))))}
        parts[key] = draw(shuffled(entry))
    if draw(st.booleans()):
        parts["close_with"] = draw(st.sampled_from(["none", "sodium", "chloride"]))
    if draw(st.booleans()):
        parts["provenance"] = draw(st.dictionaries(st.sampled_from(PROVENANCE_KEYS), texts()))
    return draw(shuffled(parts))


def values(field: Field) -> st.SearchStrategy[Any]:
    """JSON values that a declared field allows."""
    match field:
        case Choices():
            return st.lists(st.sampled_from(field.choices), unique=True)
        case Choice():
            return st.sampled_from(field.choices)
        case Flag():
            return st.booleans()
        case Numbers():
            return st.lists(numbers(*field.bounds), min_size=1, max_size=field.most)
        case Amounts():
            return st.dictionaries(IDS, numbers(*field.bounds), max_size=3)
        case Number():
            return numbers(*(field.bounds or (None, None)), whole=field.whole)
        case Texts():
            return st.lists(texts(field.limit), min_size=int(field.names), max_size=3, unique=True)
        case Id():
            return IDS
        case Text():
            return texts(field.limit)
        case Amount():
            return quantities(field)
        case Child():
            return objects(field.item)
        case Children():
            return st.lists(objects(field.item), min_size=int(field.required), max_size=2)
        case Table():
            return st.dictionaries(texts(), objects(field.item), max_size=2)
    raise NotImplementedError(type(field).__name__)


@st.composite
def objects(draw: st.DrawFn, kind: type[Entity]) -> dict[str, Any]:
    """JSON forms of a kind of object: required parts, some others, explicit nulls, in any order."""
    if kind is Analysis:
        return draw(analyses())
    if kind is Step:
        kind = draw(st.sampled_from([step for step in STEP_KINDS.values() if step.kind != "side_stream"]))
    parts = dict(kind.constants)
    for name, field in kind.fields().items():
        if field.required or draw(st.booleans()):
            null = st.none() if field.default is None and not field.required else st.nothing()
            parts[name] = draw(null | values(field))
    return draw(shuffled(parts))


KINDS = [Water, Target, Tolerance, SweepSetting, Acid, OwnChemical, Analysis, *STEP_KINDS.values()]


@pytest.mark.parametrize("kind", KINDS, ids=lambda kind: kind.__name__)
@settings(max_examples=40, deadline=None)
@given(data=st.data())
def test_an_object_comes_back_as_it_was_written(kind: type[Entity], data: st.DataObject) -> None:
    """Values, kinds of number, order and explicit parts; a copy says the same and shares nothing."""
    raw = data.draw(objects(kind))
    text = json.dumps(raw)
    entity = kind.from_dict(raw)
    assert json.dumps(entity.to_dict()) == text
    twin = entity.copy()
    assert twin.same_as(entity)
    assert json.dumps(twin.to_dict()) == text
    assert json.dumps(raw) == text


@settings(max_examples=40, deadline=None)
@given(
    title=texts(),
    waters=st.lists(analyses(), min_size=1, max_size=4),
    values=st.lists(st.floats(0, 60) | st.integers(0, 60), min_size=4, max_size=4),
    order=st.randoms(),
)
def test_a_file_is_stable_from_its_first_saving_on(
    title: str, waters: list, values: list, order: Any
) -> None:
    """Reading what was written and writing it again gives the same bytes."""
    carbonate = {"ph": {"value": 7.5}, "alkalinity": {"value": 2, "unit": "meq/L"}}
    calcium = {"calcium": {"value": 40, "unit": "mg/L"}}
    raw = {
        "format": "blendwright-scenario",
        "version": 1,
        "title": title,
        "seasons": ["all year"],
        "season": "all year",
        "waters": [
            {
                "id": f"water_{number}",
                "share": 100 / len(waters),
                "analyses": {
                    "all year": entries
                    | carbonate
                    | calcium
                    | {"temperature": {"value": value, "unit": "°C"}}
                },
            }
            for number, (entries, value) in enumerate(zip(waters, values, strict=False))
        ],
    }
    items = list(raw.items())
    order.shuffle(items)
    text = dumps(read_scenario(json.dumps(dict(items))))
    assert json.dumps(json.loads(text)) == json.dumps(dict(items))
    assert dumps(read_scenario(text)) == text
