"""The fold of the Lag page that shows which season was taken out."""

from typing import Any

from dash import html
from plotly.graph_objects import Figure

from app.figures.season import season_lines
from app.preparing import Prepared
from app.seasons import season_words


def words(used: Prepared, season: str) -> list[Any]:
    """Say what was taken out of which series, or that nothing was."""
    if season == "read":
        text = (
            "Driver and response are used as read. Where a file says that a series is unadjusted,"
            ' its season can be taken out here: choose so at "Season" above.'
        )
    elif not used.seasons:
        text = "Neither series is said to be unadjusted, so nothing was taken out."
    else:
        return [html.P(season_words(found)) for _, found in used.seasons]
    return [html.P(text, className="quiet")]


def chart(used: Prepared) -> dict[str, Figure]:
    """Return the chart of what was taken out, where something was."""
    if not used.seasons:
        return {}
    return {"season": season_lines([found for _, found in used.seasons])}
