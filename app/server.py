"""The Dash application: pages, exports, uploads, and what a request must look like."""

import secrets
from typing import Any

from dash import Dash, Input, Output
from flask import Flask, Response, request

from app import faults, frame, kept_routes, serving
from app.brief import routes as brief_routes
from app.compute import Bridge
from app.desk import routes as desk_routes
from app.guard import Door, guard
from app.intake.csv_files import MAX_BYTES
from app.memory import server_cache
from app.page_table import EXPORTS, PAGES, WORKS
from app.pages import lag
from app.places import bundled
from app.scan import routes as scan_routes
from app.state import ViewState
from app.workspace import Workspace

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


def build_app(workspace: Workspace, door: Door = Door()) -> Dash:  # noqa: B008 (it is frozen)
    """Return the dashboard for a workspace; several can live in one process.

    `door` says under which names, and with which token, requests are let in.
    """
    server = Flask("app.server", static_folder=None)
    server.debug = False  # whatever the environment says
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
        enable_mcp=False,
    )
    bridge = Bridge(workspace, server_cache(server))
    server.extensions["pricewake"] = bridge
    app.layout = lambda: frame.frame(shows_invented(bridge))  # anew for each page load

    @app.callback(
        Output("page", "children"),
        Output("page-title", "children"),
        Input("address", "pathname"),
        Input("address", "search"),
    )
    def _page(path: str | None, query: str | None) -> tuple[Any, str]:
        page = next((p for p in PAGES if path == p.PATH), lag if path in (None, "/") else None)
        if page is None:
            return frame.missing(), "No such page"
        try:
            return page.layout(query or "", bridge), page.TITLE
        except ValueError as error:  # a workspace that cannot be read
            return frame.unreadable(str(error)), page.TITLE

    for page in PAGES:
        page.register(app, bridge)
    _register_routes(server, bridge)
    faults.register(server)
    guard(server, app, door)
    serving.register(server)
    return app


def first_page_made(server: Flask) -> None:
    """Make the page that opens first, before anyone asks; what it took is kept for who does."""
    try:
        lag.layout("", server.extensions["pricewake"])
    except ValueError:  # a workspace that cannot be read; the page will say so
        return


def shows_invented(bridge: Bridge) -> bool:
    """Say whether anything in view belongs to the invented economy."""
    try:
        shown = bridge.workspace.as_of().series.values()
    except ValueError:  # a workspace that cannot be read; the page says so
        return False
    return any("(invented)" in series.source for series in shown)


def _register_routes(server: Flask, bridge: Bridge) -> None:
    run = secrets.token_hex(8)

    @server.get("/alive")
    def _alive() -> dict[str, Any]:
        """Tell which run of the program answers; a page that knew another one opens anew."""
        return {"run": run, "invented": shows_invented(bridge)}

    @server.after_request
    def _no_such_page(response: Response) -> Response:
        known = {"/", *(page.PATH for page in PAGES)}
        if request.endpoint == "/<path:path>" and request.path not in known:
            response.status_code = 404
        return response

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
    brief_routes.register(server, bridge)
    kept_routes.register(server, bridge)
    scan_routes.register(server, bridge)
