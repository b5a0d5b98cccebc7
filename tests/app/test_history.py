"""Undo and redo, whatever was done in whatever order; kept options are never touched."""

from collections.abc import Callable
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from explorer.app.history import MOST_STEPS
from explorer.app.state import MERGE_SECONDS, Session
from explorer.scenario.files import dumps, open_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.shipped import shipped

NAMES = ("quartz", "ember", "juniper", "harbor")
"""Scenarios with the fewest parts and with the most: options, side streams, holds, tolerances, seasons."""


class Clock:
    now = 0.0

    def __call__(self) -> float:
        return self.now


class Idle:
    """A runner that calculates nothing: only the inputs count here."""

    def submit(self, compute: Callable, apply: Callable) -> None:
        pass


def turn(session: Session, data: st.DataObject) -> None:
    """Some dial somewhere in its range, or a little out of it."""
    dial = session.dials[data.draw(st.sampled_from(sorted(session.dials)))]
    high = dial.high if dial.high is not None else 2 * abs(dial.value) + 1
    session.turn(dial.address, data.draw(st.floats(dial.low - 1, high + 1)))


def _edit(change: Callable[[Scenario], None]) -> Callable[[Session, st.DataObject], None]:
    return lambda session, data: session.edit("Change", change) and None


def _rename(scenario: Scenario) -> None:
    scenario.title = f"{scenario.title[:20]} again"


def _drop_step(scenario: Scenario) -> None:
    scenario.train = scenario.train[:-1]


def _switch_off(scenario: Scenario) -> None:
    scenario.waters[0].on = not scenario.waters[0].on


def _turn_round(scenario: Scenario) -> None:
    scenario.train = scenario.train[::-1]


def _break(scenario: Scenario) -> None:
    scenario.season = "never"


def season(session: Session, data: st.DataObject) -> None:
    session.choose_season(data.draw(st.sampled_from(session.scenario.seasons)))


def opened(session: Session, data: st.DataObject) -> None:
    name = data.draw(st.sampled_from(NAMES))
    session.replace(open_scenario(shipped()[name]), f"{name}.json")


ACTS: list[Callable[[Session, st.DataObject], Any]] = [
    turn, turn, turn, *map(_edit, (_rename, _drop_step, _switch_off, _turn_round, _break)), season, opened,
]  # fmt: skip


@pytest.mark.parametrize("name", NAMES)
@settings(max_examples=8)
@given(data=st.data())
def test_undo_leads_back_through_every_state_and_redo_forward_again(name, data):
    """A step is what changed the scenario: a refused one is none, and turns that follow quickly are one."""
    clock = Clock()
    session = Session(open_scenario(shipped()[name]), runner=Idle(), clock=clock)
    states = [dumps(session.scenario)]
    acts = data.draw(st.lists(st.sampled_from(ACTS), min_size=1, max_size=12))
    for act in acts:
        clock.now += 10 * MERGE_SECONDS
        steps = len(session.work.past)
        act(session, data)
        if len(session.work.past) > steps:
            states.append(dumps(session.scenario))
        assert dumps(session.scenario) == states[-1]
    assert len(states) == len(session.work.past) + 1 <= MOST_STEPS
    for expected in [*states[-2::-1], states[0]]:
        session.undo()
        assert dumps(session.scenario) == expected
    assert not session.can_undo
    # what was opened on the way is the file that counts as saved
    assert session.unsaved == (opened in acts and states[0] != dumps(Scenario.from_dict(session.work.saved)))
    for expected in [*states[1:], states[-1]]:
        session.redo()
        assert dumps(session.scenario) == expected
    assert not session.can_redo


@pytest.mark.parametrize("name", NAMES)
@settings(max_examples=8)
@given(data=st.data())
def test_something_new_after_an_undo_ends_the_future_and_keeps_the_past(name, data):
    """However undo, redo and changes follow each other, undoing everything leads to the beginning."""
    clock = Clock()
    session = Session(open_scenario(shipped()[name]), runner=Idle(), clock=clock)
    first = dumps(session.scenario)
    travel = [lambda session, data: session.undo(), lambda session, data: session.redo()]
    for act in data.draw(st.lists(st.sampled_from([*ACTS, *travel, *travel]), min_size=3, max_size=15)):
        clock.now += data.draw(st.sampled_from((0.1, 10.0)))
        future, past = len(session.work.future), len(session.work.past)
        act(session, data)
        if act not in travel and len(session.work.past) > past:
            assert not session.can_redo
        else:
            assert len(session.work.future) in (future - 1, future, future + 1)
    while session.can_undo:
        session.undo()
    assert dumps(session.scenario) == first


@pytest.mark.parametrize("name", [name for name in NAMES if open_scenario(shipped()[name]).options])
@settings(max_examples=8)
@given(data=st.data())
def test_options_stay_as_they_were_kept(name, data):
    """No turn, edit, undo or redo changes a kept copy."""
    session = Session(open_scenario(shipped()[name]), runner=Idle(), clock=Clock())
    kept = [option.to_dict() for option in session.scenario.options]
    acts = [act for act in ACTS if act is not opened]
    for act in data.draw(st.lists(st.sampled_from(acts), min_size=1, max_size=12)):
        act(session, data)
        assert [option.to_dict() for option in session.scenario.options] == kept
    session.undo()
    session.redo()
    assert [option.to_dict() for option in session.scenario.options] == kept
