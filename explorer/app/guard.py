"""What the server answers at all, to whom, and with which headers.

A page elsewhere can make a browser ask this server for things, and can even point a name of its own at this
machine. So only requests are answered that name the server by its own address and do not come from a page of
another origin; and of the many paths the libraries bring along, only those the page needs.
"""

from __future__ import annotations

import ipaddress
import socket
from dataclasses import dataclass
from http import HTTPStatus
from urllib.parse import unquote, urlsplit

from tornado.httputil import HTTPHeaders, HTTPServerRequest
from tornado.routing import Matcher, Rule
from tornado.web import Application, ErrorHandler, OutputTransform

PAGE, SOCKET, ICON, STATIC = "/", "/ws", "/favicon.ico", "/static/"
LOCAL_NAMES = frozenset({"127.0.0.1", "localhost", "::1"})
ANYWHERE = frozenset({"", "0.0.0.0", "::"})
"""Addresses that stand for all interfaces of this machine."""

HEADERS = {
    # the page and its scripts, styles and pictures come from this server alone; Bokeh writes scripts into the
    # page, compiles templates, and loads the modules of the views from blobs
    "Content-Security-Policy": (
        "default-src 'self'; connect-src 'self' blob:; "
        "script-src 'self' 'unsafe-inline' 'unsafe-eval' blob:; style-src 'self' 'unsafe-inline'; "
        "img-src 'self' data: blob:; font-src 'self' data:; "
        "object-src 'none'; base-uri 'none'; form-action 'none'; frame-ancestors 'none'"
    ),
    "X-Frame-Options": "DENY",
    "X-Content-Type-Options": "nosniff",
    "Cross-Origin-Resource-Policy": "same-origin",
    "Cross-Origin-Opener-Policy": "same-origin",
    "Referrer-Policy": "no-referrer",
}
"""Sent with every answer. The address of a page names its working copy, so it is not told to others."""

WORDS = {
    HTTPStatus.FORBIDDEN: "This server answers only its own page, under its own address.",
    HTTPStatus.NOT_FOUND: "There is nothing at this address.",
    HTTPStatus.METHOD_NOT_ALLOWED: "This is not answered here.",
}
WRONG_REQUEST = "This request could not be understood."
OUR_FAULT = "Something went wrong; the log of the server says more."


def is_local(address: str) -> bool:
    """Whether only this machine reaches what listens on ``address``."""
    try:
        return ipaddress.ip_address(address).is_loopback
    except ValueError:
        return address in LOCAL_NAMES


def hosts(address: str, port: int) -> set[str]:
    """All ``Host`` headers of the server that listens on ``address``, which is a single interface."""
    names = {address.lower()} | (LOCAL_NAMES if is_local(address) else frozenset())
    written = {f"[{name}]" if ":" in name else name for name in names}
    return {f"{name}:{port}" for name in written} | (written if port == 80 else set())


def allowed_host(host: str, address: str, port: int) -> bool:
    """Whether a ``Host`` header names the server that listens on ``address`` and ``port``.

    A server on all interfaces has addresses nobody entered: any address in figures is taken for one of them
    (a page elsewhere that points at this machine needs a name), and the name of this machine.
    """
    if address not in ANYWHERE:
        return host.lower() in hosts(address, port)
    try:
        parts = urlsplit(f"//{host}")
        name, asked = parts.hostname or "", parts.port or 80
    except ValueError:
        return False
    known = name in LOCAL_NAMES or name == socket.gethostname().lower() or _in_figures(name)
    return known and asked == port and "@" not in host


def _in_figures(name: str) -> bool:
    try:
        ipaddress.ip_address(name)
    except ValueError:
        return False
    return True


def own_request(request: HTTPServerRequest) -> bool:
    """Whether a request comes from a page of this server, from an address typed or a link followed, or from
    something that is no browser; not from within a page elsewhere."""
    headers = request.headers
    origin = headers.get("Origin")
    if origin is not None and origin.lower() != f"{request.protocol}://{request.host}".lower():
        return False
    if headers.get("Sec-Fetch-Site", "none") in ("none", "same-origin"):
        return True
    return headers.get("Sec-Fetch-Mode") == "navigate" and headers.get("Sec-Fetch-Dest") == "document"


@dataclass
class _Foreign(Matcher):
    """Requests that are not answered because of where they come from or what they call this server."""

    address: str
    port: int

    def match(self, request: HTTPServerRequest) -> dict | None:
        known = allowed_host(request.host, self.address, self.port) and own_request(request)
        return None if known else {}


class _Unknown(Matcher):
    """Paths that the page does not need."""

    def match(self, request: HTTPServerRequest) -> dict | None:
        path = unquote(request.path)
        known = path in (PAGE, SOCKET, ICON) or path.startswith(STATIC)
        return None if known and path.isprintable() else {}


class _Dressed(OutputTransform):
    """Gives every answer the headers, and errors a page in plain words."""

    def __init__(self, request: HTTPServerRequest) -> None:
        self._keep = request.path.startswith(STATIC)

    def transform_first_chunk(
        self, status_code: int, headers: HTTPHeaders, chunk: bytes, finishing: bool
    ) -> tuple[int, HTTPHeaders, bytes]:
        for name, value in HEADERS.items():
            headers[name] = value
        if not self._keep:
            headers["Cache-Control"] = "no-store"
            headers.pop("Etag", None)
        headers.pop("Server", None)
        if status_code >= HTTPStatus.BAD_REQUEST and finishing:
            chunk = _error_page(status_code)
            headers["Content-Type"] = "text/html; charset=utf-8"
            headers["Content-Length"] = str(len(chunk))
        return status_code, headers, chunk


def _error_page(status: int) -> bytes:
    usual = OUR_FAULT if status >= HTTPStatus.INTERNAL_SERVER_ERROR else WRONG_REQUEST
    words = WORDS.get(HTTPStatus(status), usual)
    return f'<!doctype html><html lang="en"><title>Blendwright</title><p>{words}</p></html>\n'.encode()


def guard(application: Application, address: str, port: int) -> None:
    """Put the guard before everything an application answers."""
    application.default_router.rules[:0] = [
        Rule(_Foreign(address, port), ErrorHandler, {"status_code": HTTPStatus.FORBIDDEN}),
        Rule(_Unknown(), ErrorHandler, {"status_code": HTTPStatus.NOT_FOUND}),
    ]
    application.add_transform(_Dressed)
