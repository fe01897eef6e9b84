"""Who may ask, and what every answer carries: hosts, sites, the token, the security headers.

On the loopback address no token is needed: another site's page cannot reach the program under a
name of this machine (host list against DNS rebinding) and cannot post to it (same-origin checks).
Beyond loopback every request needs the token that the command printed.
"""

import hmac
import secrets
from dataclasses import dataclass
from urllib.parse import urlsplit

from dash import Dash
from flask import Flask, Response, abort, redirect, request
from werkzeug.wrappers import Response as Answer

from app.places import software_version

LOOPBACK = frozenset({"127.0.0.1", "localhost", "::1"})
FILES = ("/intake", "/scan/result")  # requests that are a file, and have limits of their own
MAX_WORDS = 2 * 2**20  # bytes of a request that is no file
CALLBACKS = "/_dash-update-component"  # where the pages of the framework ask
SHUT = frozenset({"/_reload-hash"})  # what the framework opens for developers
TOKEN_LETTERS = 43  # 32 random bytes in letters that an address may hold


@dataclass(frozen=True)
class Door:
    """Who is let in.

    Attributes
    ----------
    hosts : frozenset of str
        Names under which requests may come, without port.
    token : str
        What every request must carry; empty on the loopback address.
    """

    hosts: frozenset[str] = LOOPBACK
    token: str = ""

    def __post_init__(self) -> None:
        if not self.token and not self.hosts <= LOOPBACK:
            raise ValueError("token must be given when other machines are let in, but got none")
        if self.token and len(self.token) < TOKEN_LETTERS:
            raise ValueError(
                f"token must have at least {TOKEN_LETTERS} letters, but got {len(self.token)}"
            )


def new_token() -> str:
    """Return a token that nobody guesses: 32 random bytes, in letters that an address may hold."""
    return secrets.token_urlsafe(32)


def guard(server: Flask, app: Dash, door: Door) -> None:
    """Refuse strange hosts, other sites' requests and strangers; send the security headers."""

    @server.before_request
    def _check() -> Answer | None:
        if urlsplit(f"//{request.host.lower()}").hostname not in door.hosts:
            abort(421)
        if request.path in SHUT:
            abort(404)
        if request.path not in FILES:
            request.max_content_length = MAX_WORDS
        site = request.headers.get("Sec-Fetch-Site", "same-origin")
        mode = request.headers.get("Sec-Fetch-Mode", "navigate")
        if site in ("cross-site", "same-site") and mode != "navigate":
            abort(403)  # another site may link here, but not set the machine to work
        if request.method not in ("GET", "HEAD"):
            if site != "same-origin":
                abort(403)
            origin = request.headers.get("Origin")
            if origin and urlsplit(origin).netloc != request.host:
                abort(403)
        elsewhere = _with_token(door.token) if door.token else None
        if request.path == CALLBACKS and request.is_json and not _is_question(app):
            abort(400)
        return elsewhere

    policy: dict[str, str] = {}

    @server.after_request
    def _headers(response: Response) -> Response:
        if not policy:
            policy["csp"] = (
                "default-src 'none'; script-src 'self' " + " ".join(app.csp_hashes()) + "; "
                "style-src 'self' 'unsafe-inline'; img-src 'self' data: blob:; font-src 'self'; "
                "connect-src 'self'; frame-src 'self'; base-uri 'none'; form-action 'none'; "
                "frame-ancestors 'none'; object-src 'none'"
            )
        response.headers.setdefault(
            "Content-Security-Policy", policy["csp"]
        )  # a preview's is its own
        response.headers["X-Content-Type-Options"] = "nosniff"
        response.headers.setdefault("X-Frame-Options", "DENY")
        response.headers["Cross-Origin-Opener-Policy"] = "same-origin"
        response.headers["Cross-Origin-Resource-Policy"] = "same-origin"
        response.headers["Referrer-Policy"] = "no-referrer"
        response.headers["X-Pricewake"] = software_version()
        return response


def _is_question(app: Dash) -> bool:
    """Say whether a request asks a callback that there is, in the shape that one takes."""
    asked = request.get_json(silent=True)
    if not isinstance(asked, dict) or str(asked.get("output")) not in app.callback_map:
        return False
    parts = [asked.get("inputs"), asked.get("state", [])]
    return all(
        isinstance(part, list) and all(isinstance(each, dict) and "id" in each for each in part)
        for part in parts
    )


def _with_token(token: str) -> Answer | None:
    """Let the cookie in; turn the token of an address into the cookie; refuse all else."""
    cookie = f"pricewake-token-{urlsplit(f'//{request.host}').port or 80}"  # ports share cookies
    if _same(request.cookies.get(cookie, ""), token):
        return None
    given = request.args.get("token", "")
    if request.method != "GET" or not _same(given, token):
        abort(401)
    rest = "&".join(
        part
        for part in request.query_string.decode(errors="replace").split("&")
        if part and not part.startswith("token=")
    )
    path = "/" + request.path.lstrip("/\\")  # never another host
    answer = redirect(f"{path}?{rest}" if rest else path, code=303)
    answer.set_cookie(cookie, token, httponly=True, samesite="Strict", path="/")
    answer.headers["Cache-Control"] = "no-store"
    return answer


def _same(given: str, token: str) -> bool:
    return hmac.compare_digest(given.encode(errors="replace"), token.encode())
