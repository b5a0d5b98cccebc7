"""What a scenario is about stands at the head of the rail, and is written there."""

import pytest

from explorer.app.about_card import NO_NOTE, first_sentence
from explorer.app.plot_heads import family_choice, readout_choice
from explorer.app.rail import Rail
from explorer.app.state import Session
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped


def opened(name: str = "moss") -> Rail:
    session = Session(open_scenario(shipped()[name]))
    session.solve_now()
    return Rail(session)


def story(rail: Rail) -> str:
    return rail.shown("about:open").words()


@pytest.mark.parametrize("name", shipped())
def test_every_example_tells_its_story_in_a_sentence(name: str) -> None:
    """The first of its note, whole."""
    words = story(opened(name))
    assert 40 < len(words) < 200 and words[-1] in ".?"


@pytest.mark.parametrize(
    ("note", "first"),
    [
        ("Within 0.2 of pH 8? More follows.", "Within 0.2 of pH 8?"),
        ("no stop at all", "no stop at all"),
        ("One line.\nAnother.", "One line."),
        ("", ""),
    ],
)
def test_a_sentence_ends_at_a_stop_and_not_at_a_decimal(note: str, first: str) -> None:
    """What follows the first sentence is for the report."""
    assert first_sentence(note) == first


def test_the_note_is_written_in_one_step() -> None:
    """Opened, the whole note can be written; one step of undo takes it back."""
    rail = opened("amber")
    before = rail.desk.scenario.note
    rail.report("about:open")
    rail.report("about:note", "Spring blend. <b>Not</b> final.")
    assert rail.desk.scenario.note == "Spring blend. <b>Not</b> final."
    assert story(rail) == "Spring blend."
    rail.desk.session.undo()
    assert rail.desk.scenario.note == before
    rail.report("about:note", "")
    assert story(rail) == NO_NOTE


def test_water_that_nobody_is_to_drink_is_said_so() -> None:
    """A box below the note."""
    rail = opened("amber")
    rail.report("about:open")
    rail.report("about:potable", False)
    assert not rail.desk.scenario.potable


def test_a_scenario_says_what_its_sweep_shows() -> None:
    """Until the user chooses something else; another scenario is shown as it wants to be."""
    session = opened("harbor").desk.session
    assert (readout_choice(session), family_choice(session)) == ("total_chlorine", "chlorine")
    session.choose(readout="hardness", family="silicate")
    assert (readout_choice(session), family_choice(session)) == ("hardness", "silicate")
    session.replace(open_scenario(shipped()["amber"]))
    assert (readout_choice(session), family_choice(session)) == ("ccpp", "carbonate")
