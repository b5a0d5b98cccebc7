"""The analysis of a water, opened on its card: a laboratory sheet that can be corrected line by line."""

from collections.abc import Mapping
from dataclasses import replace

from explorer.app.desk import Desk, beside
from explorer.app.entry import parse_number, show_number
from explorer.app.live_view import Node, node
from explorer.app.other_units import conversion, in_unit, take_along
from explorer.app.paste_panel import Pasting, paste_panel
from explorer.app.pickers import Choice, picker
from explorer.app.state import Change
from explorer.app.text import plain, unit_text
from explorer.scenario import editing
from explorer.scenario.compile import system_of
from explorer.scenario.measured import ENTRY_RULES
from explorer.scenario.model import Analysis, Measured, Scenario, Water
from explorer.scenario.words import number_text
from explorer.treatment.analysis import AnalysisError, entry_units
from explorer.treatment.analysis.intake import ASSUMED
from explorer.treatment.units import Units, from_base, units_for

LEVELS = {"info": "", "caution": "caution", "error": "error"}


class Sheet:
    """One water's analysis of one season on the desk."""

    def __init__(self, desk: Desk, water: Water) -> None:
        self.desk, self.water = desk, water
        self.season = desk.scenario.season
        self.analysis: Analysis = water.analyses[self.season]
        scenario = desk.scenario
        self.system = system_of(scenario.weak_acids(), float(scenario.organic_charge_density))
        self.key = f"waters.{water.id}.analysis"

    # ---- what an entry is ------------------------------------------------------------------------------

    def label(self, entry: str) -> str:
        """Name of an entry as the sheet prints it."""
        if entry in ENTRY_RULES:
            return ENTRY_RULES[entry].label
        return next((acid.name or acid.id for acid in self.desk.scenario.acids if acid.id == entry), entry)

    def units(self, entry: str) -> tuple[str, ...]:
        """Units the entry may have."""
        return tuple(units_for(self.quantity(entry)))

    def quantity(self, entry: str) -> str | Units:
        """What the units of the entry are those of."""
        return entry_units(entry, self.system)

    def limits(self, entry: str, unit: str) -> tuple[float | None, float | None]:
        """Limits of an entry in a unit."""
        low, high = ENTRY_RULES[entry].bounds if entry in ENTRY_RULES else (0.0, None)
        quantity = self.quantity(entry)
        return (
            None if low is None else float(from_base(low, unit, quantity)),
            None if high is None else float(from_base(high, unit, quantity)),
        )

    # ---- changes ---------------------------------------------------------------------------------------

    def put(self, entry: str, measured: Measured | None, also: Change = lambda scenario: None) -> str:
        """Replace an entry, or take it out, and make a change that goes with it; "" or the refusal."""
        water_id, season = self.water.id, self.season

        def change(scenario: Scenario) -> None:
            editing.set_entry(scenario.water(water_id).analyses[season], entry, measured)
            also(scenario)

        return self.desk.edit(f"{self.label(entry)} of {self.water.title}", change)

    def take(self, entry: str, text: str) -> str:
        """A typed value, or "<" and the limit of a non-detect; "" or the refusal."""
        measured = self.analysis.entries[entry]
        low, high = self.limits(entry, measured.unit)
        typed = text.strip()
        if typed.startswith("<"):
            below = parse_number(typed[1:], 0, high, measured.unit)
            refusal = self.put(entry, replace(measured, value=None, below=below))
        else:
            value = parse_number(typed, low, high, measured.unit)
            address = f"{self.key}.{entry}"
            if measured.value is not None and address in self.desk.session.dials:
                return self.desk.turn(address, value)
            refusal = self.put(entry, replace(measured, value=value, below=None))
        return refusal

    def change_unit(self, entry: str, unit: str) -> None:
        """Express an entry in another unit; a refusal stands at the entry."""
        address = f"{self.key}.{entry}"
        measured = self.analysis.entries[entry]
        original = self.desk.originals.of(address, measured)
        converted = original if unit == original.unit else in_unit(measured, unit, self.quantity(entry))
        convert = conversion(self.quantity(entry), measured.unit, unit)
        refusal = self.put(entry, converted, lambda scenario: take_along(scenario, address, convert))
        self.desk.originals.keep(address, original, converted)
        self.desk.entries.refuse(address, refusal=refusal)


def analysis_editor(desk: Desk, water: Water) -> list[Node]:
    """Everything inside an opened water card: findings, the sheet, what to add, where it comes from."""
    sheet = Sheet(desk, water)
    heads = [
        node("th", look, text=words, scope="col", title=hint or None)
        for look, (words, hint) in COLUMNS.items()
    ]
    columns = node("colgroup", "", *(node("col", look) for look in COLUMNS))
    rows = [row for entry in _ordered(sheet.analysis.entries) for row in _rows(sheet, entry)]
    table = node(
        "table", "sheet", columns, node("thead", "", node("tr", "", *heads)), node("tbody", "", *rows),
        aria_label=f"{sheet.season} analysis of {water.title}",
    )  # fmt: skip
    return [
        node("h3", text=f"{plain(sheet.season)} analysis"),
        *_findings(sheet),
        table,
        node("div", "below", *_add_entry(sheet), _paste(sheet)),
        *paste_panel(desk, water.id),
        node(
            "details",
            "",
            node("summary", text="Provenance and ion balance"),
            *_closing(sheet),
            *_provenance(sheet),
        ),
    ]


COLUMNS: dict[str, tuple[str, str]] = {
    "label": ("Parameter", ""),
    "amount": ("Value", "Write <0.02 for a result below a limit of detection"),
    "basis": ("Unit", ""),
    "width": ("±", "Half-width of the measurement, in the same unit"),
    "more-column": ("", ""),
}
"""Look, heading and hint of the columns of the sheet."""


def _ordered(entries: Mapping[str, Measured]) -> list[str]:
    """Keys in the order of a laboratory sheet, own acids last."""
    known = [key for key in ENTRY_RULES if key in entries]
    return known + [key for key in entries if key not in ENTRY_RULES]


# ---- the sheet -----------------------------------------------------------------------------------------


def _rows(sheet: Sheet, entry: str) -> list[Node]:
    key, measured, entries = f"{sheet.key}.{entry}", sheet.analysis.entries[entry], sheet.desk.entries
    label = sheet.label(entry)
    shown = f"<{show_number(measured.below)}" if measured.value is None else show_number(measured.value)
    value, refusal = entries.text(
        key, f"{label}, {measured.unit}" if measured.unit else label, shown,
        lambda text: sheet.take(entry, text), look="number", inputmode="text", maxlength=40,
    )  # fmt: skip
    width, wrong_width = entries.number(
        f"{key}.plus_minus", f"{label} plus or minus", show_number(measured.plus_minus),
        lambda number: sheet.put(entry, replace(measured, plus_minus=number)), low=0,
        empty=lambda: sheet.put(entry, replace(measured, plus_minus=None)),
    )  # fmt: skip
    unfolded = sheet.desk.unfolded == key
    about = f"More about {label}"
    more = node(
        "button", "more", text="⋯", key=f"{key}:unfold", type="button", aria_expanded=str(unfolded).lower(),
        on=lambda pressed: sheet.desk.unfold(key), aria_label=about, title=about,
    )  # fmt: skip
    marks = [node("small", "assumed", text="assumed")] if measured.assumed else []
    if measured.note:
        marks.append(node("small", "remark", text=measured.note, title=plain(measured.note, 300)))
    cells = [
        node("td", "label", node("span", text=label), *marks, title=label),
        node("td", "amount", value),
        node("td", "basis", _unit(sheet, entry, label)),
        node("td", "width", width),
        node("td", "more-column", more),
    ]
    rows = [node("tr", "", *cells, key=f"{key}:row")]
    if unfolded:
        rows.append(
            node("tr", "more-about", node("td", "", _about(sheet, entry), colspan=5), key=f"{key}:about")
        )
    rows.append(node("tr", "refused", node("td", "", refusal, wrong_width, colspan=5), key=f"{key}:wrong"))
    return rows


def _unit(sheet: Sheet, entry: str, label: str) -> Node:
    unit = sheet.analysis.entries[entry].unit
    units = sheet.units(entry)
    if len(units) == 1:
        return node("span", "unit", text=unit_text(unit))
    return sheet.desk.entries.choice(
        f"{sheet.key}.{entry}.unit", f"Unit of {label}", {name: unit_text(name) for name in units}, unit,
        lambda chosen: sheet.change_unit(entry, chosen),
    )  # fmt: skip


def _about(sheet: Sheet, entry: str) -> Node:
    """Note, reading temperature and assumed mark of an entry, and the way to take it out."""
    key, measured, entries = f"{sheet.key}.{entry}", sheet.analysis.entries[entry], sheet.desk.entries
    label = sheet.label(entry)
    note, wrong_note = entries.text(
        f"{key}.note", f"Note on {label}", measured.note,
        lambda text: sheet.put(entry, replace(measured, note=text.strip())), placeholder="Note",
    )  # fmt: skip
    parts = [note, wrong_note]
    if entry in ENTRY_RULES and ENTRY_RULES[entry].read_at:
        read_at, wrong = entries.number(
            f"{key}.read_at", f"{label} read at", show_number(measured.read_at),
            lambda number: sheet.put(entry, replace(measured, read_at=number)), low=0, high=60, unit="°C",
            empty=lambda: sheet.put(entry, replace(measured, read_at=None)),
            placeholder="25" if entry == "conductivity" else "water",
        )  # fmt: skip
        parts += [
            node("label", "", node("span", "unit", text="read at"), read_at, node("span", "unit", text="°C")),
            wrong,
        ]
    parts.append(
        entries.tick(
            f"{key}.assumed",
            "assumed",
            measured.assumed,
            lambda ticked: sheet.put(entry, replace(measured, assumed=ticked)),
        )
    )
    parts.append(
        node(
            "button",
            "link danger",
            text="Remove",
            key=f"{key}:remove",
            type="button",
            on=lambda pressed: entries.refuse(key, refusal=sheet.put(entry, None)),
            aria_label=f"Remove {label}",
        )
    )
    return node("div", "about", *parts)


def _paste(sheet: Sheet) -> Node:
    """The link that opens the panel for a pasted sheet."""

    def begin(value: object) -> None:
        sheet.desk.pasting = Pasting(sheet.water.id)

    return node("button", "link", text="Paste an analysis", key=f"{sheet.key}:paste", type="button", on=begin)


def _add_entry(sheet: Sheet) -> list[Node]:
    """The list of analysis keys that the sheet does not have yet."""
    own = [acid.id for acid in sheet.desk.scenario.acids]
    absent = [entry for entry in (*ENTRY_RULES, *own) if entry not in sheet.analysis.entries]

    def add(entry: str) -> None:
        unit = next(iter(sheet.units(entry)))
        refusal = sheet.put(entry, Measured(value=START.get(entry, 0.0), unit=unit))
        sheet.desk.entries.refuse(f"{sheet.key}:add", refusal=refusal)

    choices = [
        Choice(entry, sheet.label(entry), unit_text(next(iter(sheet.units(entry)))), entry)
        for entry in absent
    ]
    return [
        *picker(
            f"{sheet.key}:add",
            "+ Add a parameter",
            {"Parameters": choices},
            add,
            look="link",
            hint="Search parameters",
        ),
        sheet.desk.refusal(f"{sheet.key}:add"),
    ]


START: dict[str, float] = {"ph": 7.5, "temperature": 10.0}
"""Value an added entry starts with, where 0 would be no water."""


# ---- what the analysis says about itself ---------------------------------------------------------------


def _findings(sheet: Sheet) -> list[Node]:
    """Ion balance, dissolved solids and conductivity against what was entered, and every finding."""
    try:
        found = sheet.desk.examination(sheet.analysis, sheet.system)
    except (AnalysisError, ValueError) as error:
        return [node("ul", "findings", node("li", "error", text=beside(str(error))))]
    balance = number_text(found.balance.percent, 1, signed=True)
    word, look = ("good", "good") if found.balance.acceptable else ("▲ poor", "poor")
    lines = [
        ("Ion balance", f"{balance} % {word}", look),
        ("Cations, anions", f"{found.balance.cations:.2f}, {found.balance.anions:.2f} meq/L", ""),
        ("Dissolved solids", _compared(found.tds, found.tds_entered, "mg/L"), ""),
        (
            f"Conductivity {found.conductivity_at:g} °C",
            _compared(found.conductivity, found.conductivity_entered, "µS/cm"),
            "",
        ),
    ]
    grid = [
        part
        for caption, words, look in lines
        for part in (node("span", text=caption), node("span", look, text=words))
    ]
    # What is assumed is marked in the table below, where it can be changed.
    said = [note for note in found.notes if note.text != ASSUMED]
    notes = [
        node("li", LEVELS[note.level], text=f"{note.where}: {note.text}", key=f"{sheet.key}:note-{place}")
        for place, note in enumerate(said)
    ]
    return [node("div", "balance", *grid), node("ul", "findings", *notes)]


def _compared(computed: float, entered: float | None, unit: str) -> str:
    text = f"{number_text(computed, 0)} {unit} computed"
    return text if entered is None else f"{text}, {number_text(entered, 0)} entered"


def _closing(sheet: Sheet) -> list[Node]:
    desk, water_id, season = sheet.desk, sheet.water.id, sheet.season

    def close(ion: str) -> None:
        def change(scenario: Scenario) -> None:
            scenario.water(water_id).analyses[season].close_with = ion

        desk.entries.refuse(f"{sheet.key}:close", refusal=desk.edit("Close the ion balance", change))

    words = {"none": "leave it open", "sodium": "adjust sodium", "chloride": "adjust chloride"}
    return [
        node(
            "div",
            "form",
            node("span", "caption", text="Rest of the ion balance"),
            desk.entries.choice(
                f"{sheet.key}.close_with", "Rest of the ion balance", words, sheet.analysis.close_with, close
            ),
            desk.refusal(f"{sheet.key}:close"),
        )
    ]


PROVENANCE: dict[str, str] = {
    "lab": "Laboratory", "sampled": "Sampled", "file": "File", "by": "Entered by", "note": "Remarks",
}  # fmt: skip
"""Caption of each part of the provenance."""


def _provenance(sheet: Sheet) -> list[Node]:
    desk, water_id, season = sheet.desk, sheet.water.id, sheet.season

    def take(part: str, text: str) -> str:
        def change(scenario: Scenario) -> None:
            analysis = scenario.water(water_id).analyses[season]
            analysis.provenance = {**analysis.provenance, part: text.strip()}

        return desk.edit(f"Provenance of {sheet.water.title}", change)

    def note(scenario: Scenario, text: str) -> None:
        scenario.water(water_id).note = text.strip()

    box, refusal = desk.entries.text(
        f"waters.{water_id}.note", "Note on the water", sheet.water.note,
        lambda text: desk.edit(f"Note on {sheet.water.title}", lambda scenario: note(scenario, text)),
    )  # fmt: skip
    parts = [node("span", "caption", text="Note on the water"), box, refusal]
    for part, caption in PROVENANCE.items():
        box, refusal = desk.entries.text(
            f"{sheet.key}:provenance.{part}", caption, sheet.analysis.provenance.get(part, ""),
            lambda text, part=part: take(part, text),
        )  # fmt: skip
        parts += [node("span", "caption", text=caption), box, refusal]
    return [node("div", "form", *parts)]
