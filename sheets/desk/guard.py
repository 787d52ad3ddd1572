"""What stands before every route: names, methods, sizes, origin; and the headers of every answer."""

from __future__ import annotations

import asyncio
from typing import TYPE_CHECKING, Final
from urllib.parse import urlsplit

from starlette.datastructures import Headers, MutableHeaders
from starlette.responses import PlainTextResponse

if TYPE_CHECKING:
    from collections.abc import Iterable

    from starlette.types import ASGIApp, Message, Receive, Scope, Send

LARGEST_BODY: Final = 65_536
"""Bytes of a form; the longest one has a tenth of it."""
LONGEST_BODY_S: Final = 20.0
LARGEST_QUERY: Final = 2_048
FORM: Final = "application/x-www-form-urlencoded"
BODY: Final = "jamnut.body"
"""Where a route finds the form that was read here."""
METHODS: Final = ("GET", "HEAD", "POST")
HEADERS: Final = {
    "Cache-Control": "no-store",
    "Content-Security-Policy": (
        "default-src 'none'; style-src 'self'; form-action 'self'; base-uri 'none'; frame-ancestors 'none'"
    ),
    "Cross-Origin-Opener-Policy": "same-origin",
    "Cross-Origin-Resource-Policy": "same-origin",
    "Permissions-Policy": "camera=(), geolocation=(), microphone=()",
    # With no-referrer a browser would send the origin of a form as null.
    "Referrer-Policy": "same-origin",
    "X-Content-Type-Options": "nosniff",
    "X-Frame-Options": "DENY",
}
SECURE_HEADERS: Final = {"Strict-Transport-Security": "max-age=31536000"}


class Guard:
    """Refuses what no page of ours sends, before any of it is looked at."""

    def __init__(self, app: ASGIApp, *, hosts: Iterable[str], secure: bool) -> None:
        """``hosts``: the names that it answers to; ``secure``: reached by TLS."""
        self.app = app
        self.hosts = frozenset(name.lower() for name in hosts)
        self.headers = {**HEADERS, **(SECURE_HEADERS if secure else {})}

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        if scope["type"] != "http":
            await self.app(scope, receive, send)
            return

        async def sending(message: Message) -> None:
            if message["type"] == "http.response.start":
                headers = MutableHeaders(scope=message)
                for name, text in self.headers.items():
                    headers[name] = text
            await send(message)

        refusal = self._refusal(scope)
        if refusal is not None:
            await refusal(scope, receive, sending)
            return
        if scope["method"] == "POST":
            body = await _body(receive)
            if isinstance(body, int):
                await _plain(body)(scope, receive, sending)
                return
            scope[BODY] = body
        await self.app(scope, receive, sending)

    def _refusal(self, scope: Scope) -> PlainTextResponse | None:
        headers = Headers(scope=scope)
        if _host(headers.get("host", "")) not in self.hosts:
            return _plain(421)
        if scope["method"] not in METHODS:
            return _plain(405)
        if len(scope["query_string"]) > LARGEST_QUERY or len(scope["path"]) > LARGEST_QUERY:
            return _plain(414)
        if scope["method"] == "POST":
            return _posted(headers)
        return None


def _posted(headers: Headers) -> PlainTextResponse | None:
    """What stands against a form: its kind, its length, and another site as its origin."""
    if headers.get("content-type", "").split(";")[0].strip().lower() != FORM:
        return _plain(415)
    length = headers.get("content-length", "0")
    if not (length.isascii() and length.isdigit()) or int(length[:12]) > LARGEST_BODY:
        return _plain(413)
    origin = headers.get("origin")
    if origin is not None and _netloc(origin) != headers.get("host", "").lower():
        return _plain(403)
    if headers.get("sec-fetch-site", "same-origin") not in ("same-origin", "none"):
        return _plain(403)
    return None


def _host(text: str) -> str:
    """The name in a Host header, without its port; empty for what is none."""
    try:
        return (urlsplit(f"//{text}").hostname or "").lower()
    except ValueError:
        return ""


def _netloc(origin: str) -> str:
    try:
        return urlsplit(origin).netloc.lower()
    except ValueError:
        return ""


_SAYS: Final = {
    400: "The request broke off.",
    403: "The form comes from another site. Nothing was written.",
    405: "This method isn't served here.",
    408: "The form came too slowly. Nothing was written.",
    413: "The form is too large. Nothing was written.",
    414: "The address is too long.",
    415: "Forms only. Nothing was written.",
    421: "This name isn't served here.",
}


def _plain(status: int) -> PlainTextResponse:
    return PlainTextResponse(_SAYS[status], status_code=status)


async def _body(receive: Receive) -> bytes | int:
    """The whole form, or the status that says why not."""
    parts: list[bytes] = []
    length = 0
    try:
        async with asyncio.timeout(LONGEST_BODY_S):
            while True:
                message = await receive()
                if message["type"] != "http.request":
                    return 400
                parts.append(message.get("body", b""))
                length += len(parts[-1])
                if length > LARGEST_BODY:
                    return 413
                if not message.get("more_body", False):
                    return b"".join(parts)
    except TimeoutError:
        return 408
