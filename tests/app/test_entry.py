"""Typed numbers: what is taken, what is refused and with which sentence, and what happens to the value."""

import pytest

from explorer.app.entry import NumberEntry, NumberError, parse_number, show_number


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("7.5", 7.5),
        ("7,5", 7.5),
        ("  12 ", 12.0),
        (".5", 0.5),
        (",5", 0.5),
        ("5.", 5.0),
        ("-3", -3.0),
        ("\u22123", -3.0),
        ("+3", 3.0),
        ("2.5e-3", 0.0025),
        ("1E2", 100.0),
        ("0,125", 0.125),
        ("1234,5", 1234.5),
        ("1.250", 1.25),
        ("007", 7.0),
    ],
)
def test_number_as_people_write_it(text: str, value: float) -> None:
    """One decimal comma or point, a sign, an exponent and blanks around are all read."""
    assert parse_number(text) == value


@pytest.mark.parametrize(
    "text", ["abc", "7.5.1", "7,5,1", "1.2,3", "1e", "nan", "inf", "0x10", "5 %", "--1", "<0.1", "\u0663"]
)
def test_text_that_is_no_number(text: str) -> None:
    """Anything else is refused, and the sentence shows the text and what is allowed."""
    with pytest.raises(NumberError, match="is not a number; allowed: 0 to 14") as caught:
        parse_number(text, 0, 14)
    assert f"“{text}”" in str(caught.value)


@pytest.mark.parametrize("text", ["1,000", "1 000", "12'500", "1\u00a0000", "999,999"])
def test_grouped_digits_are_not_guessed_at(text: str) -> None:
    """A thousands group or three decimals: the sentence offers both spellings instead of choosing one."""
    with pytest.raises(NumberError, match="two ways") as caught:
        parse_number(text)
    digits = "".join(character for character in text if character.isdigit())
    assert f"write {digits} or" in str(caught.value)


@pytest.mark.parametrize(
    ("text", "low", "high", "words"),
    [
        ("15", 0, 14, "0 to 14"),
        ("-1", 0, None, "at least 0"),
        ("101", None, 100, "at most 100"),
        ("1e999", None, None, "any number"),
    ],
)
def test_number_out_of_range(text: str, low: float | None, high: float | None, words: str) -> None:
    """Bounds are inclusive and named in the sentence; infinity is never a number."""
    with pytest.raises(NumberError, match=words):
        parse_number(text, low, high)


def test_bounds_themselves_are_allowed() -> None:
    """0 and 14 are inside 0 to 14."""
    assert [parse_number(text, 0, 14) for text in ("0", "14")] == [0, 14]


def test_empty_text_where_a_number_is_needed() -> None:
    """Nothing typed is named as such, with the unit of what is allowed."""
    with pytest.raises(NumberError, match=r"a number is needed here; allowed: 0 to 100 %"):
        parse_number("   ", 0, 100, "%")


@pytest.mark.parametrize(
    ("value", "step", "text"),
    [
        (35.0, 0.1, "35.0"),
        (100 / 3, 0.1, "33.33"),
        (8.0, 0.01, "8.00"),
        (4.299999873, None, "4.3"),
        (1234567.0, None, "1234567"),
        (1.25e-7, None, "1.25e-07"),
        (0.0, None, "0"),
        (None, None, ""),
        (float("nan"), 0.1, ""),
        (20.0, 5.0, "20"),
    ],
)
def test_number_as_a_field_shows_it(value: float | None, step: float | None, text: str) -> None:
    """The step's decimals, one more between steps, and no arithmetic noise."""
    assert show_number(value, step) == text


@pytest.mark.parametrize("value", [0.1, 64.0, 7.25, 1.27880e-3, 12345.678, 1e-9])
def test_shown_number_is_read_back(value: float) -> None:
    """What a field shows means the number it stands for."""
    assert parse_number(show_number(value)) == pytest.approx(value, rel=1e-6)


def test_entry_takes_a_good_number() -> None:
    """Entering a text sets the value and shows it in the field's own form."""
    entry = NumberEntry(value=7.0, low=0, high=14, step=0.01)
    entry.enter("8,25")
    assert entry.value == 8.25
    assert entry.shown("number").properties["value"] == "8.25"


def test_entry_refuses_and_keeps_the_last_good_number() -> None:
    """A bad text stays in the field, marked, with the sentence beside it; the value is untouched."""
    entry = NumberEntry(value=7.0, low=0, high=14)
    entry.enter("15")
    assert entry.value == 7.0
    assert "0 to 14" in entry.message
    field = entry.shown("number").properties
    assert field["value"] == "15"
    assert field["aria-invalid"] == "true"


def test_entry_recovers_after_a_refusal() -> None:
    """The next good number clears the sentence and the mark."""
    entry = NumberEntry(value=7.0, low=0, high=14)
    entry.enter("x")
    entry.enter("9")
    assert (entry.value, entry.message) == (9, "")
    assert "aria-invalid" not in entry.shown("number").properties


def test_entry_set_from_python_forgets_the_refusal() -> None:
    """A value that arrives from elsewhere replaces the refused text."""
    entry = NumberEntry(value=7.0, low=0, high=14)
    entry.enter("x")
    entry.value = 6.5
    assert (entry.message, entry.shown("number").properties["value"]) == ("", "6.5")


def test_optional_entry_may_be_emptied() -> None:
    """An optional field means None when empty; a needed one asks for a number."""
    optional, needed = NumberEntry(value=1.0, optional=True), NumberEntry(value=1.0)
    optional.enter("")
    needed.enter("")
    assert optional.value is None
    assert needed.value == 1.0
    assert "a number is needed" in needed.message
