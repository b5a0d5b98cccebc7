"""Calculations off the event loop: one at a time, the newest input next, every finished result applied.

A running calculation is never dropped for a newer input, otherwise nothing would be drawn during a drag.
"""

from __future__ import annotations

import asyncio
import logging
import time
from collections.abc import Callable, Iterator
from concurrent.futures import ThreadPoolExecutor
from contextlib import contextmanager
from typing import Any
from weakref import WeakSet

from bokeh.document import Document
from panel.io.document import hold
from panel.io.state import set_curdoc, state

logger = logging.getLogger(__name__)

POOL = ThreadPoolExecutor(max_workers=2, thread_name_prefix="solve")
"""Shared by all tabs of the server; NumPy lets two calculations overlap."""

LOADING_SECONDS = 60.0

LONGEST_WAY = 2.0
"""Seconds a step of a long calculation gives way to live ones at most."""

_LIVE: set[Conflate] = set()
"""Pages whose live calculation is under way or waits for its turn."""

_GONE: WeakSet[Document] = WeakSet()
"""Documents of pages that have gone for good; nothing may be changed in them."""


@contextmanager
def on_page(document: Document | None) -> Iterator[None]:
    """For changes to a page that do not answer one of its events.

    Bokeh refuses changes outside of an event unless they are held; held, they leave as one message. The
    document is named because a drag in a plot does not leave it in the context.
    """
    with set_curdoc(document), hold(document):
        yield


def when_gone(document: Document | None, act: Callable[[], None]) -> None:
    """Call ``act`` once the page of ``document`` has gone for good; never where it is not served."""
    if document is not None:
        document.on_session_destroyed(lambda session_context: act())


async def page_is_there(document: Document | None) -> bool:
    """Wait until the browser has the page: what changes while it is under way never arrives there.

    False when nobody has come for it, or it has gone again.
    """
    if document is None:
        return True
    if document in _GONE:
        return False
    there = asyncio.Event()
    when_gone(document, there.set)
    with set_curdoc(document):
        state.onload(there.set)
    try:
        await asyncio.wait_for(there.wait(), LOADING_SECONDS)
    except TimeoutError:
        return False
    return document not in _GONE


async def give_way() -> None:
    """Wait while live calculations of any page are asked for: they are short, and somebody is at a slider."""
    end = time.monotonic() + LONGEST_WAY
    while _LIVE and time.monotonic() < end:
        await asyncio.sleep(0.01)


class Conflate:
    """Runner for one tab, whose results are applied to ``document``.

    Without an event loop (tests, scripts) it computes at once.
    """

    def __init__(self, document: Document | None = None, pool: ThreadPoolExecutor = POOL) -> None:
        self._document = document
        self._pool = pool
        self._next: tuple[Callable[[], Any], Callable[[Any], None]] | None = None
        self._task: asyncio.Task[None] | None = None
        when_gone(document, self._leave)

    @property
    def busy(self) -> bool:
        return self._task is not None and not self._task.done()

    def submit(self, compute: Callable[[], Any], apply: Callable[[Any], None]) -> None:
        """Run ``compute`` next, in place of one still waiting, and give its result to ``apply``."""
        try:
            loop = asyncio.get_running_loop()
        except RuntimeError:
            apply(compute())
            return
        self._next = (compute, apply)
        if not self.busy:
            self._task = loop.create_task(self._work_off())

    def _leave(self) -> None:
        self._next = None
        _GONE.add(self._document)

    async def _work_off(self) -> None:
        while self._next is not None:
            (compute, apply), self._next = self._next, None
            try:
                _LIVE.add(self)
                try:
                    result = await asyncio.get_running_loop().run_in_executor(self._pool, compute)
                finally:
                    _LIVE.discard(self)
                if not await page_is_there(self._document):
                    return
                with on_page(self._document):
                    apply(result)
            except Exception:
                logger.exception("a calculation could not be shown")
            await asyncio.sleep(0)
