"""The session: turning, editing, history, results."""

import pytest

from explorer.app.calculation import Results, solve
from explorer.app.state import Session
from explorer.scenario.files import ScenarioError, dumps, open_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.shipped import shipped
from tests.app.later import Later

WELL = "waters.well.share"


class Clock:
    now = 0.0

    def __call__(self) -> float:
        return self.now


@pytest.fixture
def clock() -> Clock:
    return Clock()


@pytest.fixture
def session(clock: Clock) -> Session:
    """The shipped river and wellfield, solved."""
    session = Session(open_scenario(shipped()["amber"]), clock=clock)
    session.solve_now()
    return session


def test_turning_a_dial_recalculates_and_moves_the_other_shares(session: Session) -> None:
    """Results and shares follow; the change is unsaved and can be undone."""
    before = float(session.point.readout("ph"))
    assert session.turn(WELL, 70) == ""
    assert session.value("waters.river.share") == 30
    assert float(session.point.readout("ph")) != before
    assert session.unsaved and session.can_undo


def test_refused_value_is_a_sentence_and_changes_nothing(session: Session) -> None:
    """The sentence names the dial and what is allowed."""
    before = dumps(session.scenario)
    sentence = session.turn(WELL, 170)
    assert sentence.startswith(WELL) and "allowed" in sentence
    assert dumps(session.scenario) == before
    assert not session.can_undo


def test_a_drag_is_one_undo_step(session: Session, clock: Clock) -> None:
    """Turns of one dial in quick succession are undone together; after a pause a new step begins."""
    for share in (41, 45, 52):
        clock.now += 0.1
        session.turn(WELL, share)
    clock.now += 5
    session.turn(WELL, 60)
    session.undo()
    assert session.value(WELL) == 52
    session.undo()
    assert session.value(WELL) == 40
    assert not session.can_undo and not session.unsaved


def test_redo_brings_back_what_was_undone_until_something_new_happens(session: Session) -> None:
    """A new turn forgets the undone future."""
    session.turn(WELL, 60)
    session.undo()
    session.redo()
    assert session.value(WELL) == 60
    session.undo()
    session.turn(WELL, 10)
    assert not session.can_redo


def test_undo_brings_back_the_results_too(session: Session) -> None:
    """The operating point is that of the restored inputs."""
    before = float(session.point.readout("ccpp"))
    session.turn(WELL, 60)
    session.undo()
    assert float(session.point.readout("ccpp")) == pytest.approx(before, rel=1e-12)


def test_failed_edit_leaves_the_old_state(session: Session) -> None:
    """An edit that breaks a rule is refused as a whole, with the path of the field."""

    def half_done(scenario: Scenario) -> None:
        scenario.title = "Changed"
        scenario.waters[0].share = 80

    before = dumps(session.scenario)
    assert "waters" in session.edit("Half done", half_done)
    assert dumps(session.scenario) == before
    assert not session.can_undo


def test_edit_rebuilds_and_can_be_undone(session: Session) -> None:
    """Structural changes announce themselves and are one step."""
    seen = []
    session.param.watch(lambda event: seen.append(event.new), "structure")
    assert session.edit("Remove a step", lambda scenario: scenario.train.clear()) == ""
    assert len(seen) == 1 and session.undo_label == "Remove a step"
    session.undo()
    assert len(session.scenario.train) == 1


def test_sweep_of_a_removed_step_moves_to_a_dial_that_exists(session: Session) -> None:
    """Removing what is swept does not leave the page without a sweep."""
    assert session.set_sweep(dial="train.hypo.dose", start=0, stop=3) == ""
    assert session.swept.address == "train.hypo.dose"
    assert session.edit("Remove a step", lambda scenario: scenario.train.clear()) == ""
    assert session.swept.address.endswith(".share")


def test_inputs_without_answer_keep_the_last_result_and_say_why(
    monkeypatch: pytest.MonkeyPatch, session: Session
) -> None:
    """What cannot be calculated comes as a sentence; the old result stays, marked as stale, until it can."""
    with monkeypatch.context() as broken:
        broken.setattr("explorer.app.calculation.evaluate", _contradiction)
        before = session.point
        session.turn(WELL, 60)
        assert session.message == "waters[0]: the analysis contradicts itself"
        assert session.stale and session.point is before
    session.turn(WELL, 61)
    assert session.message == "" and not session.stale


def _contradiction(scenario: Scenario) -> None:
    raise ScenarioError("waters[0]", "the analysis contradicts itself")


def test_season_is_a_step_and_changes_the_point(session: Session) -> None:
    """The season belongs to the scenario; an unknown one is refused."""
    before = float(session.point.readout("temperature"))
    assert session.choose_season("summer") == ""
    assert float(session.point.readout("temperature")) != before
    assert session.choose_season("monsoon") != ""


def test_saving_clears_the_mark_and_undo_brings_it_back(session: Session) -> None:
    """Unsaved means: other than the file."""
    session.turn(WELL, 60)
    session.mark_saved("plant.json")
    assert not session.unsaved
    session.undo()
    assert session.unsaved


def test_opening_loses_nothing(session: Session) -> None:
    """An opened scenario has nothing unsaved; undo leads back to the one before with all its changes."""
    session.turn(WELL, 60)
    session.replace(open_scenario(shipped()["moss"]), "moss.json")
    assert not session.unsaved
    assert session.file_name == "moss.json"
    assert session.scenario.title.startswith("Moss")
    session.undo()
    assert session.value(WELL) == 60 and session.unsaved
    session.undo()
    assert session.value(WELL) == 40


def test_moving_along_the_sweep_keeps_the_curve(session: Session) -> None:
    """Turning the swept share solves the operating point only; the kept curve equals a new one."""
    kept = session.swept
    session.turn(WELL, 70)
    assert session.swept is kept
    assert kept.outcome.readout("ph") == pytest.approx(solve(session.scenario).swept.outcome.readout("ph"))


def test_any_other_dial_makes_a_new_curve(session: Session) -> None:
    """Also when it was turned while another calculation waited."""
    session.runner = Later()
    kept = session.swept
    session.turn("train.hypo.dose", 2.0)
    session.turn(WELL, 70)
    session.runner.work()
    assert session.swept is not kept
    assert float(session.point.readout("free_chlorine")) == pytest.approx(2.0)


def test_results_belong_to_the_inputs_they_were_computed_from(session: Session) -> None:
    """A dial turned meanwhile does not leak into a calculation that already runs."""
    session.runner = Later()
    session.turn(WELL, 60)
    running = session.runner.waiting
    session.turn(WELL, 90)
    session.runner.waiting = running
    session.runner.work()
    assert float(session.point.readout("nitrate")) == pytest.approx(0.6 * 29 + 0.4 * 6.2, rel=1e-6)
    assert session.solved.water("well").share == 60 and session.scenario.water("well").share == 90


def test_unexpected_failure_is_one_sentence(monkeypatch: pytest.MonkeyPatch, session: Session) -> None:
    """A fault of the program shows no traceback and keeps the result."""

    def broken(*arguments: object) -> Results:
        raise RuntimeError("inside")

    monkeypatch.setattr("explorer.app.calculation.evaluate", broken)
    before = session.point
    session.turn(WELL, 60)
    assert session.point is before and session.stale
    assert "inside" not in session.message and session.message


def test_copy_of_the_work_is_independent(session: Session) -> None:
    """A reloaded tab goes on from the same place without sharing anything with the old page."""
    session.turn(WELL, 60)
    session.choose(family="chlorine")
    again = Session(session.work.copy())
    again.turn(WELL, 10)
    assert session.value(WELL) == 60
    assert again.choices == {"family": "chlorine"}
    again.undo()
    again.undo()
    assert again.value(WELL) == 40
