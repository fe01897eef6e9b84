"""Requests of the Scan page that change what is shown: a result file, the invented panel."""

from typing import Any

from flask import Flask, request

from app.compute import Bridge
from app.demo import demo_panel
from app.intake.problems import plain_text
from app.scan.opened import MOST_BYTES, read_result
from app.scan.task import ScanError


def register(server: Flask, bridge: Bridge) -> None:
    """Register the routes; a refusal is one sentence."""

    @server.post("/scan/result")
    def _result() -> tuple[dict[str, Any], int]:
        """Open a result file, sent as it is; the answer is the mark that a state names it by."""
        name = plain_text(request.args.get("name", ""), 120) or "the file"
        try:
            if (request.content_length or 0) > MOST_BYTES:
                raise ScanError(
                    f"a result must have at most {MOST_BYTES >> 20} MB, but {name!r} has more"
                )
            opened = read_result(name, request.get_data(cache=False))
        except ScanError as error:
            return {"message": str(error)}, 422
        return {"result": bridge.results.hold(opened)}, 200

    @server.post("/scan/panel")
    def _panel() -> tuple[dict[str, Any], int]:
        """Show the thirty invented economies beside the invented one, until the program ends."""
        if not bridge.workspace.as_of().placeholder:
            return {"message": "files of your own are loaded; the invented panel stays away"}, 422
        bridge.workspace.show_beside(demo_panel())
        return {}, 200
