"""Laboratory sheets as text: what each line is understood as."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from explorer.scenario.analysis_text import SheetLine, completed, entries_of, read_sheet, understood
from explorer.scenario.files import ScenarioError
from explorer.treatment.analysis import Measured
from explorer.treatment.units import units_for


def one(text: str) -> SheetLine:
    return read_sheet(text)[0]


def test_spreadsheet_columns_are_told_apart_by_their_headings() -> None:
    """Parameter, unit and value in any order; decimal commas; a heading is no line."""
    text = (
        "Result\tUnit\tParameter\n11,5\t°C\tTemperature\n7,25\t\tpH\n"
        "272\tmg/l\tAlkalinity (CaCO3)\n116\tmg/l\tCa"
    )
    assert entries_of(read_sheet(text)) == {
        "temperature": Measured(11.5, unit="°C"),
        "ph": Measured(7.25, unit=""),
        "alkalinity": Measured(272.0, unit="mg/L as CaCO3"),
        "calcium": Measured(116.0, unit="mg/L"),
    }


@pytest.mark.parametrize("mark", ["\t", ";", " ; ", "  "])
def test_columns_without_headings_are_told_apart_by_their_content(mark: str) -> None:
    """Whatever stands in them; tabs, semicolons or blanks between."""
    text = "\n".join(mark.join(row) for row in [("mg/L", "Natrium", "11,2"), ("mg/l", "Chlorid", "15")])
    assert entries_of(read_sheet(text)) == {
        "sodium": Measured(11.2, unit="mg/L"),
        "chloride": Measured(15.0, unit="mg/L"),
    }


def test_commas_between_columns_and_points_in_numbers() -> None:
    """A comma parts columns where it cannot be a decimal one; quoted cells stay whole."""
    text = 'Parameter,Value,Unit\n"Calcium, total",26.4,mg/L\npH,8.6,\n'
    assert entries_of(read_sheet(text)) == {
        "calcium": Measured(26.4, unit="mg/L"),
        "ph": Measured(8.6, unit=""),
    }


def test_running_lines_and_parameters_side_by_side() -> None:
    """A typed list, and a sheet with one row for the sample."""
    assert entries_of(read_sheet("pH 7.4\nAlkalinity: 64 mg/L CaCO3\nCalcium 26 mg/L")) == {
        "ph": Measured(7.4, unit=""),
        "alkalinity": Measured(64.0, unit="mg/L as CaCO3"),
        "calcium": Measured(26.0, unit="mg/L"),
    }
    across = "Sample\tpH\tAlk (mg/L CaCO3)\tCa (mg/L)\tCl [mg/L]\nW1\t7.3\t120\t44\t21"
    assert set(entries_of(read_sheet(across))) == {"ph", "alkalinity", "calcium", "chloride"}


@pytest.mark.parametrize(
    ("line", "key", "value", "unit"),
    [
        ("NO3-N;1,4;mg/l", "nitrate", 1.4, "mg/L as N"),
        ("Nitrate as N;1.4;mg/L", "nitrate", 1.4, "mg/L as N"),
        ("NO3-;6.2;mg/L", "nitrate", 6.2, "mg/L"),
        ("NH4-N;0,05;mg/l", "ammonia", 0.05, "mg/L as N"),
        ("PO4-P;300;µg/l", "phosphate", 0.3, "mg/L as P"),
        ("HCO3-;78;mg/L", "alkalinity", 78, "mg/L as HCO3"),
        ("KS4.3;1,28;mmol/l", "alkalinity", 1.28, "mmol/L"),
        ("m-Alkalinity;1,28;mval/l", "alkalinity", 1.28, "meq/L"),
        ("Ca2+;26;mg/L", "calcium", 26, "mg/L"),
        ("Ca hardness;65;mg/L", "calcium", 65, "mg/L as CaCO3"),
        ("SO42-;17;mg/L", "sulfate", 17, "mg/L"),
        ("SO₄²⁻;17;ppm", "sulfate", 17, "mg/L"),
        ("Sulphate;17;mg/L", "sulfate", 17, "mg/L"),
        ("Total hardness;19,1;°dH", "total_hardness", 19.1, "°dH"),
        ("Gesamthärte;19,1;° dH", "total_hardness", 19.1, "°dH"),
        ("Silica (SiO2);16;mg/L", "silica", 16, "mg/L as SiO2"),
        ("EC (25 °C);0,782;mS/cm", "conductivity", 782, "µS/cm"),
        ("DOC;2.1;mg/L C", "toc", 2.1, "mg/L as C"),
        ("Temp.;39.2;°F", "temperature", 39.2, "°F"),
        ("Iron;20;ug/L", "iron", 20, "µg/L"),
    ],
)
def test_trade_names_symbols_and_units(line: str, key: str, value: float, unit: str) -> None:
    """Parameters and units as laboratories write them; the basis in a name counts."""
    read = one(line)
    assert (read.key, read.measured.unit) == (key, unit) and not read.remark
    assert read.measured.value == pytest.approx(value, rel=1e-12)


@pytest.mark.parametrize(("text", "below"), [("<0.1", 0.1), ("< 0,02", 0.02), ("≤0.5", 0.5)])
def test_non_detects_keep_their_limit(text: str, below: float) -> None:
    """A result below a limit is neither nothing nor the limit."""
    assert one(f"Iron;{text};mg/L").measured == Measured(None, below, "mg/L")


@pytest.mark.parametrize(
    ("line", "remark"),
    [
        ("Iron;n.d.;mg/L", "the limit is not given"),
        ("Turbidity;0.3;NTU", "not known"),
        ("Calcium;26;furlong", "allowed: mg/L"),
        ("pH;17;", "not a pH"),
        ("pH;acid;", "is not a value"),
        ("Calcium;26;mg/L\nCa;27;mg/L", ""),
    ],
)
def test_what_cannot_be_taken_says_why(line: str, remark: str) -> None:
    """No entry comes of it, and nothing else is lost."""
    lines = read_sheet(line + "\nMagnesium;5;mg/L")
    refused = lines[-2]
    assert refused.measured is None and remark in refused.remark and refused.remark
    assert "magnesium" in entries_of(lines)


@pytest.mark.parametrize(
    ("line", "remark"),
    [
        ("Calcium;26;", "no unit given, taken as mg/L"),
        ("Nitrate;6.2;mg/L", "taken as NO3 itself"),
        ("Alkalinity;64;mg/L", "basis not given, taken as mg/L as CaCO3"),
        ("TDS;1,200;mg/L", "read as 1.200, not as 1200"),
    ],
)
def test_what_was_assumed_is_said(line: str, remark: str) -> None:
    """The entry is there, with what to check."""
    read = one(line)
    assert read.measured is not None and read.remark == remark


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("1.234,5", 1234.5),
        ("1,234.5", 1234.5),
        ("1 234", 1234),
        ("12'500", 12500),
        ("6,5 ± 0,2", 6.5),
        ("−1.5", -1.5),
    ],
)
def test_numbers_as_they_are_written(text: str, value: float) -> None:
    """Grouping, decimal marks, half-widths and real minus signs."""
    assert one(f"Alkalinity;{text};mg/L as CaCO3").measured.value == value


def test_line_taken_as_another_parameter() -> None:
    """What the reader decides replaces what was understood."""
    line = one("Hardness, carbonate-free rest;12;mg/L")
    assert line.key == "" and line.measured is None
    assert understood(line, "sulfate").measured == Measured(12.0, unit="mg/L")
    assert understood(line, "").measured is None


def test_own_acids_are_parameters() -> None:
    """By their name or id."""
    lines = read_sheet("Fulvic acid;3;mg/L\npH;7;", {"fulvic": "Fulvic acid"})
    assert entries_of(lines)["fulvic"] == Measured(3.0, unit="mg/L")


def test_what_the_sheet_lacks_stays_marked_as_assumed() -> None:
    """A water needs a temperature and two of the carbonate figures; nothing else stays."""
    before = {
        "temperature": Measured(10, unit="°C"),
        "ph": Measured(7.5),
        "alkalinity": Measured(100, unit="mg/L as CaCO3"),
        "calcium": Measured(40, unit="mg/L"),
    }
    entries, stays = completed({"ph": Measured(8.1), "sodium": Measured(5.0, unit="mg/L")}, before)
    assert stays == ("temperature", "alkalinity")
    assert entries["temperature"].assumed and entries["alkalinity"].assumed and not entries["ph"].assumed
    assert "calcium" not in entries


@pytest.mark.parametrize("text", ["", " \n\t\n", "hello", "x;y;z\n" * 300, "a" * 200_000])
def test_text_that_is_no_sheet_is_refused_in_a_sentence(text: str) -> None:
    """With what is allowed."""
    with pytest.raises(ScenarioError, match="allowed"):
        read_sheet(text)


@given(st.text(max_size=300))
def test_any_text_is_read_or_refused(text: str) -> None:
    """Whatever is pasted: lines with entries in units that exist, or one sentence."""
    try:
        lines = read_sheet(text)
    except ScenarioError:
        return
    for key, measured in entries_of(lines).items():
        assert measured.unit in units_for(key)
