"""Tables of the basis view that are the same for every scenario: constants, what is left out, readouts."""

from __future__ import annotations

from collections.abc import Iterator

from explorer.app.live_view import Node, node
from explorer.app.tables import Group, Row, over, table
from explorer.app.text import unit_text
from explorer.chemistry.constants import Constant, dissolved, log_henry_co2, solids
from explorer.scenario.readouts import NO_VALUE, READOUTS
from explorer.scenario.words import number_text, short_number
from explorer.studies.methods import confidence_text, reaction_text
from explorer.studies.outside_checks import OutsideCheck, by_topic

HENRY = (
    "CO₂(g) = CO₂(aq), mol/(kg atm)",
    0.0,
    100.0,
    "Plummer & Busenberg 1982, Geochim. Cosmochim. Acta 46:1011",
)


def constants_table() -> Node:
    """Every constant the engine uses."""
    heading = ["Reaction", over("log K", "25 °C"), "Fitted over", "Source", "Confidence"]
    return table("Constants that are used", heading, _used(), words=(0, 2, 3, 4), searched=True)


def _used() -> Iterator[Row | Group]:
    yield Group("Dissolved species")
    yield from (_constant(one) for one in dissolved() if one.used)
    yield Group("Solids")
    yield from (_constant(one) for one in solids().values() if one.used)
    yield Group("Gas")
    name, low, high, source = HENRY
    yield Row(
        [name, number_text(float(log_henry_co2(25.0)), 3), _range(low, high), source, "seen in the source"]
    )


def left_out_table() -> Node:
    """Reactions that were looked at and left out."""
    rows = [
        Row([reaction_text(one), number_text(one.log_k25, 3), one.note, one.source])
        for one in (*dissolved(), *solids().values())
        if not one.used
    ]
    heading = ["Reaction", over("log K", "25 °C"), "Why it is left out", "Source"]
    return table("Reactions left out", heading, rows, words=(0, 2, 3), searched=True)


def readouts_table() -> Node:
    """What every readout means and where its definition is from."""
    groups: dict[str, list[Row]] = {}
    for readout in READOUTS.values():
        cells = [readout.label, unit_text(readout.unit) or NO_VALUE, readout.meaning, readout.source]
        groups.setdefault(readout.group, []).append(Row(cells))
    rows = [line for name, lines in groups.items() for line in (Group(name), *lines)]
    heading = ["Readout", "Unit", "Meaning", "Source"]
    return table("Readouts", heading, rows, words=range(4), searched=True)


def checks_table() -> Node:
    """Published figures beside those of the engine."""
    rows = [line for topic, found in by_topic() for line in (Group(topic), *map(_check, found))]
    heading = ["Published case", "Printed", "Engine", "Difference", "Allowed", "Reason", "Source"]
    return table("Outside checks", heading, rows, words=(0, 5, 6), searched=True)


def _check(one: OutsideCheck) -> Row:
    case = node("span", "", node("span", text=one.case), node("small", text=one.about) if one.about else None)
    printed, engine, difference, allowed = one.numbers
    if one.parts:
        difference = node("span", "status bad", text=f"▲ {difference}")
    unit = unit_text(one.unit)
    first = node("span", "", node("span", text=printed), node("small", text=unit) if unit else None)
    return Row([case, first, engine, difference, allowed, one.why, one.source])


def _constant(one: Constant) -> Row:
    span = _range(one.low_c, one.high_c) + (", held beyond" if one.hold else "")
    source = node(
        "span", "", node("span", text=one.source), node("small", text=one.note) if one.note else None
    )
    return Row([reaction_text(one), number_text(one.log_k25, 3), span, source, confidence_text(one)])


def _range(low: float, high: float) -> str:
    return f"{short_number(low)} to {short_number(high)} °C" if low != high else f"{short_number(low)} °C"
