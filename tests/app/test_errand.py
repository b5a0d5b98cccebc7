"""Long calculations of a view: one at a time, newest first, with progress and a way to stop."""

import asyncio
import threading
from collections.abc import Callable, Iterator

import pytest

from explorer.app import errand as errands
from explorer.app.errand import UNFORESEEN, Errand, progress
from explorer.app.runner import Conflate
from explorer.studies.progress import Watch


@pytest.fixture(autouse=True)
def _impatient(monkeypatch: pytest.MonkeyPatch) -> None:
    """Progress is told at once and looked at often."""
    monkeypatch.setattr(errands, "PATIENCE", 0.0)
    monkeypatch.setattr(errands, "LOOK", 0.002)


class Step:
    """A calculation whose second result comes when it is let go on."""

    def __init__(self) -> None:
        self.began, self.go_on = threading.Event(), threading.Event()
        self.stopped = False

    def __call__(self, watch: Watch) -> Iterator[str]:
        yield "coarse"
        watch.progress(0.4)
        self.began.set()
        for _ in range(2000):
            if self.go_on.wait(0.005):
                yield "fine"
                return
            self.stopped = watch.stop()
            watch.done(0.4)


async def until(condition: Callable[[], object]) -> None:
    for _ in range(5000):
        if condition():
            return
        await asyncio.sleep(0.002)
    raise AssertionError("waited in vain")


def driven(drive: Callable[[Errand, list], object]) -> list:
    """Results shown while ``drive`` has the errand, inside an event loop."""
    shown: list[str] = []

    async def run() -> None:
        errand = Errand()
        await drive(errand, shown)
        await until(lambda: not errand._tasks)

    asyncio.run(run())
    return shown


def test_without_a_loop_everything_is_shown_at_once() -> None:
    """Scripts and tests see the last result when ``start`` returns."""
    shown, errand = [], Errand()
    errand.start(lambda watch: iter("ab"), shown.append)
    assert shown == ["a", "b"] and not errand.under_way and not errand.busy


def test_coarse_result_is_shown_while_the_fine_one_is_made() -> None:
    """Progress is told meanwhile and gone afterwards."""

    async def drive(errand: Errand, shown: list) -> None:
        step = Step()
        errand.start(step, shown.append, rest=0.0)
        await until(lambda: errand.busy and errand.part == pytest.approx(0.4))
        assert shown == ["coarse"]
        step.go_on.set()
        await until(lambda: not errand.under_way)
        assert not errand.busy and errand.part == 0

    assert driven(drive) == ["coarse", "fine"]


def test_a_newer_calculation_takes_the_place_of_an_older_one() -> None:
    """The older one is told to stop and what it still brings is not shown."""

    async def drive(errand: Errand, shown: list) -> None:
        old = Step()
        errand.start(old, shown.append, rest=0.0)
        await until(old.began.is_set)
        errand.start(lambda watch: iter(["newer"]), shown.append, rest=0.0)
        await until(lambda: old.stopped and not errand.under_way)

    assert driven(drive) == ["coarse", "newer"]


def test_inputs_have_to_rest_before_anything_begins() -> None:
    """Of starts that follow each other quickly only the last is run."""
    begun = []

    async def drive(errand: Errand, shown: list) -> None:
        for name in "abc":
            errand.start(lambda watch, name=name: begun.append(name) or iter([name]), shown.append, rest=0.05)
            assert errand.under_way
        await until(lambda: not errand.under_way)

    assert driven(drive) == ["c"]
    assert begun == ["c"]


def test_stopped_by_the_user_what_was_shown_stands() -> None:
    """The page says so and offers to go on; a new start clears that."""

    async def drive(errand: Errand, shown: list) -> None:
        step = Step()
        errand.start(step, shown.append, rest=0.0)
        await until(lambda: errand.busy and shown)
        bar = progress(errand, lambda: None, "Progress")
        assert bar.find("stop").properties["text"] == "Stop"
        bar.find("stop").on(None)
        assert errand.stopped and not errand.under_way
        assert progress(errand, lambda: None, "Progress").words() == "Stopped. Go on"
        errand.start(lambda watch: iter(["again"]), shown.append, rest=0.0)
        assert not errand.stopped
        await until(lambda: not errand.under_way and step.stopped)

    assert driven(drive) == ["coarse", "again"]


def test_stop_without_work_does_nothing() -> None:
    """There is nothing to go on with."""
    errand = Errand()
    errand.stop()
    assert not errand.stopped


@pytest.mark.parametrize("in_loop", [False, True])
def test_refusal_is_kept_until_the_next_success(in_loop: bool) -> None:
    """A sentence for the user, shown beside the plot."""

    def refuse(watch: Watch) -> Iterator[str]:
        raise ValueError("nothing may be off")

    async def drive(errand: Errand, shown: list) -> None:
        errand.start(refuse, shown.append, rest=0.0)
        await until(lambda: not errand.under_way)
        assert progress(errand, lambda: None, "").words() == "nothing may be off"
        errand.start(lambda watch: iter(["good"]), shown.append, rest=0.0)
        await until(lambda: not errand.under_way)
        assert errand.refusal == ""

    if in_loop:
        assert driven(drive) == ["good"]
    else:
        errand = Errand()
        errand.start(refuse, lambda result: None)
        assert errand.refusal == "nothing may be off"


def test_what_is_shown_to_its_end_is_not_calculated_again() -> None:
    """Only other inputs are; what was stopped half-way, or has been forgotten, is calculated anew."""
    shown, errand = [], Errand()

    def start(results: str, inputs: str) -> None:
        errand.start(lambda watch: iter(results), shown.append, inputs=lambda: inputs)

    start("ab", "one")
    start("cd", "one")
    assert shown == ["a", "b"]
    start("ef", "two")
    start("gh", "one")
    assert "".join(shown) == "abefgh"
    errand.forget()
    start("i", "one")
    assert shown[-1] == "i"


def test_unforeseen_error_is_a_sentence_and_not_a_traceback(caplog: pytest.LogCaptureFixture) -> None:
    """The log has the rest."""

    def fail(watch: Watch) -> Iterator[str]:
        raise KeyError("secret")

    async def drive(errand: Errand, shown: list) -> None:
        errand.start(fail, shown.append, rest=0.0)
        await until(lambda: not errand.under_way)
        assert errand.refusal == UNFORESEEN

    driven(drive)
    assert "secret" in caplog.text


def test_long_calculations_give_way_to_live_ones() -> None:
    """A study begins its next step once the sliders have their answers, of whatever page."""
    told: list[str] = []
    held = threading.Event()

    def live() -> None:
        held.wait()
        told.append("live")

    def study(watch: Watch) -> Iterator[str]:
        told.append("study")
        yield "done"

    async def story() -> None:
        errand, shown = Errand(), asyncio.Event()
        Conflate().submit(live, lambda result: None)
        await asyncio.sleep(0)
        errand.start(study, lambda result: shown.set(), rest=0.0)
        await asyncio.sleep(0.1)
        assert told == []
        held.set()
        await shown.wait()

    asyncio.run(story())
    assert told == ["live", "study"]
