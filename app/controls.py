"""A field of ViewState as a control on a page: label, native element, one sentence of help.

Native elements keep keyboard and screen-reader behaviour of the browser. A page describes each
control, and the buttons of each view, in ``data-`` attributes of one element; assets/controls.js
builds them there. As components of their own, every option and button, they would take the page's
renderer longer than the charts.
"""

import json
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
    return _control(name, type="select", value=current, options=json.dumps(list(words.items())))


def text(state: ViewState, name: str, placeholder: str = "") -> html.Div:
    """Return a text field; `placeholder` shows what an empty one stands for."""
    kind = field_kind(name)
    assert isinstance(kind, Text)
    return _control(name, type="text", value=getattr(state, name), placeholder=placeholder)


def day(state: ViewState, name: str) -> html.Div:
    """Return a field for a date, with the browser's own calendar."""
    kind = field_kind(name)
    assert isinstance(kind, Day)
    return _control(name, type="date", value=getattr(state, name))


def number(state: ViewState, name: str, step: float = 1) -> html.Div:
    """Return a field for a number within the bounds of the table."""
    kind = field_kind(name)
    assert isinstance(kind, Whole | Number)
    value = getattr(state, name)
    return _control(name, type="number", value=value, min=kind.low, max=kind.high, step=step)


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
    return _control(
        name,
        "slider vertical" if vertical else "slider",
        type="range",
        value=getattr(state, name),
        min=low,
        max=high,
        step=step,
        orient="vertical" if vertical else "horizontal",
    )


def save_buttons(view: str, *, table: bool = True) -> html.Div:
    """Return the buttons of a view: its numbers as a table, files to save, a place in the brief."""
    return _buttons(view, "table png svg csv brief" if table else "png svg csv brief")


def csv_button(view: str) -> html.Div:
    """Return the button that saves the numbers of a view that has no chart of its own."""
    return _buttons(view, "csv")


def _buttons(view: str, kinds: str) -> html.Div:
    return html.Div(className="save", **{"data-saves": view, "data-kinds": kinds})


def view_head(view: str, words: str, *tools: html.Details) -> html.Div:
    """Return the heading of a view with its tools, which fold out below, and its buttons."""
    return html.Div([html.H2(words), *tools, save_buttons(view)], className="view-head")


def _control(name: str, look: str = "control", **described: Any) -> html.Div:
    kind = field_kind(name)
    data = {"label": kind.label, "help-words": kind.help, **described}
    given = {f"data-{key}": str(value) for key, value in data.items() if value != ""}
    return html.Div(className=look, **{"data-control": name, **given})


def label(words: str, control: str, sentence: str) -> list[Any]:
    """Return label, "?" and help of a control that is no field of the state.

    The control has the id `control`; its sentence has it too, with ``help-`` before it instead
    of ``field-``.
    """
    described = f"help-{control.removeprefix('field-')}"
    mark = html.Button(
        "?",
        type="button",
        className="help",
        **{
            "data-help": described,
            "aria-label": f"Help on {words}",
            "aria-describedby": described,
        },
    )
    return [
        html.Span([html.Label(words, htmlFor=control), mark], className="label"),
        html.Span(sentence, id=described, className="hidden-label"),
    ]


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
