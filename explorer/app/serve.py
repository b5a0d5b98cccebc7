"""Serving the page, on this machine alone unless told otherwise."""

from __future__ import annotations

import errno
import logging
import secrets
import socket
import sys
import webbrowser
from pathlib import Path

import panel as pn
from bokeh.server.server import Server

from explorer.app.guard import ANYWHERE, guard, hosts, is_local
from explorer.app.main import create_app
from explorer.app.shell import TITLE

LARGEST_MESSAGE = 8 * 1024 * 1024
"""Bytes of one message from the page; a file of the largest size allowed fits in with room to spare."""

LARGEST_REQUEST = 64 * 1024
"""Bytes of the body of a request; the page sends none."""

SESSION_LIFETIME = 120_000
"""Milliseconds a page without connection is kept: a sleeping laptop comes back to its page."""

OPEN_TO_OTHERS = (
    "Caution: other machines can reach this page at {address}, without a password; "
    "without --address only this machine can."
)


_ALLOWED = "allowed an address of this machine, such as 127.0.0.1"
_WHY_NOT = {
    errno.EADDRNOTAVAIL: f"--address: {{address}} is not an address of this machine; {_ALLOWED}",
    errno.EADDRINUSE: "--port: {port} of {address} is taken already; allowed a free one, or 0 for any",
    errno.EACCES: "--port: {port} is not permitted; allowed a free one from 1024, or 0 for any",
}


class AddressError(ValueError):
    """Nothing can be served there; the sentence says why and what is allowed."""


def serve(
    path: Path | None = None, port: int = 0, address: str = "127.0.0.1", open_browser: bool = True
) -> None:
    """Serve the page and, if asked, open the browser; returns when the server is stopped.

    Parameters
    ----------
    path
        Scenario file to start with; None for the shipped demo.
    port
        0 lets the system choose a free one.
    address
        Interface to listen on; only this machine by default.

    Raises
    ------
    AddressError
        The address is not one of this machine's, or the port is taken.
    """
    server = prepared(path, port, address)
    if not is_local(address):
        print(OPEN_TO_OTHERS.format(address=address or "any of its addresses"), file=sys.stderr)
    url = page_url(address, server.port)
    print(f"{TITLE} is served at {url} (Ctrl+C stops it)", flush=True)
    if open_browser:
        server.io_loop.add_callback(webbrowser.open, url)
    server.start()
    server.io_loop.start()


def prepared(
    path: Path | None = None,
    port: int = 0,
    address: str = "127.0.0.1",
    session_lifetime: int = SESSION_LIFETIME,
) -> Server:
    """The server, listening, on the event loop of this thread; it answers once it is started."""
    port = free_port(address, port)
    pn.extension()
    server = pn.io.server.get_server(
        {"/": create_app(path)},
        port=port,
        address=address,
        title=TITLE,
        websocket_origin=_origins(address, port),
        websocket_max_message_size=LARGEST_MESSAGE,
        http_server_kwargs={"max_body_size": LARGEST_REQUEST},
        unused_session_lifetime_milliseconds=session_lifetime,
        check_unused_sessions_milliseconds=min(session_lifetime, 17_000),
        # nobody can name a session of his own choice, and so none that a link names for others
        sign_sessions=True,
        secret_key=secrets.token_bytes(32),
    )
    guard(server._tornado, address, port)
    return server


def _origins(address: str, port: int) -> list[str]:
    """Where a websocket may come from, as far as Bokeh can be told; the guard looks at all of them."""
    if address in ANYWHERE or ":" in address:
        logging.getLogger("bokeh.server.util").setLevel(logging.ERROR)  # it warns of the asterisk
        return ["*"]
    return sorted(host for host in hosts(address, port) if "[" not in host)


def page_url(address: str, port: int) -> str:
    """Where a browser on this machine finds the page."""
    name = "127.0.0.1" if address in ANYWHERE else address
    return f"http://[{name}]:{port}/" if ":" in name else f"http://{name}:{port}/"


def free_port(address: str = "127.0.0.1", port: int = 0) -> int:
    """``port``, or one nobody listens on just now where it is 0.

    Raises AddressError, with the reason in words, where nothing can listen.
    """
    try:
        found = socket.getaddrinfo(address, port, type=socket.SOCK_STREAM, flags=socket.AI_PASSIVE)
        family, *_, place = found[0]
        with socket.create_server(place[:2], family=family) as probe:
            return int(probe.getsockname()[1])
    except socket.gaierror:
        raise AddressError(f"--address: {address} is not known; {_ALLOWED}") from None
    except OSError as error:
        why = _WHY_NOT.get(error.errno, (error.strerror or "the system refuses").lower())
        raise AddressError(why.format(address=address, port=port)) from None
