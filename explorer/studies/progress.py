"""Long calculations: they report how far they are, and they can be stopped."""

from collections.abc import Callable
from dataclasses import dataclass

from explorer.scenario.compile import Plan

BATCH, HELD_BATCH = 16_384, 2_048
"""Points calculated between two looks at whether to stop: some tenths of a second."""


def batch(plan: Plan) -> int:
    """Points to calculate between two looks; fewer where dials are held, which takes many tries a point."""
    return HELD_BATCH if plan.holds else BATCH


class Stopped(Exception):
    """A calculation was asked to stop; what it handed over before stands."""


def _unheard(part: float) -> None:
    return None


def _never() -> bool:
    return False


@dataclass(frozen=True)
class Watch:
    """Who follows a calculation: ``progress`` is told the part done (0 to 1), ``stop`` is asked whether to
    stop. Both are called from the thread that calculates."""

    progress: Callable[[float], None] = _unheard
    stop: Callable[[], bool] = _never

    def done(self, part: float) -> None:
        """Report the part done. Raises Stopped where that is wanted."""
        if self.stop():
            raise Stopped
        self.progress(part)

    def within(self, start: float, end: float) -> "Watch":
        """For a calculation that is the part from ``start`` to ``end`` of this one."""
        return Watch(lambda part: self.progress(start + part * (end - start)), self.stop)

    @property
    def silent(self) -> "Watch":
        """For a calculation whose length nobody knows beforehand: it can be stopped but reports nothing."""
        return Watch(stop=self.stop)


UNWATCHED = Watch()
