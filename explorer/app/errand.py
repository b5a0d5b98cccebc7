"""Long calculations of a view: off the event loop, coarse results first, with progress and a way to stop."""

from __future__ import annotations

import asyncio
import logging
import threading
import time
from collections.abc import Callable, Iterator
from concurrent.futures import ThreadPoolExecutor
from typing import Any, TypeVar

import panel as pn
import param

from explorer.app.live_view import Node, node
from explorer.app.runner import give_way, on_page, page_is_there, when_gone
from explorer.studies.progress import Stopped, Watch

logger = logging.getLogger(__name__)

POOL = ThreadPoolExecutor(max_workers=2, thread_name_prefix="study")
"""Shared by all tabs of the server, apart from the pool of the live calculations."""

REST = 0.25
"""Seconds the inputs have to be at rest before a calculation begins."""

PATIENCE = 0.5
"""Seconds after which a calculation shows how far it is."""

LOOK = 0.1
"""Seconds between two looks at how far it is."""

UNFORESEEN = "This could not be calculated; the log of the server says more."

Work = Callable[[Watch], Iterator[Any]]
"""Begins a calculation that hands over its results one after another, each better than the one before."""

_END = object()
_T = TypeVar("_T")


class _Order:
    """One calculation that was asked for: what it does, how far it is, and whether it is still wanted."""

    def __init__(self, work: Work, show: Callable[[Any], None], inputs: Callable[[], str]) -> None:
        self.work, self.show, self.inputs = work, show, inputs
        self.key = ""
        self.part = 0.0
        self.began = time.monotonic()
        self.unwanted = threading.Event()

    def begin(self, known: str) -> Iterator[Any]:
        """The results to come, none where the inputs are those ``known``."""
        self.key = self.inputs()
        if self.key and self.key == known:
            return iter(())
        return iter(self.work(Watch(self._progress, self.unwanted.is_set)))

    def _progress(self, part: float) -> None:
        self.part = part


class Errand(param.Parameterized):
    """Runs one calculation at a time for a view; a newer one takes the place of an older one.

    Without an event loop (tests, scripts) it calculates at once.
    """

    busy = param.Boolean(False, doc="a calculation has been under way for some time")
    part = param.Number(0.0, doc="part of it that is done, 0 to 1")
    stopped = param.Boolean(False, doc="the user has stopped it; what it had shown stands")
    refusal = param.String("", doc="sentence that says why there is no result")

    def __init__(self, pool: ThreadPoolExecutor = POOL) -> None:
        super().__init__()
        self._document = pn.state.curdoc
        self._pool = pool
        self._order: _Order | None = None
        self._known = ""
        self._tasks: set[asyncio.Task[None]] = set()
        when_gone(self._document, self._leave)

    @property
    def under_way(self) -> bool:
        """Whether a calculation is going on or waits for the inputs to rest."""
        return self._order is not None

    def start(
        self,
        work: Work,
        show: Callable[[Any], None],
        rest: float = REST,
        inputs: Callable[[], str] = str,
    ) -> None:
        """Calculate ``work`` once nothing else has been started for ``rest`` seconds; show each result.

        inputs: puts into words everything the results depend on, "" for no words; what was the last to be
        shown to its end is not calculated again. It may take its time, as ``work`` may.
        """
        self.drop()
        order = self._order = _Order(work, show, inputs)
        try:
            loop = asyncio.get_running_loop()
        except RuntimeError:
            self._at_once(order)
            return
        task = loop.create_task(self._run(order, rest))
        self._tasks.add(task)
        task.add_done_callback(self._tasks.discard)

    def drop(self) -> None:
        """What is under way is wanted no longer."""
        if self._order is not None:
            self._order.unwanted.set()
            self._order = None
        self.param.update(busy=False, stopped=False)

    def _leave(self) -> None:
        """The page has gone: nothing is wanted any longer, and there is nobody to tell."""
        if self._order is not None:
            self._order.unwanted.set()
            self._order = None

    def forget(self) -> None:
        """What is under way is wanted no longer, and what was shown is shown no longer."""
        self.drop()
        self._known = ""

    def stop(self) -> None:
        """The user does not want to wait."""
        under_way = self.under_way
        self.drop()
        self.stopped = under_way

    def _at_once(self, order: _Order) -> None:
        refusal = ""
        try:
            for result in order.begin(self._known):
                self._show(order, result)
        except Stopped:
            pass
        except ValueError as error:
            refusal = str(error)
        self._finish(order, refusal)

    async def _run(self, order: _Order, rest: float) -> None:
        if not await page_is_there(self._document):
            return
        await asyncio.sleep(rest)
        order.began = time.monotonic()
        refusal = ""
        try:
            if order.unwanted.is_set():
                return
            results = await self._patiently(order, lambda: order.begin(self._known))
            while (result := await self._patiently(order, lambda: next(results, _END))) is not _END:
                if order.unwanted.is_set():
                    return
                with on_page(self._document):
                    self._show(order, result)
        except Stopped:
            return
        except ValueError as error:
            refusal = str(error)
        except Exception:
            logger.exception("a study could not be calculated")
            refusal = UNFORESEEN
        with on_page(self._document):
            self._finish(order, refusal)

    async def _patiently(self, order: _Order, step: Callable[[], _T]) -> _T:
        """The result of ``step``, calculated elsewhere; meanwhile the page is told how far it is."""
        await give_way()
        future = asyncio.get_running_loop().run_in_executor(self._pool, step)
        while not (await asyncio.wait({future}, timeout=LOOK))[0]:
            if order is self._order and time.monotonic() - order.began > PATIENCE:
                with on_page(self._document):
                    self.param.update(busy=True, part=order.part)
        return future.result()

    def _show(self, order: _Order, result: Any) -> None:
        self._known = ""
        order.show(result)

    def _finish(self, order: _Order, refusal: str) -> None:
        if order is self._order:
            self._order = None
            self._known = "" if refusal else order.key
            self.param.update(busy=False, part=0.0, refusal=refusal)


def progress(errand: Errand, again: Callable[[], None], what: str) -> Node:
    """How far an errand is, with the button that stops it, or what became of it.

    again: starts it anew after it was stopped. what: what is being calculated, for screen readers.
    """
    if errand.busy:
        done = round(100 * errand.part)
        bar = node(
            "span", "progress", node("span", "done"), role="progressbar", aria_label=what, aria_valuemin=0,
            aria_valuemax=100, aria_valuenow=done,
        )  # fmt: skip
        bar.properties["--done"] = f"{done}%"
        stop = _button("stop", "Stop", errand.stop)
        return node("span", "errand", bar, stop)
    if errand.stopped:
        words = node("span", text="Stopped.", role="status")
        return node("span", "errand", words, _button("again", "Go on", again))
    if errand.refusal:
        return node("span", "errand", node("span", "message", text=errand.refusal, role="alert"))
    return node("span", "errand")


def _button(key: str, text: str, act: Callable[[], None]) -> Node:
    return node("button", "button small", text=text, key=key, type="button", on=lambda value: act())
