"""A field of ViewState as a control on a page: label, native element, one sentence of help.

Native elements keep keyboard and screen-reader behaviour of the browser. Dash has no plain
``input``, so text fields and sliders are described in ``data-`` attributes, and
assets/controls.js puts the element in.
"""

from collections.abc import Iterable
from typing import Any

from dash import html

from app.reading.fields import Number
from app.state import Choice, Day, StateError, Text, ViewState, Whole, field_kind


def select(
    state: ViewState, name: str, options: Iterable[str] = (), *, empty: str = ""
) -> html.Div:
    """Return a drop-down for a choice, or for a series name out of `options`.

    `empty` is what the empty option stands for.
    """
    kind = field_kind(name)
    current = getattr(state, name)
    words = (
        dict(kind.options)
        if isinstance(kind, Choice)
        else {option: option or empty for option in dict.fromkeys([*options, current])}
    )
    return _labelled(
        name,
        html.Select(
            [
                html.Option(text, value=value, selected=value == current)
                for value, text in words.items()
            ],
            id=f"field-{name}",
            **{"data-field": name, "aria-describedby": f"help-{name}"},
        ),
    )


def text(state: ViewState, name: str, placeholder: str = "") -> html.Div:
    """Return a text field; `placeholder` shows what an empty one stands for."""
    kind = field_kind(name)
    assert isinstance(kind, Text)
    return _labelled(
        name, _native(name, type="text", value=getattr(state, name), placeholder=placeholder)
    )


def day(state: ViewState, name: str) -> html.Div:
    """Return a field for a date, with the browser's own calendar."""
    kind = field_kind(name)
    assert isinstance(kind, Day)
    return _labelled(name, _native(name, type="date", value=getattr(state, name)))


def number(state: ViewState, name: str, step: float = 1) -> html.Div:
    """Return a field for a number within the bounds of the table."""
    kind = field_kind(name)
    assert isinstance(kind, Whole | Number)
    value = getattr(state, name)
    return _labelled(
        name, _native(name, type="number", value=value, min=kind.low, max=kind.high, step=step)
    )


def slider(
    state: ViewState,
    name: str,
    low: float,
    high: float,
    *,
    step: float = 1,
    vertical: bool = False,
) -> html.Div:
    """Return a slider over whole periods, lying along an axis of the map, or over numbers."""
    kind = field_kind(name)
    assert isinstance(kind, Whole | Number)
    return html.Div(
        [
            html.Label(kind.label, htmlFor=f"field-{name}", className="hidden-label"),
            _help(name),
            _native(
                name,
                type="range",
                value=getattr(state, name),
                min=low,
                max=high,
                step=step,
                orient="vertical" if vertical else "horizontal",
            ),
            html.Span(kind.help, id=f"help-{name}", className="hidden-label"),
        ],
        className="slider vertical" if vertical else "slider",
    )


def save_buttons(view: str, *, table: bool = True) -> html.Div:
    """Return the buttons of a view: its numbers as a table, files to save, a place in the brief."""
    buttons = [
        html.Button(_save(kind), **{"data-save": kind.lower(), "data-view": view, "type": "button"})
        for kind in ("PNG", "SVG")
    ]
    shown = html.Button("Table", type="button", **{"data-table": view, "aria-expanded": "false"})
    kept = html.Button("Add to brief", type="button", **{"data-brief": view})
    first = [shown] if table else []
    return html.Div([*first, *buttons, _csv_link(view), kept], className="save")


def csv_button(view: str) -> html.Div:
    """Return the button that saves the numbers of a view that has no chart of its own."""
    return html.Div([_csv_link(view)], className="save")


def _csv_link(view: str) -> html.A:
    return html.A(_save("CSV"), id=f"csv-{view}", className="button", **{"data-csv": view})


def _save(kind: str) -> list[Any]:
    """Return the words of a button; where room is short, only the first says the verb."""
    return [html.Span("Save\N{NO-BREAK SPACE}", className="verb"), kind]


def view_head(view: str, words: str, *tools: html.Details) -> html.Div:
    """Return the heading of a view with its tools, which fold out below, and its buttons."""
    return html.Div([html.H2(words), *tools, save_buttons(view)], className="view-head")


def _native(name: str, **attributes: Any) -> html.Span:
    data = {f"data-{key}": str(value) for key, value in attributes.items() if value != ""}
    return html.Span(className="native", **{"data-native": name, **data})


def _labelled(name: str, element: Any) -> html.Div:
    kind = field_kind(name)
    return html.Div(
        [
            html.Span(
                [html.Label(kind.label, htmlFor=f"field-{name}"), _help(name)], className="label"
            ),
            element,
            html.Span(kind.help, id=f"help-{name}", className="hidden-label"),
        ],
        className="control",
    )


def _help(name: str) -> html.Button:
    """Return the small "?" that shows the sentence of help: assets/help.js."""
    return html.Button(
        "?",
        type="button",
        className="help",
        **{
            "data-help": f"help-{name}",
            "aria-label": f"Help on {field_kind(name).label}",
            "aria-describedby": f"help-{name}",
        },
    )


def sent_state(values: Any) -> ViewState:
    """Return the state that a page sent.

    Raises
    ------
    StateError
        It is no state, or a value is refused.
    """
    if not isinstance(values, dict) or not values.keys() <= vars(ViewState()).keys():
        raise StateError("the page must send the fields of a view, but did not; load it anew")
    return ViewState(**values)
