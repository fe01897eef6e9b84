"""Requests that keep something of the user's own: alert rules and statements."""

from collections.abc import Callable
from typing import Any

from flask import Flask, request

from app.compute import Bridge
from app.kept_rules import drop_rule, keep_rule
from app.outlook.saying import say
from app.state import ViewState

Reply = tuple[dict[str, Any], int]


def register(server: Flask, bridge: Bridge) -> None:
    """Register the route; it answers JSON with one sentence on what was done or why it was not."""
    acts: dict[str, Callable[[dict[str, str]], str]] = {
        "keep-rule": lambda sent: _keep_rule(sent, bridge),
        "say": lambda sent: _say(sent, bridge),
        "drop-rule": lambda sent: _drop_rule(sent, bridge),
    }

    @server.post("/keep/<act>")
    def _kept(act: str) -> Reply:
        found = request.get_json(silent=True)
        sent = found if isinstance(found, dict) else {}
        if act not in acts:
            return {"message": f"there is nothing named {act!r} to keep"}, 404
        try:
            return {
                "message": acts[act]({k: v for k, v in sent.items() if isinstance(v, str)})
            }, 200
        except KeyError:
            return {"message": "the page must say what is to be kept, but did not"}, 422
        except ValueError as error:
            return {"message": str(error)}, 422


def _keep_rule(sent: dict[str, str], bridge: Bridge) -> str:
    return f"Kept: {keep_rule(bridge.workspace.store, sent['rule'])}."


def _drop_rule(sent: dict[str, str], bridge: Bridge) -> str:
    drop_rule(bridge.workspace.store, sent["rule"])
    return f"Taken away: {sent['rule']}."


def _say(sent: dict[str, str], bridge: Bridge) -> str:
    state = ViewState.from_query(sent["query"])
    number = say(state, sent["words"], sent.get("supersedes", ""), bridge)
    lasting = (
        " It is about the invented economy and is forgotten when the program ends."
        if bridge.in_view(state).placeholder
        else ""
    )
    return f"Kept as statement {number}.{lasting}"
