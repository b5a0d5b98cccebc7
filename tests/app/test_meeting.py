"""The meeting view, without a browser: one large plot and the dials in play."""

import pytest

from explorer.app.files import Shelf
from explorer.app.main import build
from explorer.app.shell import Shell
from explorer.scenario.editing import add_step
from explorer.scenario.shipped import shipped


@pytest.fixture
def shell() -> Shell:
    """The page of the shipped river and wellfield in the meeting view."""
    shell = build(shipped()["amber"], shelf=Shelf())
    shell.session.choose(meeting=True)
    return shell


def dials(shell: Shell) -> list[str]:
    return [
        node.key.removeprefix("strip:")
        for node in shell.strip.nodes
        if node.properties.get("class") == "dial"
    ]


def test_one_plot_is_shown_large_and_can_be_chosen(shell: Shell) -> None:
    """It carries the label of its axis; back at the desk all four are there again at their usual size."""
    view = shell.views["sweep"]
    assert [name for name, card in view.cards.items() if card.visible] == ["ph"]
    shell.session.choose(large="buffer")
    assert [name for name, card in view.cards.items() if card.visible] == ["buffer"]
    plot = view.plots.plots["ph"].figure
    assert plot.xaxis[0].major_label_text_font_size == "16.5px" and plot.xaxis[0].axis_label is not None
    shell.session.choose(meeting=False)
    assert all(card.visible for card in view.cards.values())
    assert plot.xaxis[0].major_label_text_font_size == "11px" and plot.xaxis[0].axis_label is None


def test_strip_has_season_temperature_shares_and_what_the_user_adds(shell: Shell) -> None:
    """A dial turned there is turned everywhere; one that is added can be taken off."""
    assert "winter · 6.8 °C" in shell.strip.nodes[0].words()
    assert dials(shell) == ["waters.river.share", "waters.well.share"]
    dose = next(address for address in shell.session.dials if address.endswith(".dose"))
    shell.strip.report(f"strip:add:{dose}")
    assert dials(shell)[-1] == dose
    shell.strip.report(dose, "2,5")
    assert shell.session.value(dose) == 2.5
    shell.strip.report(f"{dose}:away")
    assert dose not in dials(shell)


def test_swept_dial_is_on_the_strip(shell: Shell) -> None:
    """Whatever is on the x axis can be turned there."""
    shell.session.edit("Add", lambda scenario: add_step(scenario, "", "dose", "sodium_hydroxide"))
    shell.session.set_sweep(dial="train.sodium_hydroxide.dose", start=0, stop=20)
    assert dials(shell)[-1] == "train.sodium_hydroxide.dose"


def test_strip_is_empty_at_the_desk(shell: Shell) -> None:
    """There the rail has all dials."""
    shell.session.choose(meeting=False)
    assert dials(shell) == []


def test_meeting_view_opens_the_sweep(shell: Shell) -> None:
    """From any other view."""
    shell.session.choose(meeting=False)
    shell.views.open("ledger")
    shell.session.choose(meeting=True)
    assert shell.views.shown == "sweep"
