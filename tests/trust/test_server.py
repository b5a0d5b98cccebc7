"""The server: whom it answers, what it gives, and what it says when it does not."""

import base64
import http.client
import json
import re
import socket
import struct
import subprocess
import sys
from collections.abc import Iterator
from contextlib import closing, suppress
from urllib.parse import urlsplit

import pytest

from explorer.app.guard import allowed_host, is_local
from explorer.app.serve import LARGEST_MESSAGE, LARGEST_REQUEST
from explorer.scenario.files import LARGEST_FILE
from tests.serving import ROOT, answers, running, started

NOT_HERE = "There is nothing at this address."
ALLOWED = "allowed an address of this machine, such as 127.0.0.1"
NOT_FOR_YOU = "This server answers only its own page, under its own address."


@pytest.fixture(scope="module")
def url() -> Iterator[str]:
    """Address of a server with the shipped demo."""
    with running() as found:
        yield found


class Answer:
    """Status, headers and text of an answer."""

    def __init__(self, url: str, path: str = "/", method: str = "GET", **headers: str) -> None:
        with closing(http.client.HTTPConnection(urlsplit(url).netloc, timeout=60)) as connection:
            connection.putrequest(method, path, skip_host="Host" in headers)
            for name, value in headers.items():
                connection.putheader(name.replace("_", "-"), value)
            connection.endheaders()
            got = connection.getresponse()
            self.status, self.headers, self.content = got.status, got.headers, got.read()
        self.text = self.content.decode(errors="replace")


@pytest.fixture(scope="module")
def token(url: str) -> str:
    """What a page was given to open its websocket with."""
    return re.search(r'"token":"([^"]+)"', Answer(url).text)[1]


def handshake(url: str, token: str, **headers: str) -> tuple[int, socket.socket]:
    """Status of the answer to a raw websocket handshake, and the connection."""
    place = urlsplit(url)
    asked = {
        "Host": place.netloc,
        "Upgrade": "websocket",
        "Connection": "Upgrade",
        "Sec-WebSocket-Version": "13",
        "Sec-WebSocket-Key": base64.b64encode(b"0123456789abcdef").decode(),
        "Sec-WebSocket-Protocol": f"bokeh, {token}",
    } | headers
    connection = socket.create_connection((place.hostname, place.port), timeout=60)
    lines = ["GET /ws HTTP/1.1", *(f"{name}: {value}" for name, value in asked.items()), "", ""]
    connection.sendall("\r\n".join(lines).encode())
    answer = b""
    while b"\r\n\r\n" not in answer:
        got = connection.recv(1)
        if not got:
            break
        answer += got
    return int(answer.split()[1]), connection


def frame(content: bytes, kind: int = 1) -> bytes:
    """A websocket frame of a client, with a mask that changes nothing."""
    size = len(content)
    if size < 126:
        head = struct.pack("!BB", 0x80 | kind, 0x80 | size)
    elif size < 65_536:
        head = struct.pack("!BBH", 0x80 | kind, 0x80 | 126, size)
    else:
        head = struct.pack("!BBQ", 0x80 | kind, 0x80 | 127, size)
    return head + bytes(4) + content


def closed_with(connection: socket.socket) -> int | None:
    """Code with which the server closes a websocket, 0 where it gives none; None where it just ends."""
    received = b""
    with suppress(ConnectionError):
        while got := connection.recv(65_536):
            received += got
    while len(received) >= 2:
        kind, size = received[0] & 0x0F, received[1] & 0x7F
        start = 2
        if size == 126:
            size, start = struct.unpack("!H", received[2:4])[0], 4
        elif size == 127:
            size, start = struct.unpack("!Q", received[2:10])[0], 10
        if kind == 8:
            return struct.unpack("!H", received[start : start + 2])[0] if size >= 2 else 0
        received = received[start + size :]
    return None


# ---- whom it answers ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("address", ["127.0.0.1", "127.0.0.7", "localhost", "::1"])
def test_addresses_of_this_machine_alone(address: str) -> None:
    """Nobody else can reach what listens there."""
    assert is_local(address)


@pytest.mark.parametrize("address", ["0.0.0.0", "::", "", "192.0.2.1", "plant-office"])
def test_addresses_others_can_reach(address: str) -> None:
    """All interfaces, those of a network, and any name that is not known to be local."""
    assert not is_local(address)


@pytest.mark.parametrize(
    ("host", "address", "port", "known"),
    [
        ("127.0.0.1:5006", "127.0.0.1", 5006, True),
        ("LOCALHOST:5006", "127.0.0.1", 5006, True),
        ("[::1]:5006", "::1", 5006, True),
        ("localhost", "127.0.0.1", 80, True),
        ("127.0.0.1", "127.0.0.1", 5006, False),
        ("127.0.0.1:80", "127.0.0.1", 5006, False),
        ("elsewhere.example:5006", "127.0.0.1", 5006, False),
        ("192.0.2.1:5006", "127.0.0.1", 5006, False),
        ("", "127.0.0.1", 5006, False),
        ("192.0.2.1:5006", "192.0.2.1", 5006, True),
        ("localhost:5006", "192.0.2.1", 5006, False),
        ("192.0.2.1:5006", "0.0.0.0", 5006, True),
        ("[2001:db8::1]:5006", "::", 5006, True),
        ("localhost:5006", "0.0.0.0", 5006, True),
        (f"{socket.gethostname()}:5006", "0.0.0.0", 5006, True),
        ("elsewhere.example:5006", "0.0.0.0", 5006, False),
        ("elsewhere.example@192.0.2.1:5006", "0.0.0.0", 5006, False),
        ("192.0.2.1:70000", "0.0.0.0", 5006, False),
        ("[::1:5006", "0.0.0.0", 5006, False),
    ],
)
def test_names_the_server_answers_to(host: str, address: str, port: int, known: bool) -> None:
    """A foreign name that was pointed at this machine is none of them."""
    assert allowed_host(host, address, port) is known


def test_without_an_address_only_this_machine_is_served(url: str) -> None:
    """The page is there under 127.0.0.1 and under no other address of the machine."""
    port = urlsplit(url).port
    assert urlsplit(url).hostname == "127.0.0.1"
    assert Answer(url).status == 200
    others = {found[4][0] for found in socket.getaddrinfo(socket.gethostname(), port, socket.AF_INET)}
    for other in {*others, "127.0.0.2"} - {"127.0.0.1"}:
        with pytest.raises(OSError):
            socket.create_connection((other, port), timeout=5)


def test_serving_others_is_said_in_words() -> None:
    """A caution on stderr, and only where others can reach the page."""
    with started("--address", "0.0.0.0", stderr=subprocess.PIPE) as (url, process):
        assert answers(url)
        process.terminate()
        assert process.stderr.read().startswith(
            "Caution: other machines can reach this page at 0.0.0.0, without a password; "
            "without --address only this machine can.\n"
        )
    with started(stderr=subprocess.PIPE) as (url, process):
        process.terminate()
        assert process.stderr.read() == ""


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        (["--address", "192.0.2.1"], f"--address: 192.0.2.1 is not an address of this machine; {ALLOWED}"),
        (["--address", "no-such-name.invalid"], f"--address: no-such-name.invalid is not known; {ALLOWED}"),
        (
            ["--port", "{taken}"],
            "--port: {taken} of 127.0.0.1 is taken already; allowed a free one, or 0 for any",
        ),
    ],
)
def test_an_address_that_cannot_be_served_is_refused_in_a_sentence(arguments: list[str], told: str) -> None:
    """Exit status 2, no traceback."""
    with socket.create_server(("127.0.0.1", 0)) as taken:
        port = str(taken.getsockname()[1])
        command = [sys.executable, "-m", "explorer", "serve", "--no-browser"]
        command += [argument.format(taken=port) for argument in arguments]
        done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, timeout=60)
    assert done.returncode == 2
    assert done.stderr == told.format(taken=port) + "\n"


@pytest.mark.parametrize(
    "headers",
    [
        {"Host": "elsewhere.example"},
        {"Host": "elsewhere.example:80"},
        {"Origin": "http://elsewhere.example"},
        {"Origin": "null"},
        {"Sec_Fetch_Site": "cross-site", "Sec_Fetch_Mode": "no-cors", "Sec_Fetch_Dest": "image"},
        {"Sec_Fetch_Site": "same-site", "Sec_Fetch_Mode": "navigate", "Sec_Fetch_Dest": "iframe"},
    ],
)
def test_a_page_elsewhere_is_given_nothing(url: str, headers: dict[str, str]) -> None:
    """Neither under a name of its own, nor as a script, picture or frame of its own."""
    for path in ("/", "/static/js/bokeh.min.js"):
        answer = Answer(url, path, **headers)
        assert answer.status == 403
        assert NOT_FOR_YOU in answer.text and "token" not in answer.text


def test_a_link_elsewhere_may_lead_here(url: str) -> None:
    """Following it is what the user wanted."""
    headers = {"Sec_Fetch_Site": "cross-site", "Sec_Fetch_Mode": "navigate", "Sec_Fetch_Dest": "document"}
    assert Answer(url, **headers).status == 200


def test_the_websocket_is_open_to_the_page_itself(url: str, token: str) -> None:
    """Its own origin, and programs that are no browser."""
    for headers in ({"Origin": url.rstrip("/")}, {}):
        status, connection = handshake(url, token, **headers)
        connection.close()
        assert status == 101


@pytest.mark.parametrize(
    "headers",
    [
        {"Origin": "http://elsewhere.example"},
        {"Origin": "https://127.0.0.1"},
        {"Origin": "http://127.0.0.1:1"},
        {"Origin": "null"},
        {"Origin": ""},
        {"Origin": "http://elsewhere.example", "Host": "elsewhere.example"},
    ],
)
def test_the_websocket_is_closed_to_pages_elsewhere(url: str, token: str, headers: dict[str, str]) -> None:
    """Also to one whose name was pointed at this machine, even with what a page here was given."""
    status, connection = handshake(url, token, **headers)
    connection.close()
    assert status == 403


def test_nobody_can_name_a_session(url: str) -> None:
    """Neither a link nor a page can choose the session another one gets, nor join it by its name alone."""
    answer = Answer(url, "/?bokeh-session-id=chosen")
    assert answer.status == 403 and "chosen" not in answer.text
    assert Answer(url, "/", Bokeh_Session_Id="chosen").status == 403
    made_up = base64.urlsafe_b64encode(json.dumps({"session_id": "chosen"}).encode()).decode().rstrip("=")
    _, connection = handshake(url, made_up)
    with closing(connection):
        assert closed_with(connection) is not None
    assert answers(url)


# ---- what it gives -----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "path",
    [
        "/nothing",
        "/scenarios/amber.json",
        "/explorer/cli.py",
        "/autoload.js?bokeh-autoload-element=x",
        "/metadata",
        "/liveness",
        "/admin",
        "/rest/session_info",
        "/components/explorer.app.files/FileDesk/_esm/files.js",
        "/components/this/x/css/x",
        "//etc/passwd",
        "/../../etc/passwd",
    ],
)
def test_there_is_nothing_but_the_page(url: str, path: str) -> None:
    """No scenario file, no program text, and nothing of what the libraries offer besides."""
    answer = Answer(url, path)
    assert answer.status == 404
    assert NOT_HERE in answer.text


@pytest.mark.parametrize(
    "path",
    [
        "/static/",
        "/static",
        "/static/js/",
        "/static/js",
        "/static/extensions/",
        "/static/extensions/panel/",
        "/static/../../../../../../../../etc/passwd",
        "/static/..%2f..%2f..%2f..%2f..%2f..%2f..%2f..%2fetc/passwd",
        "/static/%2e%2e/%2e%2e/%2e%2e/settings.py",
        "/static/..\\..\\settings.py",
        "/static//etc/passwd",
        "/static/%00",
        "/static/extensions/panel/../../../../../../../../../etc/passwd",
        "/static/extensions/panel/%2e%2e/config.py",
        "/static/extensions/../../../../etc/passwd",
        "/static/extensions/explorer/app/serve.py",
    ],
)
def test_folders_give_neither_a_listing_nor_what_lies_beside_them(url: str, path: str) -> None:
    """Only the scripts and styles that the libraries ship can be asked for, each by its name."""
    answer = Answer(url, path)
    assert answer.status in (403, 404)
    assert len(answer.text) < 300 and "<a " not in answer.text and "root:" not in answer.text


@pytest.mark.parametrize(
    ("path", "method", "status", "told"),
    [
        ("/nothing", "GET", 404, NOT_HERE),
        ("/", "POST", 405, "This is not answered here."),
        ("/", "DELETE", 405, "This is not answered here."),
        ("/ws", "GET", 400, "This request could not be understood."),
        ("/static/js", "GET", 403, NOT_FOR_YOU),
        ("/?bokeh-token=%ff", "GET", None, None),
        ("/?bokeh-token=x.y.z", "GET", None, None),
        ("/?bokeh-session-id=a&bokeh-token=b", "GET", None, None),
    ],
)
def test_errors_are_plain_words(
    url: str, path: str, method: str, status: int | None, told: str | None
) -> None:
    """No traceback, no name of a file or a library."""
    answer = Answer(url, path, method)
    assert answer.status >= 400
    assert status is None or answer.status == status
    assert told is None or told in answer.text
    assert re.fullmatch(
        r'<!doctype html><html lang="en"><title>Blendwright</title><p>[A-Z][\w ,;]+\.</p></html>\n',
        answer.text,
    )
    assert answer.headers["Content-Type"] == "text/html; charset=utf-8"


def test_every_answer_has_the_headers_that_keep_a_page_to_itself(url: str) -> None:
    """Not in a frame, nothing from elsewhere, no guessing of types, no telling of the address."""
    for path in ("/", "/static/js/bokeh.min.js", "/favicon.ico", "/nothing"):
        headers = Answer(url, path).headers
        assert headers["X-Content-Type-Options"] == "nosniff"
        assert headers["X-Frame-Options"] == "DENY"
        assert headers["Referrer-Policy"] == "no-referrer"
        policy = headers["Content-Security-Policy"]
        assert "default-src 'self'" in policy and "frame-ancestors 'none'" in policy
        assert "http" not in policy and "*" not in policy
        assert headers["Server"] is None
        assert headers["Access-Control-Allow-Origin"] is None


def test_the_page_is_kept_nowhere_and_its_scripts_are(url: str) -> None:
    """A page from a cache would belong to a session that is gone."""
    assert Answer(url).headers["Cache-Control"] == "no-store"
    assert Answer(url, "/nothing").headers["Cache-Control"] == "no-store"
    scripts = Answer(url, "/static/js/bokeh.min.js")
    assert scripts.headers["Cache-Control"] != "no-store"
    assert scripts.headers["Etag"]


# ---- how much it takes -------------------------------------------------------------------------------------


def test_the_largest_file_fits_into_a_message_and_not_much_more() -> None:
    """Bytes arrive as four characters for three."""
    assert LARGEST_FILE * 4 / 3 < LARGEST_MESSAGE < LARGEST_FILE * 2


def test_a_message_beyond_the_limit_is_refused_before_it_is_taken_in(url: str, token: str) -> None:
    """The size is announced first; the connection closes as 'too big' and the server goes on."""
    _, connection = handshake(url, token)
    with closing(connection):
        announced = struct.pack("!BBQ", 0x81, 0x80 | 127, LARGEST_MESSAGE + 1) + bytes(4)
        connection.sendall(announced)
        assert closed_with(connection) == 1009
    assert answers(url)


def test_parts_of_a_message_count_together(url: str, token: str) -> None:
    """A message in pieces gets no further than one in a single piece."""
    _, connection = handshake(url, token)
    with closing(connection), suppress(ConnectionError):
        piece = b"x" * 1_000_000
        first = struct.pack("!BBQ", 0x01, 0x80 | 127, len(piece)) + bytes(4) + piece
        next_one = struct.pack("!BBQ", 0x00, 0x80 | 127, len(piece)) + bytes(4) + piece
        connection.sendall(first)
        for _ in range(LARGEST_MESSAGE // len(piece) + 1):
            connection.sendall(next_one)
        assert closed_with(connection) == 1009
    assert answers(url)


def test_nonsense_on_the_websocket_ends_that_connection_only(url: str, token: str) -> None:
    """Other pages go on, and nothing of the server's inside is told."""
    for said in (b"", b"nonsense", b"{}", b'{"msgid":"1","msgtype":"PATCH-DOC"}', b"\xff\xfe"):
        _, connection = handshake(url, token)
        with closing(connection):
            connection.sendall(3 * frame(said))
            connection.settimeout(0.5)
            with suppress(TimeoutError):
                closed_with(connection)
    assert answers(url)


def test_the_body_of_a_request_is_not_taken_in(url: str) -> None:
    """A body beyond the limit is refused by its announced size."""
    place = urlsplit(url)
    with closing(socket.create_connection((place.hostname, place.port), timeout=60)) as connection:
        head = f"POST / HTTP/1.1\r\nHost: {place.netloc}\r\nContent-Length: {LARGEST_REQUEST + 1}\r\n\r\n"
        connection.sendall(head.encode())
        assert connection.recv(1000).startswith(b"HTTP/1.1 4") or connection.recv(1) == b""
    assert answers(url)
