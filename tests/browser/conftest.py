"""A served page and a browser to drive it; every page also has to be free of errors and foreign requests."""

import time
from collections.abc import Callable, Iterator
from typing import Any

import pytest

from tests.serving import running

WAIT_MS = 15_000
IDLE = "window.Bokeh && Bokeh.documents.length > 0 && Bokeh.documents[0].is_idle"

_FRAME = """
name => {
  const find = (view) => {
    if (view.model?.name === name && view.frame) return view
    for (const child of view.child_views ?? []) { const found = find(child); if (found) return found }
    return null
  }
  for (const root of Bokeh.index.roots) {
    const view = find(root)
    if (!view) continue
    const canvas = view.canvas_view.el.getBoundingClientRect(), frame = view.frame.bbox
    const left = canvas.left + frame.left, top = canvas.top + frame.top
    return { left, top, width: frame.width, height: frame.height }
  }
  return null
}
"""
_CURVES = """
name => {
  for (const model of Bokeh.documents[0]._all_models.values())
    if (model.name === name && model.type === "Figure")
      for (const renderer of model.renderers)
        if (renderer.glyph?.type === "MultiLine")
          return Array.from(renderer.data_source.data.ys, (y) => Array.from(y))
  return null
}
"""


def until(condition: Callable[[], Any], what: str, wait: Callable[[float], Any] = time.sleep) -> Any:
    """The first true answer of ``condition``, asked again and again; AssertionError after a long while."""
    deadline = time.monotonic() + WAIT_MS / 1000
    while time.monotonic() < deadline:
        answer = condition()
        if answer:
            return answer
        wait(0.05)
    raise AssertionError(f"waited in vain for: {what}")


class Screen:
    """The page as a user meets it, with the few places a test has to find in plots."""

    def __init__(self, page: Any, url: str) -> None:
        self.page, self.url = page, url
        self.errors: list[str] = []
        self.foreign: list[str] = []
        page.set_default_timeout(WAIT_MS)
        page.on("console", lambda said: self.errors.append(said.text) if said.type == "error" else None)
        page.on("pageerror", lambda error: self.errors.append(str(error)))
        page.on("request", self._asked)

    def _asked(self, request: Any) -> None:
        own = (self.url, self.url.replace("http", "ws", 1), "data:", "blob:")
        if not request.url.startswith(own):
            self.foreign.append(request.url)

    def open(self, query: str = "") -> None:
        """Load the page and wait until it is drawn."""
        self.page.goto(self.url + query)
        self.drawn()

    def drawn(self) -> None:
        """Wait until nothing is left to draw and the plots show curves."""
        self.page.wait_for_function(IDLE)
        self.until(lambda: self.curves("ph") and self.frame("ph"), "curves in the pH plot")

    def until(self, condition: Callable[[], Any], what: str) -> Any:
        """The first true answer of ``condition``, with the page going on meanwhile."""
        return until(condition, what, lambda seconds: self.page.wait_for_timeout(1000 * seconds))

    def curves(self, plot: str) -> list[list[float]]:
        """Values of the curves of a plot, as the page has them."""
        return self.page.evaluate(_CURVES, plot)

    def frame(self, plot: str) -> dict[str, float]:
        """Place of the plot's axes on the page, pixels."""
        return self.page.evaluate(_FRAME, plot)

    def tile(self, key: str) -> str:
        """The value a readout tile shows, by the name for screen readers."""
        return self.page.locator(f".tile[aria-label^='{key}'] .value").inner_text()

    def point_at(self, plot: str, part: float, high: float = 0.5) -> tuple[float, float]:
        """Pixels of a place in a plot, by its part of the width and of the height."""
        frame = self.frame(plot)
        return frame["left"] + part * frame["width"], frame["top"] + (1 - high) * frame["height"]

    def drag(self, plot: str, start: float, stop: float) -> None:
        """Drag in a plot from one part of its width to another."""
        mouse = self.page.mouse
        mouse.move(*self.point_at(plot, start))
        mouse.down()
        for step in range(1, 11):
            mouse.move(*self.point_at(plot, start + (stop - start) * step / 10))
            self.page.wait_for_timeout(20)
        mouse.up()


@pytest.fixture(scope="session")
def served() -> Iterator[str]:
    """Address of a served page with the shipped demo."""
    with running() as url:
        yield url


@pytest.fixture
def new_screen(browser: Any, served: str) -> Iterator[Callable[..., Screen]]:
    """Opens the page in a fresh browser profile; settings go to the profile (viewport, color_scheme …)."""
    contexts, screens = [], []

    def make(**settings: Any) -> Screen:
        context = browser.new_context(**{"viewport": {"width": 1280, "height": 720}, **settings})
        contexts.append(context)
        screen = Screen(context.new_page(), served)
        screens.append(screen)
        screen.open()
        return screen

    yield make
    for screen in screens:
        assert screen.errors == []
        assert screen.foreign == []
    for context in contexts:
        context.close()


@pytest.fixture
def screen(new_screen: Callable[..., Screen]) -> Screen:
    """The page with the shipped demo at 1280 × 720."""
    return new_screen()
