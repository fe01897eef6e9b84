"""Requests of the Brief page: a draft to be made, its steps, its preview and its files."""

from collections.abc import Mapping
from typing import Any

from flask import Flask, Response, request

from app.brief.building import PAGE, Building, zipped
from app.brief.document import policy
from app.brief.drafts import Drafts
from app.brief.parts import PAPERS, read_draft, sent_draft
from app.brief.recipe import MOST_BYTES, missing_series, read_recipe
from app.compute import Bridge
from app.state import StateError
from app.words import slug

Reply = tuple[dict[str, Any], int]
GONE = "this brief is no longer held; it has to be made again"


def register(server: Flask, bridge: Bridge) -> None:
    """Register the routes; each answers JSON or a file, and a refusal is one sentence."""
    drafts = Drafts()

    @server.post("/brief/draft")
    def _draft() -> Reply:
        """Begin to make a brief; ``files`` asks for pictures and PDF as well."""
        sent = request.get_json(silent=True)
        try:
            if not isinstance(sent, Mapping):
                raise StateError("the page must send a brief, but did not; load it anew")
            building = _building(sent, bridge, drafts)
        except ValueError as error:
            return {"message": str(error)}, 422
        return {"token": drafts.hold(building), "total": building.total}, 200

    @server.post("/brief/step/<token>")
    def _step(token: str) -> Reply:
        try:
            found = drafts.step(token)
        except ValueError as error:
            drafts.drop(token)
            return {"message": str(error)}, 422
        if found is None:
            return {"message": GONE}, 404
        building, coming = found
        return {
            "done": building.done,
            "total": building.total,
            "coming": coming,
            "said": building.said,
            "title": building.brief.title if building.brief else "",
        }, 200

    @server.post("/brief/drop/<token>")
    def _drop(token: str) -> Reply:
        drafts.drop(token)
        return {}, 200

    @server.get("/brief/preview/<token>.html")
    def _preview(token: str) -> Response:
        files = drafts.files(token)
        if files is None:
            return Response(f"{GONE}\n", 404, mimetype="text/plain")
        response = Response(files[PAGE], mimetype="text/html")
        response.headers["Content-Security-Policy"] = policy("'self'")
        response.headers["X-Frame-Options"] = "SAMEORIGIN"
        response.headers["Cache-Control"] = "no-store"
        return response

    @server.get("/brief/files/<token>.<kind>")
    def _files(token: str, kind: str) -> Response:
        """Give all the files as one archive, or the page alone."""
        files = drafts.files(token)
        if files is None or kind not in ("zip", "html"):
            return Response(f"{GONE}\n", 404, mimetype="text/plain")
        stem = slug(request.args.get("name", ""), 80) or "brief"
        content, kind_of = (
            (zipped(files), "application/zip") if kind == "zip" else (files[PAGE], "text/html")
        )
        response = Response(content, mimetype=kind_of)
        response.headers["Content-Disposition"] = f'attachment; filename="{stem}.{kind}"'
        return response

    @server.post("/brief/recipe")
    def _recipe() -> Reply:
        """Read a recipe and return the draft in it."""
        try:
            if (request.content_length or 0) > MOST_BYTES:
                raise StateError("a recipe must be a recipe.toml, but this file is too large")
            recipe = read_recipe(request.get_data(cache=False).decode("utf-8", "replace"))
            lacking = missing_series(recipe, bridge)
        except ValueError as error:
            return {"message": str(error)}, 422
        said = ""
        if lacking:
            said = f"The recipe needs series that are not loaded: {', '.join(lacking[:4])}."
        return {"draft": sent_draft(recipe.draft), "message": said}, 200


def _building(sent: Mapping[str, Any], bridge: Bridge, drafts: Drafts) -> Building:
    recipe, paper = sent.get("recipe"), sent.get("paper", "a4")
    if paper not in PAPERS:
        raise StateError(f"the paper must be one of {', '.join(PAPERS)}")
    return Building(
        read_draft(sent.get("draft")),
        bridge,
        drafts.pictures,
        before=read_recipe(recipe) if isinstance(recipe, str) and recipe else None,
        numbers=bool(sent.get("files")),
        images=bool(sent.get("files")),
        paper=paper,
    )
