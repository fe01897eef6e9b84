"""Requests of the Data page: a file in, kept or discarded; a file out of view; a correction."""

from typing import Any

from flask import Flask, request

from app.compute import Bridge
from app.intake.problems import IntakeError
from app.intake.reading import Release, read_release
from app.pages import data_lists
from app.pages.tables import Page, described
from app.state import StateError, ViewState

MOST_LETTERS = 200  # of what is looked for

Reply = tuple[dict[str, Any], int]


def register(server: Flask, bridge: Bridge) -> None:
    """Register the routes; each answers JSON, and a refusal is one sentence."""
    desk, pending = bridge.workspace, bridge.pending

    @server.post("/intake")
    def _intake() -> Reply:
        """Read a file; with ``preview=1`` it is held, else it is kept at once."""
        name = request.args.get("name", "upload.csv")
        content = request.get_data(cache=False)
        try:
            release = read_release(name, content)
            if not release.series:
                said = " ".join(str(problem) for problem in release.problems[:3])
                return {"message": said or f"{release.name}: no series was found in it"}, 422
            if request.args.get("preview") == "1":
                token = pending.hold(release, name, content)
                return {**_described(release), "token": token}, 200
            desk.add(release)
        except (IntakeError, ValueError) as error:
            return {"message": str(error)}, 422
        return _described(release), 200

    @server.post("/intake/keep")
    def _keep() -> Reply:
        """Keep held files, in the order of their tokens."""
        sent = _sent()
        tokens, day = sent.get("tokens"), sent.get("day", "")
        if not isinstance(tokens, list) or not all(isinstance(each, str) for each in tokens):
            return {"message": "the page must send the files to keep, but did not"}, 422
        kept, left, lost = [], list(tokens), 0
        try:
            for token in tokens:
                release = pending.found(token)
                if release is not None:
                    desk.add(release, day)
                    pending.drop(token)
                    kept.append(_described(release))
                lost += release is None
                left.remove(token)
        except ValueError as error:
            return {"message": str(error), "kept": kept, "left": left}, 422
        if lost:
            files = "a file is" if lost == 1 else f"{lost} files are"
            said = f"{files} no longer held for a look; open {'it' if lost == 1 else 'them'} again"
            return {"message": said, "kept": kept, "left": left}, 422
        return {"kept": kept, "left": left}, 200

    @server.post("/intake/sheet")
    def _sheet() -> Reply:
        """Read another sheet of a held workbook in place of the one read first."""
        sent = _sent()
        token, sheet = sent.get("token"), sent.get("sheet")
        if not isinstance(token, str) or not isinstance(sheet, str):
            return {"message": "the page must send a file and a sheet, but did not"}, 422
        try:
            return _described(pending.choose(token, sheet)), 200
        except ValueError as error:
            return {"message": str(error)}, 422

    @server.post("/intake/discard")
    def _discard() -> Reply:
        for token in _sent().get("tokens") or ():
            pending.drop(str(token))
        return {}, 200

    @server.get("/rows/<name>")
    def _rows(name: str) -> Reply:
        """Give one page of a long list, ready to be built by assets/tables.js."""
        asked = request.args
        try:
            at = _whole(asked.get("at", "1"))
            state = ViewState.from_query(request.query_string.decode(errors="replace"))
            page = Page(asked.get("find", "")[:MOST_LETTERS], at)
            table = data_lists.rows(name, state, asked.get("token", ""), page, bridge)
        except ValueError as error:
            return {"message": str(error)}, 422
        if table is None:
            return {"message": "this list is no longer there; open the page anew"}, 404
        return {"table": described(table)}, 200

    @server.post("/workspace/<act>")
    def _change(act: str) -> Reply:
        sent = {key: value for key, value in _sent().items() if isinstance(value, str)}
        try:
            if act == "correct":
                desk.correct(sent["series"], sent["field"], sent["value"])
            elif act == "mark":
                desk.mark(sent["series"], sent["period"], sent["treatment"], sent.get("note", ""))
            elif act == "unmark":
                desk.unmark(sent["series"], sent["period"])
            elif act in ("hide", "show"):
                getattr(desk, act)(sent["file"])
            else:
                return {"message": f"there is nothing named {act!r} to do"}, 404
        except KeyError:
            return {"message": "the page must say what is to change, but did not"}, 422
        except (StateError, ValueError) as error:
            return {"message": str(error)}, 422
        return {}, 200


def _whole(text: str) -> int:
    if not (text.isascii() and text.isdigit() and len(text) <= 9):
        raise ValueError(f"a page must be a whole number, but got {text[:20]!r}")
    return int(text)


def _sent() -> dict[str, Any]:
    found = request.get_json(silent=True)
    return found if isinstance(found, dict) else {}


def _described(release: Release) -> dict[str, Any]:
    return {
        "file": release.name,
        "series": [series.name for series in release.series],
        "problems": len(release.problems),
    }
