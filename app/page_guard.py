"""Who may ask the page's server for what: checked before anything of a request is used.

Idea: the server listens on the loopback alone, but every page that a browser has open can send
requests there, and every user of the machine too. So each request must name this server as its
Host, against names of others that point here; if it says whence it comes (Origin, Sec-Fetch-Site),
that must be this page, and whatever writes and every socket must say so; and what is below /api
must bring the token of this start, in a header that no foreign page can set, or in the socket's
first message. A fragment, which the token is printed in, is never sent to a server or logged.

A body is counted as it comes and refused at its limit: by its stated length before a byte of it is
read, else when one byte too many has come. Neither keeps more than the limit.
"""

import asyncio
import hmac
import json
import re
import secrets
from collections.abc import Awaitable, Callable, MutableMapping
from dataclasses import dataclass
from typing import Any

Scope = MutableMapping[str, Any]
Message = MutableMapping[str, Any]
Receive = Callable[[], Awaitable[Message]]
Send = Callable[[Message], Awaitable[None]]
App = Callable[[Scope, Receive, Send], Awaitable[None]]
Headers = list[tuple[bytes, bytes]]

LARGEST_BODY = 1 << 20  # bytes; the largest design file is 1 MB
PATIENCE_S = 20.0  # for a body: who sends slower than this holds a place that others need
TOKEN_HEADER = b"x-page-token"
WEBSOCKET_REFUSED = 1008  # "policy violation" of RFC 6455


@dataclass(frozen=True, slots=True)
class Door:
    """Where the server listens and the token of this start."""

    port: int
    token: str

    @property
    def hosts(self) -> frozenset[str]:
        """What a request may name as its Host."""
        names = ("127.0.0.1", "localhost")
        plain = names if self.port == 80 else ()
        return frozenset([*(f"{name}:{self.port}" for name in names), *plain])

    @property
    def origins(self) -> frozenset[str]:
        """What a request may name as its Origin."""
        return frozenset(f"http://{host}" for host in self.hosts)

    @property
    def address(self) -> str:
        """What the user opens."""
        return f"http://127.0.0.1:{self.port}/#token={self.token}"

    def opens(self, token: object) -> bool:
        """Whether it is the token, in a time that does not tell how much of it is right."""
        given = token.encode("utf-8", "replace") if isinstance(token, str) else b""
        return hmac.compare_digest(given, self.token.encode())


def new_token() -> str:
    """A token of 256 random bits."""
    return secrets.token_urlsafe(32)


class TooLarge(Exception):
    """A body beyond the limit, or one that comes too slowly; with the status to answer."""

    def __init__(self, status: int, said: str) -> None:
        """Keep both."""
        super().__init__(said)
        self.status = status


class Guard:
    """The server's outermost layer."""

    def __init__(self, app: App, door: Door) -> None:
        """Let through to `app` what may pass."""
        self._app, self._door = app, door

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Answer, or let through, one request or socket."""
        if scope["type"] == "lifespan":
            await self._app(scope, receive, send)
            return
        headers: Headers = scope["headers"]
        fault = self._fault(scope, headers)
        if scope["type"] == "websocket":
            if fault:
                await receive()  # its beginning
                await send({"type": "websocket.close", "code": WEBSOCKET_REFUSED})
                return
            await self._app(scope, receive, send)
            return
        if fault:
            await _answer(send, *fault)
            return
        await self._guarded(scope, receive, send)

    def _fault(self, scope: Scope, headers: Headers) -> tuple[int, str] | None:
        """Status and reason of a refusal, or None."""
        hosts, origins = _values(headers, b"host"), _values(headers, b"origin")
        if len(hosts) != 1 or hosts[0] not in self._door.hosts:
            return 403, "refused: this server has another name"
        is_socket = scope["type"] == "websocket"
        method = "GET" if is_socket else scope["method"]
        if method not in ("GET", "HEAD", "POST"):
            return 405, "refused: accepted GET and POST"
        must_say = is_socket or method == "POST"
        if len(origins) > 1 or any(one not in self._door.origins for one in origins):
            return 403, "refused: a request of another page"
        if must_say and not origins:
            return 403, "refused: a request that does not say which page it comes from"
        if any(site not in ("same-origin", "none") for site in _values(headers, b"sec-fetch-site")):
            return 403, "refused: a request of another page"
        path: str = scope["path"]
        if path.startswith("/api") and not is_socket:
            tokens = _values(headers, TOKEN_HEADER)
            if len(tokens) != 1 or not self._door.opens(tokens[0]):
                return 403, "refused: not the token of this start; open the address that it printed"
        stated = _values(headers, b"content-length")
        if any(not re.fullmatch(r"[0-9]{1,12}", one) or int(one) > LARGEST_BODY for one in stated):
            return 413, f"refused: accepted bodies up to {LARGEST_BODY} bytes"
        return None

    async def _guarded(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Pass a request on with its body bounded and its answer's headers completed."""
        seen, began = 0, False
        loop = asyncio.get_running_loop()
        until = loop.time() + PATIENCE_S
        has_come = False

        async def bounded() -> Message:
            nonlocal seen, has_come
            if has_come:
                return await receive()  # waits for the end of the connection
            try:
                async with asyncio.timeout_at(until):
                    message = await receive()
            except TimeoutError:
                raise TooLarge(408, "refused: the body came too slowly") from None
            if message["type"] == "http.request":
                seen += len(message.get("body", b""))
                has_come = not message.get("more_body", False)
                if seen > LARGEST_BODY:
                    raise TooLarge(413, f"refused: accepted bodies up to {LARGEST_BODY} bytes")
            return message

        async def completed(message: Message) -> None:
            nonlocal began
            if message["type"] == "http.response.start":
                began = True
                own = {name for name, _ in message["headers"]}
                more = [pair for pair in _security(self._door.port) if pair[0] not in own]
                message = {**message, "headers": [*message["headers"], *more]}
            await send(message)

        try:
            await self._app(scope, bounded, completed)
        except TooLarge as error:
            if began:
                raise
            await _answer(send, error.status, str(error))


def _values(headers: Headers, name: bytes) -> list[str]:
    return [value.decode("latin-1") for key, value in headers if key == name]


def _security(port: int) -> Headers:
    """Headers of every answer."""
    sockets = f"ws://127.0.0.1:{port} ws://localhost:{port}"
    policy = (
        f"default-src 'self'; img-src 'self' blob: data:; connect-src 'self' {sockets}; "
        "object-src 'none'; base-uri 'none'; form-action 'none'; frame-ancestors 'none'"
    )
    return [
        (b"content-security-policy", policy.encode()),
        (b"x-content-type-options", b"nosniff"),
        (b"x-frame-options", b"DENY"),
        (b"referrer-policy", b"no-referrer"),
        (b"cross-origin-resource-policy", b"same-origin"),
        (b"cross-origin-opener-policy", b"same-origin"),
        (b"cache-control", b"no-store"),
    ]


async def _answer(send: Send, status: int, said: str) -> None:
    """An error in JSON; the connection ends, whatever else was to come on it."""
    body = json.dumps({"error": said}).encode()
    headers = [
        (b"content-type", b"application/json"),
        (b"content-length", str(len(body)).encode()),
        (b"connection", b"close"),
        *_security(0),
    ]
    await send({"type": "http.response.start", "status": status, "headers": headers})
    await send({"type": "http.response.body", "body": body})
