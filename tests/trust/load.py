"""How does the server bear many pages at once? Prints figures: ``python -m tests.trust.load``.

Each of many pages, over a websocket of its own, moves a slider again and again: on to a new value, wait for
the curves of that value, rest. What is told: errors, the time from a move to its curves as the server gives
them (what a browser needs to draw comes on top), memory of the server, and whether it grows. Only for Linux,
where memory is read from the process's status.
"""

import argparse
import asyncio
import os
import random
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from statistics import median, quantiles
from typing import Any

from explorer.app.serve import page_url, prepared
from tests.serving import ROOT
from tests.trust.visitor import Visitor

LIFETIME = 2_000
"""Milliseconds the server keeps a page that has gone, so that its end is seen, too."""

SEED = 7


@contextmanager
def server() -> Iterator[tuple[str, int]]:
    """URL and process number of a server of its own."""
    command = [sys.executable, "-m", "tests.trust.load", "--serve"]
    process = subprocess.Popen(command, cwd=ROOT, stdout=subprocess.PIPE, text=True)
    try:
        yield process.stdout.readline().strip(), process.pid
    finally:
        process.kill()
        process.communicate()


def serve() -> None:
    """Be that server."""
    found = prepared(session_lifetime=LIFETIME)
    print(page_url("127.0.0.1", found.port), flush=True)
    found.start()
    found.io_loop.start()


def memory(process: int) -> float:
    """Megabytes a process holds."""
    lines = Path(f"/proc/{process}/status").read_text().splitlines()
    return next(int(line.split()[1]) / 1024 for line in lines if line.startswith("VmRSS"))


def work(process: int) -> float:
    """Seconds of processor time a process has used."""
    fields = Path(f"/proc/{process}/stat").read_text().rpartition(")")[2].split()
    return (int(fields[11]) + int(fields[12])) / os.sysconf("SC_CLK_TCK")


class Tally:
    """What the pages have met, and the memory of the server by time."""

    def __init__(self) -> None:
        self.opened: list[float] = []
        self.answered: list[float] = []
        self.errors: list[str] = []
        self.memory: list[tuple[float, float]] = []


async def visit(visitor: Visitor, until: float, rest: float, chance: random.Random, tally: Tally) -> None:
    """Move the sliders of one page until it is time."""
    await asyncio.sleep(chance.uniform(0, rest))
    sliders = visitor.sliders()
    slider, part = chance.choice(sliders), chance.random()
    while time.monotonic() < until:
        part = (part + chance.uniform(0.02, 0.1)) % 1
        try:
            value = round(slider.low + part * (slider.high - slider.low), 1)
            tally.answered.append(await visitor.move(slider, value))
        except Exception as error:
            tally.errors.append(f"{type(error).__name__}: {error}")
            return
        await asyncio.sleep(rest)
    tally.errors += visitor.errors


async def watch(process: int, until: float, tally: Tally) -> None:
    """Note the memory of the server until it is time."""
    began = time.monotonic()
    while time.monotonic() < until:
        tally.memory.append((time.monotonic() - began, memory(process)))
        await asyncio.sleep(1)


async def open_all(url: str, count: int, tally: Tally) -> list[Visitor]:
    """Pages, opened one after another; what each took is noted."""
    visitors = []
    for _ in range(count):
        visitor, began = Visitor(url), time.perf_counter()
        await visitor.open()
        tally.opened.append(time.perf_counter() - began)
        visitors.append(visitor)
    return visitors


def spread(times: list[float]) -> str:
    """Median, 95th percentile and longest, in milliseconds."""
    ordered = [1000 * value for value in times]
    longest = quantiles(ordered, n=20)[-1]
    return f"median {median(ordered):.0f} ms, 95 % {longest:.0f} ms, {max(ordered):.0f} ms at most"


def slope(noted: list[tuple[float, float]]) -> float:
    """Megabytes a minute of a straight line through the second half of what was noted."""
    late = noted[len(noted) // 2 :]
    at, of = sum(t for t, _ in late) / len(late), sum(m for _, m in late) / len(late)
    return 60 * sum((t - at) * (m - of) for t, m in late) / sum((t - at) ** 2 for t, _ in late)


async def run(options: argparse.Namespace) -> int:
    """The whole run; returns the number of errors."""
    tally, chance = Tally(), random.Random(SEED)
    with server() as (url, process):
        warm = await open_all(url, 1, Tally())
        empty = memory(process)
        visitors = await open_all(url, options.sessions, tally)
        full = memory(process)
        load, began, used = os.getloadavg()[0], time.monotonic(), work(process)
        until = began + options.seconds
        visits = [
            visit(visitor, until, options.rest, random.Random(chance.random()), tally) for visitor in visitors
        ]
        await asyncio.gather(watch(process, until, tally), *visits)
        took, used = time.monotonic() - began, work(process) - used
        busy = memory(process)
        for visitor in [*warm, *visitors]:
            await visitor.close()
        await asyncio.sleep(3 * LIFETIME / 1000)
        again = await open_all(url, options.sessions, Tally())
        second = memory(process)
        for visitor in again:
            await visitor.close()
    each_opened, each_at_end = ((held - empty) / options.sessions for held in (full, busy))
    print(
        f"{options.sessions} pages, {options.seconds:.0f} s, {options.rest:g} s from curves to the next move"
    )
    print(f"load average of the machine before, {os.cpu_count()} cores: {load:.1f}")
    print(f"opening a page: {spread(tally.opened)}")
    print(f"move to curves: {spread(tally.answered)}; {len(tally.answered) / took:.1f} answers/s")
    print(f"processor of the server: {100 * used / took:.0f} % of one core")
    print(f"errors: {len(tally.errors)}", *tally.errors[:5], sep="\n  ")
    print(f"memory: {empty:.0f} MB with one page, {full:.0f} MB with all opened, {busy:.0f} MB at the end")
    print(f"a page: {each_opened:.1f} MB opened, {each_at_end:.1f} MB at the end")
    print(f"growth in the second half: {slope(tally.memory):+.1f} MB/min")
    print(f"all closed and as many opened anew: {second:.0f} MB")
    return len(tally.errors)


def main(arguments: list[str] | None = None) -> Any:
    parser = argparse.ArgumentParser(prog="python -m tests.trust.load", description=__doc__.split("\n")[0])
    parser.add_argument("--sessions", type=int, default=30)
    parser.add_argument("--seconds", type=float, default=120)
    parser.add_argument("--rest", type=float, default=0.5, help="seconds a page waits after each answer")
    parser.add_argument("--serve", action="store_true", help=argparse.SUPPRESS)
    options = parser.parse_args(arguments)
    return serve() if options.serve else asyncio.run(run(options))


if __name__ == "__main__":
    sys.exit(main())
