# ruff: noqa: E402 — the path is set before the imports
"""How quick is the page? Prints a table and asserts nothing: ``python tests/benchmark_app.py``.

A slider is moved in Chromium. While dragging: from a move of the pointer until newer curves are painted.
After letting go: until the last curve is painted, without the band of tolerances, which follows at rest. The
server part is what a turned dial asks of it. Figures are of this machine with whatever else it does.
"""

import subprocess
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from statistics import median, quantiles
from tempfile import TemporaryDirectory
from typing import Any

ROOT = Path(__file__).resolve().parents[1]
sys.path.insert(0, str(ROOT))

from playwright.sync_api import sync_playwright

from explorer.app.calculation import solve
from explorer.app.files import Shelf
from explorer.app.main import build
from explorer.app.serve import free_port
from explorer.scenario.files import save_scenario
from explorer.scenario.shipped import shipped
from tests.benchmark import plant
from tests.browser.conftest import Screen
from tests.conftest import CHROMIUM, FLAGS

EXAMPLES = ("amber", "juniper", "dune")
PLANT = "3 waters, 6 doses"
MOVES, DRAGS, TURNS = 40, 5, 40

_WATCH = """
() => {
  const lines = [...Bokeh.documents[0]._all_models.values()]
    .filter((model) => model.type === "Figure")
    .map((model) => model.renderers.find((part) => part.glyph?.type === "MultiLine").data_source)
  window.painted = []
  const sum = (source) => source.data.ys.reduce((all, y) => y.reduce((a, b) => a + (b || 0), all), 0)
  for (const source of lines) {
    let shown = sum(source)
    source.connect(source.change, () => {
      const now = sum(source)
      if (now === shown) return
      shown = now
      requestAnimationFrame(() => setTimeout(() => window.painted.push(performance.now())))
    })
  }
}
"""
"""Notes the time after the frame in which a plot got new curves."""


def spread(times: list[float]) -> str:
    """Median and 95th percentile in milliseconds."""
    if len(times) < 2:
        return "too few"
    return f"{median(times):5.0f} ms   {quantiles(times, n=20)[-1]:5.0f} ms"


def server(path: Path) -> list[float]:
    """Milliseconds from a turned dial that is not on the x axis to all results the page asks for."""
    session = build(path, shelf=Shelf()).session
    dial = next(
        dial for dial in session.dials.values() if dial.address != session.swept.address and dial.value
    )
    wanted, times = session.wanted, []
    for turn in range(TURNS):
        session.scenario.copy()
        start = time.perf_counter()
        solve(session.scenario.copy(), wanted, session._questions.values())
        times.append(1000 * (time.perf_counter() - start))
        session.turn(dial.address, dial.value * (1 + 0.001 * (turn % 5)))
    return times


def page_times(screen: Any) -> tuple[list[float], list[float]]:
    """Milliseconds from a move to newer curves while dragging, and from letting go to the last paint."""
    page = screen.page
    page.evaluate(_WATCH)
    slider = page.locator("#rail .slider").last
    slider.scroll_into_view_if_needed()
    box = slider.bounding_box()
    height = box["y"] + box["height"] / 2
    live, settled = [], []
    for _ in range(DRAGS):
        page.mouse.move(box["x"] + 0.3 * box["width"], height)
        page.mouse.down()
        moved = []
        page.evaluate("window.painted.length = 0")
        for step in range(MOVES):
            page.mouse.move(box["x"] + (0.3 + 0.01 * step) * box["width"], height)
            moved.append(page.evaluate("performance.now()"))
            page.wait_for_timeout(25)
        page.mouse.up()
        let_go = page.evaluate("performance.now()")
        page.wait_for_timeout(900)
        painted = page.evaluate("window.painted")
        for at in moved:
            later = [moment for moment in painted if moment > at]
            if later and at < let_go:
                live.append(min(later) - at)
        last = [moment for moment in painted if moment < let_go + 800]
        if last:
            settled.append(max(0.0, max(last) - let_go))
    return live, settled


@contextmanager
def served(path: Path) -> Iterator[str]:
    """Address of a page that a process of its own serves."""
    port = free_port()
    command = [sys.executable, "-m", "explorer", "serve", str(path), "--port", str(port), "--no-browser"]
    process = subprocess.Popen(command, cwd=ROOT, stdout=subprocess.DEVNULL)
    try:
        yield f"http://127.0.0.1:{port}/"
    finally:
        process.kill()
        process.wait()


def main() -> None:
    if not Path(CHROMIUM).exists():
        print(f"no browser at {CHROMIUM}; set CHROMIUM to one")
        return
    print(f"{'':46}{'median':>8}   {'95th percentile'}")
    with TemporaryDirectory() as folder, sync_playwright() as driver:
        written = Path(folder) / "plant.json"
        save_scenario(plant(), written)
        browser = driver.chromium.launch(executable_path=CHROMIUM, args=list(FLAGS))
        for name, path in ((PLANT, written), *((name, shipped()[name]) for name in EXAMPLES)):
            print(f"{name:20}{'server, one turn of a dial':28}{spread(server(path))}")
            with served(path) as url:
                context = browser.new_context(viewport={"width": 1600, "height": 900})
                screen = Screen(context.new_page(), url)
                screen.until(lambda url=url: _answers(url), "an answer of the server")
                screen.open()
                live, settled = page_times(screen)
                context.close()
            print(f"{'':20}{'move to newer curves':28}{spread(live)}")
            print(f"{'':20}{'let go to last paint':28}{spread(settled)}")
        browser.close()


def _answers(url: str) -> bool:
    try:
        with urllib.request.urlopen(url, timeout=10) as answer:
            return answer.status == 200
    except urllib.error.URLError:
        return False


if __name__ == "__main__":
    main()
