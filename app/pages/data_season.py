"""The part of the Data page that shows the season of a series said to be unadjusted."""

from typing import Any

from dash import html
from plotly.graph_objects import Figure

from app import controls
from app.desk.seasons import ChosenSeason
from app.figures.season import season_lines
from app.pages import plain
from app.pages.tables import names_select
from app.seasons import season_words

USED = (
    "The Lag page takes it out of driver and response, the Reading page of rates over less than a"
    ' year, where "Season" there says so.'
)


def view() -> html.Section:
    """Return the place of this part in the page."""
    return plain.view("data", "season", "Season", wide=True)


def words(found: ChosenSeason | None) -> list[Any]:
    """Return the choice of the series and what its season is."""
    if found is None:
        text = "No series in view is said to be unadjusted; what a series is can be said above."
        return [html.P(text, className="empty")]
    chooser = html.Div(
        [
            *controls.label(
                "Series",
                "field-unadjusted",
                "The series, said to be unadjusted, whose season is shown; no page changes.",
            ),
            names_select(
                found.names,
                found.series.name,
                id="field-unadjusted",
                **{"data-field": "unadjusted", "aria-describedby": "help-unadjusted"},
            ),
        ],
        className="control",
    )
    if found.result is None:
        return [chooser, html.P(f"There is no season to show: {found.refusal}.")]
    said = [html.P(season_words(found.result)), html.P(USED, className="quiet")]
    return [chooser, *said]


def chart(found: ChosenSeason | None) -> dict[str, Figure]:
    """Return the chart of the season, where there is one."""
    if found is None or found.result is None:
        return {}
    return {"season": season_lines([found.result])}


def subtitle(found: ChosenSeason | None) -> dict[str, str]:
    """Return the second line of the saved chart."""
    if found is None or found.result is None:
        return {}
    return {"season": season_words(found.result)}
