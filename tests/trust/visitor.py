"""A page without a browser: what a browser asks of the server and tells it, over a real websocket."""

import asyncio
import contextlib
import json
import re
import time
import uuid
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from tornado.httpclient import AsyncHTTPClient
from tornado.websocket import WebSocketClientConnection, websocket_connect

_TOKEN = re.compile(r'"token":"([^"]+)"')
PATIENCE = 60.0
"""Seconds an answer may take before it counts as an error."""


@dataclass(frozen=True)
class Slider:
    """A slider on the page: the model its moves are told to, its view's data, its key, and its range."""

    model: str
    data: str
    key: str
    low: float
    high: float


class Visitor:
    """One browser tab: loads the page, opens its websocket, moves sliders, and counts what comes back."""

    def __init__(self, url: str, query: str = "") -> None:
        self.url, self.query = url.rstrip("/"), query
        self.errors: list[str] = []
        self.received = 0
        self.document: dict[str, Any] = {}
        self._socket: WebSocketClientConnection | None = None
        self._reader: asyncio.Task[None] | None = None
        self._greeted = asyncio.Event()
        self._arrived = asyncio.Event()
        self._answered = asyncio.Event()
        self._asked = self._awaited = ""
        self._moves = 0

    async def open(self) -> None:
        """Load the page and tell the server that it is ready."""
        page = await AsyncHTTPClient().fetch(f"{self.url}/{self.query}", request_timeout=PATIENCE)
        token = _TOKEN.search(page.body.decode())[1]
        where = self.url.replace("http", "ws", 1) + "/ws"
        self._socket = await websocket_connect(where, subprotocols=["bokeh", token])
        self._reader = asyncio.create_task(self._read())
        await asyncio.wait_for(self._greeted.wait(), PATIENCE)
        await self._tell("PULL-DOC-REQ", {})
        ready = {"type": "event", "name": "document_ready", "values": {"type": "map"}}
        await self._event({"kind": "MessageSent", "msg_type": "bokeh_event", "msg_data": ready})

    async def close(self) -> None:
        """Leave, as when the tab is closed."""
        if self._socket is not None:
            self._socket.close()
        if self._reader is not None:
            with contextlib.suppress(asyncio.CancelledError):
                await self._reader

    def sliders(self) -> list[Slider]:
        """The sliders of the page as it was loaded."""
        found = []
        for model in _objects(self.document):
            data = model.get("attributes", {}).get("data")
            if not isinstance(data, dict) or "tree" not in data.get("attributes", {}):
                continue
            for key, properties in _nodes(json.loads(data["attributes"]["tree"]).get("root")):
                if key.endswith(":slider") and not properties.get("disabled"):
                    low, high = float(properties["min"]), float(properties["max"])
                    found.append(Slider(model["id"], data["id"], key, low, high))
        return found

    def texts(self) -> str:
        """Everything the page shows in words, as it was loaded."""
        return json.dumps(self.document, ensure_ascii=False)

    async def move(self, slider: Slider, value: float) -> float:
        """Move a slider; seconds until the curves and the results beside the slider have arrived, all of them
        of this move."""
        self._moves += 1
        self._awaited = f'"id":"{slider.data}"}},"attr":"patch"'
        self._arrived.clear()
        began = time.perf_counter()
        await self.tell_view(slider.model, {"key": slider.key, "value": value, "number": self._moves})
        await asyncio.wait_for(self._arrived.wait(), PATIENCE)
        return time.perf_counter() - began

    async def tell_view(self, model: str, data: dict[str, Any]) -> None:
        """What the script of a view tells its Python side; the server has heard it at the end."""
        entries = [["model", {"id": model}], ["data", _map(data)]]
        event = {"type": "event", "name": "data_event", "values": {"type": "map", "entries": entries}}
        await self._event({"kind": "MessageSent", "msg_type": "bokeh_event", "msg_data": event})

    async def _event(self, event: dict[str, Any]) -> None:
        await self._tell("PATCH-DOC", {"events": [event]})

    async def _tell(self, kind: str, content: dict[str, Any]) -> None:
        self._answered.clear()
        self._asked = uuid.uuid4().hex
        await self._socket.write_message(json.dumps({"msgid": self._asked, "msgtype": kind}))
        await self._socket.write_message("{}")
        await self._socket.write_message(json.dumps(content))
        await asyncio.wait_for(self._answered.wait(), PATIENCE)

    async def _read(self) -> None:
        while True:
            header = await self._frame()
            if header is None:
                return
            await self._frame()
            content = await self._frame() or ""
            head = json.loads(header)
            for _ in range(2 * head.get("num_buffers", 0)):
                await self._frame()
            kind = head["msgtype"]
            if kind == "ACK":
                self._greeted.set()
            elif kind == "ERROR":
                self.errors.append(content[:300])
            elif kind == "PULL-DOC-REPLY":
                self.document = json.loads(content)["doc"]
            elif kind == "PATCH-DOC" and '"ColumnDataChanged"' in content and self._awaited in content:
                self._arrived.set()
            if head.get("reqid") == self._asked:
                self._answered.set()

    async def _frame(self) -> str | bytes | None:
        got = await self._socket.read_message()
        self.received += len(got or "")
        return got


def _map(data: dict[str, Any]) -> dict[str, Any]:
    return {"type": "map", "entries": [[key, value] for key, value in data.items()]}


def _objects(part: Any) -> Iterator[dict[str, Any]]:
    """All models of a document that are written out."""
    waiting = [part]
    while waiting:
        part = waiting.pop()
        if isinstance(part, dict):
            if part.get("type") == "object" and "id" in part:
                yield part
            waiting += part.values()
        elif isinstance(part, list):
            waiting += part


def _nodes(root: Any) -> Iterator[tuple[str, dict[str, Any]]]:
    """Key and properties of all nodes of a view's tree."""
    waiting = [root] if root else []
    while waiting:
        _, key, properties, children = waiting.pop()
        yield key, properties
        waiting += children
