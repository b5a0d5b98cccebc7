"""What a scenario file must not say: every sentence a user may meet, with the path of the field."""

import json
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from explorer.scenario.errors import ScenarioError
from explorer.scenario.files import DEEPEST, LARGEST_FILE, read_scenario
from explorer.scenario.model import Scenario

HERE = Path(__file__).parent
EVERYTHING = (HERE / "saved" / "version_1.json").read_text(encoding="utf-8")
MISSING = object()

# One case a line: where to write (parts joined by "/"), what to put there (nothing: take it out), and how the
# sentence starts that the user is told.
BAD_FIELDS = [
    json.loads(line) for line in (HERE / "bad_fields.jsonl").read_text(encoding="utf-8").splitlines()
]


def changed(where: str, value: Any) -> str:
    """The text of the complete file with one part replaced or taken out."""
    raw = json.loads(EVERYTHING)
    *parents, last = (int(part) if part.isdigit() else part for part in where.split("/"))
    part = raw
    for key in parents:
        part = part[key]
    if value is MISSING:
        del part[last]
    elif isinstance(part, list) and last == len(part):
        part.append(value)
    else:
        part[last] = value
    return json.dumps(raw)


def sentence(text: str | bytes) -> str:
    """What a user is told about a file that cannot be read."""
    with pytest.raises(ScenarioError) as refusal:
        read_scenario(text)
    return str(refusal.value)


@pytest.mark.parametrize("case", BAD_FIELDS, ids=[case["told"].split(";")[0] for case in BAD_FIELDS])
def test_one_wrong_field_is_named_in_one_sentence_that_says_what_is_allowed(case: dict[str, Any]) -> None:
    """The sentence starts with the path and what is wrong, has no second line, and says what is allowed."""
    told = sentence(changed(case["where"], case.get("put", MISSING)))
    assert told.startswith(case["told"])
    assert "\n" not in told and "Traceback" not in told
    assert any(word in told for word in ("allowed", "say what", "perhaps", "cannot be read as a formula"))


def places(raw: Any, where: str = "") -> Iterator[str]:
    """Every place of a JSON value, parts joined by "/"."""
    parts = raw.items() if isinstance(raw, dict) else enumerate(raw) if isinstance(raw, list) else ()
    for key, part in parts:
        yield f"{where}{key}"
        yield from places(part, f"{where}{key}/")


JSON_VALUES = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(st.characters(), max_size=8),
    lambda parts: st.lists(parts, max_size=3) | st.dictionaries(st.text(max_size=8), parts, max_size=3),
    max_leaves=6,
)


@settings(max_examples=300, deadline=None)
@given(where=st.sampled_from(sorted(places(json.loads(EVERYTHING)))), value=JSON_VALUES | st.just(MISSING))
def test_anything_anywhere_is_either_taken_or_refused_in_one_sentence(where: str, value: Any) -> None:
    """No other error can come of a file, and what is taken is written again as it was."""
    text = changed(where, value)
    try:
        scenario = read_scenario(text)
    except ScenarioError as refusal:
        assert str(refusal).isprintable()
    else:
        assert json.dumps(scenario.to_dict()) == text


def test_a_refusal_leaves_the_source_as_it_was() -> None:
    """What was read halfway has changed nothing."""
    raw = json.loads(changed("sweep/dial", "nothing"))
    before = json.dumps(raw)
    with pytest.raises(ScenarioError):
        Scenario.from_dict(raw)
    assert json.dumps(raw) == before


def test_the_file_behind_the_wrong_fields_is_itself_right() -> None:
    """Each refusal above is due to the one change alone."""
    read_scenario(EVERYTHING)


def test_an_option_with_options_is_refused() -> None:
    """A kept copy holds no kept copies."""
    raw = json.loads(EVERYTHING)
    raw["options"][0]["scenario"]["options"] = [json.loads(json.dumps(raw["options"][0]))]
    assert sentence(json.dumps(raw)).startswith("options[0].scenario.options: an option holds no options")


def test_two_options_of_one_name_are_refused() -> None:
    """Options are told apart by name."""
    raw = json.loads(EVERYTHING)
    raw["options"] *= 2
    assert sentence(json.dumps(raw)).startswith('options[1].name: "A" is there twice')


def test_all_waters_out_of_service_are_refused() -> None:
    """Something has to flow."""
    raw = json.loads(EVERYTHING)
    for water in raw["waters"]:
        water["on"] = False
    assert sentence(json.dumps(raw)) == "waters: no water is in service; allowed one or more"


def test_shares_and_flows_are_not_mixed() -> None:
    """Flows are given for all waters or for none, and a total only beside shares."""
    raw = json.loads((HERE / "saved" / "version_1_flows.json").read_text(encoding="utf-8"))
    raw["flow"] = {"value": 1, "unit": "ML/d"}
    assert sentence(json.dumps(raw)).startswith("flow: the waters have flows of their own")
    del raw["flow"]
    raw["waters"][1] = raw["waters"][1] | {"share": 50}
    assert sentence(json.dumps(raw)).startswith("waters[0].flow: a flow stands among shares")


def test_side_streams_may_not_stand_in_each_other_without_end() -> None:
    """Four side streams may stand in each other, five may not."""
    raw = {
        part: value for part, value in json.loads(EVERYTHING).items() if part not in ("holds", "tolerances")
    }
    train: list[dict[str, Any]] = []
    for level in range(5):
        train = [{"id": f"level_{level}", "step": "side_stream", "fraction": 50, "train": train}]
    raw["train"] = raw["train"][:6] + train[0]["train"] + raw["train"][7:]
    read_scenario(json.dumps(raw))
    raw["train"] = raw["train"][:6] + train + raw["train"][7:]
    assert "side streams stand too deep" in sentence(json.dumps(raw))


BAD_TEXTS: list[tuple[str, str | bytes, str]] = [
    ("empty", "", "the file is not JSON at line 1, column 1"),
    ("not JSON", "waters: 2", "the file is not JSON at line 1, column 1"),
    ("cut off", EVERYTHING[:-20], "the file is not JSON at line "),
    ("something after the end", EVERYTHING + "{}", "the file is not JSON at line "),
    ("a list", "[]", "the file holds a list; allowed a scenario object"),
    ("a number", "1", "the file holds 1; allowed a scenario object"),
    ("null", "null", "the file holds null; allowed a scenario object"),
    ("Latin-1", '{"title": "Würm"}'.encode("latin-1"), "the file is not UTF-8 text (byte 13)"),
    ("UTF-16", EVERYTHING.encode("utf-16"), "the file is not UTF-8 text"),
    ("a raw NUL in a text", EVERYTHING.replace("Fern", "Fe\x00rn"), "the file is not JSON at line "),
    ("NUL bytes", b"\x00" * 10, "the file is not JSON at line 1"),
    ("a key twice", EVERYTHING.replace('"potable"', '"note": "again",\n  "potable"'),
     "note: this key stands twice; allowed once"),
    ("a water's key twice", EVERYTHING.replace('"name": "Fern River"', '"name": "a", "name": "b"'),
     "waters[0].name: this key stands twice; allowed once"),
    ("a number beyond floating point", EVERYTHING.replace('"value": 5.25', '"value": 1e999'),
     "flow.value: Infinity is not a number of sensible size; allowed 0 or more"),
    ("an integer of five thousand digits", EVERYTHING.replace('"value": 5.25', '"value": ' + "9" * 5000),
     "flow.value: Infinity is not a number of sensible size; allowed 0 or more"),
    ("a hundred thousand brackets", "[" * 100_000, "the file has too many objects in each other"),
    ("a million lists", "[" + "[]," * 999_999 + "[]]", "the file has 1000001 lists; allowed 150000"),
    ("a million objects", '{"a":' * 1_000_000, "the file has 1000000 objects; allowed 50000"),
    ("nested beyond the limit", '{"a":' * (DEEPEST + 1) + "1" + "}" * (DEEPEST + 1),
     "the file has too many objects in each other"),
    ("too large", " " * (LARGEST_FILE + 1), "the file is too large; allowed 5 MB"),
    ("a lone surrogate as key", EVERYTHING.replace('"potable"', '"\\ud800"'), "\ufffd: not known here"),
    ("markup as key", EVERYTHING.replace('"potable"', '"<img src=x>"'), "<img src=x>: not known here"),
]  # fmt: skip


@pytest.mark.parametrize(
    ("text", "start"), [case[1:] for case in BAD_TEXTS], ids=[case[0] for case in BAD_TEXTS]
)
def test_a_text_that_is_no_scenario_file_is_refused_in_one_sentence(text: str | bytes, start: str) -> None:
    """Whatever the text is, the answer is a ScenarioError of one printable line."""
    told = sentence(text)
    assert told.startswith(start)
    assert told.isprintable()


def test_a_byte_order_mark_is_no_reason_to_refuse_a_file() -> None:
    """Editors that write UTF-8 with a mark are common."""
    marked = read_scenario(b"\xef\xbb\xbf" + EVERYTHING.encode())
    assert marked.to_dict() == read_scenario("\ufeff" + EVERYTHING).to_dict() == json.loads(EVERYTHING)
