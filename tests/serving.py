"""A server of the page, in a thread or a process of its own."""

import asyncio
import subprocess
import sys
import threading
import time
import urllib.error
import urllib.request
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from explorer.app.serve import page_url, prepared

ROOT = Path(__file__).resolve().parents[1]
PATIENCE = 60.0
"""Seconds a server may take to come up."""


@contextmanager
def running(path: Path | None = None, address: str = "127.0.0.1", **settings: Any) -> Iterator[str]:
    """URL of a server in a thread of this process; it has answered once, and is stopped at the end."""
    up, found = threading.Event(), {}

    def work() -> None:
        loop = asyncio.new_event_loop()
        asyncio.set_event_loop(loop)
        server = found["server"] = prepared(path, address=address, **settings)
        server.start()
        up.set()
        server.io_loop.start()
        server.stop()
        loop.close()

    thread = threading.Thread(target=work, daemon=True)
    thread.start()
    assert up.wait(PATIENCE)
    server = found["server"]
    try:
        yield page_url(address, server.port)
    finally:
        server.io_loop.add_callback(server.io_loop.stop)
        thread.join(PATIENCE)


@contextmanager
def started(*arguments: str, **settings: Any) -> Iterator[tuple[str, subprocess.Popen]]:
    """URL and process of ``blendwright serve`` with these arguments; it is killed at the end."""
    command = [sys.executable, "-m", "explorer", "serve", "--no-browser", *arguments]
    usual = {"cwd": ROOT, "stdout": subprocess.PIPE, "text": True}
    process = subprocess.Popen(command, **(usual | settings))
    try:
        line = process.stdout.readline()
        yield next(word for word in line.split() if word.startswith("http")), process
    finally:
        process.kill()
        process.communicate()


def answers(url: str) -> bool:
    """Whether the server at ``url`` gives a page."""
    try:
        with urllib.request.urlopen(url, timeout=PATIENCE) as answer:
            return answer.status == 200
    except urllib.error.URLError:
        return False


def until(condition: Any, what: str, patience: float = PATIENCE) -> Any:
    """The first true answer of ``condition``, asked again and again; AssertionError after a long while."""
    deadline = time.monotonic() + patience
    while time.monotonic() < deadline:
        answer = condition()
        if answer:
            return answer
        time.sleep(0.05)
    raise AssertionError(f"waited in vain for: {what}")
