"""The line that says, on every page, that the vintages of a past date are shown."""

import datetime

from dash import dcc, html

from analytics.series import MONTHS
from app.state import ViewState


def as_of_line(state: ViewState) -> html.P:
    """Return the line for the head of a page; it is hidden where the newest vintages are shown."""
    return html.P(
        [
            f"Everything here is as it stood on {day_words(state.as_of)}. ",
            dcc.Link("Choose another date", href=f"/data?as_of={state.as_of}"),
        ]
        if state.as_of
        else [],
        className="as-of",
        hidden=not state.as_of,
    )


def day_words(day: str) -> str:
    """Write a date as people read it: ``12 Mar 2024``; empty for empty."""
    if not day:
        return ""
    date = datetime.date.fromisoformat(day)
    return f"{date.day} {MONTHS[date.month - 1]} {date.year:04d}"
