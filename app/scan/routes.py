"""The one request of the Scan page that changes what is shown: the invented panel, please."""

from typing import Any

from flask import Flask

from app.compute import Bridge
from app.demo import demo_panel


def register(server: Flask, bridge: Bridge) -> None:
    """Register the route; a refusal is one sentence."""

    @server.post("/scan/panel")
    def _panel() -> tuple[dict[str, Any], int]:
        """Show the thirty invented economies beside the invented one, until the program ends."""
        if not bridge.workspace.as_of().placeholder:
            return {"message": "files of your own are loaded; the invented panel stays away"}, 422
        bridge.workspace.show_beside(demo_panel())
        return {}, 200
