"""The fold on the Reading page that shows the alert rules and takes new ones."""

from collections.abc import Sequence
from typing import Any

from dash import html

from app.reading.alerts import OUTLOOK, QUANTITIES, Rule


def rules_fold() -> html.Details:
    """Return the fold; its list is a place of the page and follows the workspace."""
    return html.Details(
        [
            html.Summary("Alert rules"),
            html.Div(id="reading-rules"),
            html.Div(
                [
                    html.Div(
                        [
                            html.Label("New rule", htmlFor="rule-text"),
                            html.Span(
                                className="native",
                                **{
                                    "data-entry": "text",
                                    "data-name": "rule-text",
                                    "data-label": "New rule",
                                    "data-placeholder": "rate_12m above 5",
                                },
                            ),
                        ],
                        className="control broad",
                    ),
                    html.Button(
                        "Keep rule",
                        type="button",
                        **{
                            "data-keep": "keep-rule",
                            "data-fields": "rule:rule-text",
                            "data-said": "rule-said",
                        },
                    ),
                ],
                className="controls keep-form",
            ),
            html.Div(id="rule-said", className="said", role="status", tabIndex="-1"),
            html.P(
                [
                    "A rule names a quantity, above or below, and a limit: a number, or another"
                    " quantity plus or minus a number. Quantities: ",
                    *_listed(QUANTITIES),
                    ". Or rate_1m or rate_12m outside ",
                    *_listed(OUTLOOK),
                    ": the interval that a saved statement gave for the print.",
                ],
                className="quiet",
            ),
        ],
        className="rules",
    )


def rule_list(rules: Sequence[Rule], set_off: Sequence[str], refused: Sequence[str]) -> list[Any]:
    """Return the rules in force, each with a button that takes it away; `set_off` stand out."""
    rows = [
        html.Li(
            [
                html.Code(rule.text),
                html.Strong(" alert") if rule.text in set_off else "",
                html.Button(
                    "Take away",
                    type="button",
                    **{
                        "data-keep": "drop-rule",
                        "data-name": "rule",
                        "data-value": rule.text,
                        "data-said": "rule-said",
                        "aria-label": f"Take away {rule.text}",
                    },
                ),
            ]
        )
        for rule in rules
    ]
    said = [html.P(text, className="message") for text in refused]
    if not rows:
        return [html.P("No rule is kept: nothing raises an alert."), *said]
    return [html.Ul(rows, className="rule-list", role="list"), *said]


def _listed(names: Sequence[str] | dict[str, Any]) -> list[Any]:
    parts: list[Any] = []
    for name in names:
        parts += [html.Code(name), ", "]
    return parts[:-1]
