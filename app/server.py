"""The Dash application: pages, exports, uploads, and what a request must look like."""

import secrets
from typing import Any
from urllib.parse import urlsplit

from dash import Dash, Input, Output, dcc, html
from flask import Flask, Response, abort, request
from werkzeug.exceptions import HTTPException

from app import kept_routes
from app.compute import Bridge
from app.desk import routes as desk_routes
from app.intake.csv_files import MAX_BYTES
from app.memory import server_cache
from app.page_table import EXPORTS, PAGES, WORKS
from app.pages import lag
from app.places import bundled, software_version
from app.scan import routes as scan_routes
from app.state import ViewState
from app.workspace import Workspace

HOSTS = ("127.0.0.1", "localhost", "[::1]")
INDEX = """<!DOCTYPE html>
<html lang="en">
<head>
{%metas%}
<meta name="viewport" content="width=device-width, initial-scale=1">
<title>{%title%}</title>
{%favicon%}
{%css%}
</head>
<body>
<noscript>Pricewake draws its charts in the browser and needs JavaScript.</noscript>
{%app_entry%}
<footer>
{%config%}
{%scripts%}
{%renderer%}
</footer>
</body>
</html>
"""


def build_app(workspace: Workspace) -> Dash:
    """Return the dashboard for a workspace; several can live in one process."""
    server = Flask("app.server", static_folder=None)
    server.config["SECRET_KEY"] = secrets.token_bytes(32)
    server.config["MAX_CONTENT_LENGTH"] = MAX_BYTES
    app = Dash(
        "pricewake",
        server=server,
        assets_folder=str(bundled("assets")),
        title="Pricewake",
        update_title=None,  # type: ignore[arg-type]
        suppress_callback_exceptions=True,
        serve_locally=True,
        compress=False,
        index_string=INDEX,
    )
    bridge = Bridge(workspace, server_cache(server))
    app.layout = _frame()

    @app.callback(
        Output("page", "children"),
        Output("page-title", "children"),
        Input("address", "pathname"),
        Input("address", "search"),
    )
    def _page(path: str | None, query: str | None) -> tuple[Any, str]:
        page = next((p for p in PAGES if path == p.PATH), lag if path in (None, "/") else None)
        if page is None:
            return _missing(), "No such page"
        try:
            return page.layout(query or "", bridge), page.TITLE
        except ValueError as error:  # a workspace that cannot be read
            return _unreadable(str(error)), page.TITLE

    for page in PAGES:
        page.register(app, bridge)
    _register_routes(server, bridge)
    _guard(server, app)
    return app


def _frame() -> html.Div:
    """Return what stays while pages change: name, navigation, theme switch."""
    return html.Div(
        [
            dcc.Location(id="address", refresh="callback-nav"),
            html.A("Skip to the page", href="#page", className="skip"),
            html.Div(
                [
                    html.Span("Pricewake", className="name"),
                    html.Nav(
                        [
                            dcc.Link(page.TITLE, href=page.PATH, id=f"nav-{page.TITLE.lower()}")
                            for page in PAGES
                        ],
                        **{"aria-label": "Pages"},
                    ),
                    html.Button("Dark", id="theme", type="button", **{"aria-pressed": "false"}),
                ],
                className="bar",
            ),
            html.Span(id="page-title", className="hidden-label"),
            html.Main(html.P("Opening …", className="opening"), id="page", tabIndex="-1"),
            html.Div(id="toast", role="status", className="toast"),
        ],
        id="frame",
    )


def _unreadable(sentence: str) -> html.Div:
    return html.Div(
        [
            html.H1("This page cannot be shown"),
            html.P(sentence, className="message", role="alert"),
        ],
        className="headline",
    )


def _missing() -> html.Div:
    return html.Div(
        [
            html.H1("No such page"),
            html.P(
                ["This address shows nothing. Try ", dcc.Link("the Lag page", href="/lag"), "."]
            ),
        ],
        className="headline",
    )


def _register_routes(server: Flask, bridge: Bridge) -> None:
    @server.get("/export/<page>/<view>.csv")
    def _csv(page: str, view: str) -> Response:
        if page not in EXPORTS:
            return Response(f"no page named {page!r} has exports\n", 404, mimetype="text/plain")
        try:
            query = request.query_string.decode(errors="replace")
            name, text = EXPORTS[page](view, query, bridge)
        except ValueError as error:
            return Response(f"{error}\n", status=400, mimetype="text/plain")
        response = Response(text, mimetype="text/csv")
        response.headers["Content-Disposition"] = f'attachment; filename="{name}"'
        return response

    @server.get("/<page>/work/<kind>")
    def _work(page: str, kind: str) -> tuple[dict[str, Any], int]:
        if kind not in WORKS.get(page, {}):
            return {"message": f"there is no work named {kind!r}"}, 404
        try:
            state = ViewState.from_query(request.query_string.decode(errors="replace"))
            progress = bridge.jobs.step(WORKS[page][kind](state, bridge))
        except ValueError as error:
            return {"message": str(error)}, 422
        return {"done": progress.done, "total": progress.total}, 200

    desk_routes.register(server, bridge)
    kept_routes.register(server, bridge)
    scan_routes.register(server, bridge)

    @server.errorhandler(Exception)
    def _failed(error: Exception) -> tuple[dict[str, str], int] | HTTPException:
        if isinstance(error, HTTPException):
            if error.code == 413:
                limit = MAX_BYTES // 2**20
                return {
                    "message": f"a file must be at most {limit} MB, but this one is larger"
                }, 413
            return error
        server.logger.exception("unexpected")
        return {"message": "something went wrong inside the program; the page is still there"}, 500


def _guard(server: Flask, app: Dash) -> None:
    """Refuse strange hosts and other sites' requests; send the security headers."""

    @server.before_request
    def _check() -> None:
        if urlsplit(f"//{request.host.lower()}").hostname not in {h.strip("[]") for h in HOSTS}:
            abort(421)
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

    policy: dict[str, str] = {}

    @server.after_request
    def _headers(response: Response) -> Response:
        if not policy:
            policy["csp"] = (
                "default-src 'none'; script-src 'self' " + " ".join(app.csp_hashes()) + "; "
                "style-src 'self' 'unsafe-inline'; img-src 'self' data: blob:; font-src 'self'; "
                "connect-src 'self'; base-uri 'none'; form-action 'none'; "
                "frame-ancestors 'none'; object-src 'none'"
            )
        response.headers["Content-Security-Policy"] = policy["csp"]
        response.headers["X-Content-Type-Options"] = "nosniff"
        response.headers["Referrer-Policy"] = "no-referrer"
        response.headers["X-Pricewake"] = software_version()
        known = {"/", *(page.PATH for page in PAGES)}
        if request.endpoint == "/<path:path>" and request.path not in known:
            response.status_code = 404  # the frame, which says that there is no such page
        return response
