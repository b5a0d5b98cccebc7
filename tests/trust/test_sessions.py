"""Many pages of one server: none knows of another, and one that is closed leaves nothing behind."""

import asyncio
import gc
import logging
import subprocess
import sys
import weakref
from collections.abc import Iterator
from pathlib import Path

import pytest

from explorer.app import state
from explorer.app.files import Shelf, tab_name
from explorer.app.main import build
from explorer.app.state import Session
from tests.serving import running, until
from tests.trust.visitor import Visitor

ROOT = Path(__file__).resolve().parents[2]

LIFETIME = 2_000
"""Milliseconds a page that has gone is kept by the server under test."""

RIVER = "waters.river.share:slider"
WAVES, PAGES = 3, 4


@pytest.fixture
def born(monkeypatch: pytest.MonkeyPatch) -> list[weakref.ref[Session]]:
    """Every session that is made, without holding it."""
    made: list[weakref.ref[Session]] = []
    original = Session.__init__

    def noted(self: Session, *arguments: object, **settings: object) -> None:
        original(self, *arguments, **settings)
        made.append(weakref.ref(self))

    monkeypatch.setattr(state.Session, "__init__", noted)
    return made


@pytest.fixture(autouse=True)
def quiet() -> Iterator[None]:
    """No log of every event: the records that are kept for the report of a test would hold the pages."""
    logging.disable(logging.INFO)
    yield
    logging.disable(logging.NOTSET)


@pytest.fixture
def url(born: list[weakref.ref[Session]]) -> Iterator[str]:
    """A server that forgets pages soon."""
    with running(session_lifetime=LIFETIME) as found:
        yield found


def alive(born: list[weakref.ref[Session]]) -> list[Session]:
    gc.collect()
    return [session for found in born if (session := found()) is not None]


async def opened(url: str, query: str = "") -> Visitor:
    visitor = Visitor(url, query)
    await visitor.open()
    return visitor


def test_what_one_page_does_no_other_sees(url: str, born: list[weakref.ref[Session]]) -> None:
    """Two pages, two sessions, two scenarios; a slider moved in one stays where it was in the other."""

    async def story() -> None:
        one, other = await opened(url), await opened(url)
        before = other.received
        slider = next(found for found in one.sliders() if found.key == RIVER)
        await one.move(slider, 33)
        await one.close()
        moved, still = (found() for found in born)
        assert moved.value("waters.river.share") == 33 and moved.unsaved
        assert still.value("waters.river.share") == 60 and not still.unsaved
        assert still.scenario is not moved.scenario and still.work is not moved.work
        assert "33" not in other.texts() or other.received == before
        assert one.errors == other.errors == []
        await other.close()

    asyncio.run(story())


def test_closed_pages_leave_no_session_behind(url: str, born: list[weakref.ref[Session]]) -> None:
    """Pages opened, used and closed, again and again: none of their sessions lives on."""

    async def wave() -> None:
        visitors = [await opened(url) for _ in range(PAGES)]
        for visitor in visitors:
            await visitor.move(next(found for found in visitor.sliders() if found.key == RIVER), 40)
        for visitor in visitors:
            await visitor.close()
            assert visitor.errors == []

    for number in range(1, WAVES + 1):
        asyncio.run(wave())
        assert len(born) >= number * PAGES
        until(lambda: not alive(born), "the end of all sessions")


def test_a_working_copy_is_taken_up_by_its_own_name_only() -> None:
    """A name that the server did not give is not taken over: a link cannot choose it for others."""
    shelf = Shelf()
    first = build(shelf=shelf)
    first.session.turn("waters.river.share", 33)
    again = build(asked=first.files.tab, shelf=shelf)
    assert again.files.tab == first.files.tab and again.session.value("waters.river.share") == 33
    chosen = build(asked="chosen-by-a-link", shelf=shelf)
    assert chosen.files.tab not in ("chosen-by-a-link", first.files.tab)
    assert shelf.take("chosen-by-a-link") is None
    assert tab_name() != tab_name()


_THREE_PAGES = """
import gc, weakref
from explorer.app.files import Shelf
from explorer.app.main import build
shelf = Shelf(limit=2)
pages = [build(shelf=shelf) for _ in range(3)]
print([shelf.take(page.files.tab) is not None for page in pages])
sessions = [weakref.ref(page.session) for page in pages]
pages.clear()
gc.collect()
print([session() for session in sessions])
"""


def test_working_copies_are_bounded() -> None:
    """The oldest goes when there are too many, and the record of a page holds none; in a process of its own,
    for what other tests left running may hold a page a while longer."""
    ended = subprocess.run([sys.executable, "-c", _THREE_PAGES], capture_output=True, text=True, cwd=ROOT)
    assert ended.stdout.splitlines() == ["[False, True, True]", "[None, None, None]"], ended.stderr
