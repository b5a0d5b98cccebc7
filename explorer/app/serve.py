"""Serving the page on this machine alone."""

from __future__ import annotations

import socket
from collections.abc import Callable
from pathlib import Path
from typing import Any

import panel as pn

from explorer.app.main import create_app
from explorer.app.shell import TITLE

LOCAL_HOSTS = ("127.0.0.1", "localhost")
LARGEST_MESSAGE = 8 * 1024 * 1024
"""Bytes of one message from the page; a file of the largest size allowed fits in with room to spare."""

SESSION_LIFETIME = 120_000
"""Milliseconds a page without connection is kept: a sleeping laptop comes back to its page."""


def allowed_hosts(address: str, port: int) -> set[str]:
    """Host headers that are answered. A page elsewhere that points its name at this machine has another."""
    names = {address, *LOCAL_HOSTS} if address in LOCAL_HOSTS else {address}
    return {f"{name}:{port}" for name in names} | (names if port == 80 else set())


def guarded(page: Callable[[], Any], port: Callable[[], int], address: str) -> Callable[[], Any]:
    """``page`` for requests that name this server as their host; a plain refusal for all others."""

    def answer() -> Any:
        host = (pn.state.headers or {}).get("Host", "")
        if host not in allowed_hosts(address, port()):
            return pn.pane.HTML("This server answers only under its own address.", sanitize_html=True)
        return page()

    return answer


def serve(
    path: Path | None = None,
    port: int = 0,
    address: str = "127.0.0.1",
    open_browser: bool = True,
    **settings: Any,
) -> Any:
    """Serve the page and, if asked, open the browser; returns when the server stops.

    Parameters
    ----------
    path
        Scenario file to start with; None for the shipped demo.
    port
        0 lets the system choose a free one.
    address
        Interface to listen on; only this machine by default.
    settings
        Passed on to ``panel.serve`` (tests use ``threaded`` and ``server_id``).
    """
    chosen = port or free_port(address)
    pn.extension()
    return pn.serve(
        {"/": guarded(create_app(path), lambda: chosen, address)},
        port=chosen,
        address=address,
        show=open_browser,
        title=TITLE,
        websocket_origin=sorted(allowed_hosts(address, chosen)),
        websocket_max_message_size=LARGEST_MESSAGE,
        unused_session_lifetime_milliseconds=SESSION_LIFETIME,
        **settings,
    )


def free_port(address: str = "127.0.0.1") -> int:
    """A port nobody listens on just now."""
    with socket.socket() as probe:
        probe.bind((address, 0))
        return int(probe.getsockname()[1])
