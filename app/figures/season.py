"""The season that was taken out, through time."""

from collections.abc import Sequence

import plotly.graph_objects as go

from analytics.seasonal import SeasonalAdjustment
from analytics.series import period_label
from app.figures.theme import colour, dress

DASHES = ("solid", "dot")


def season_lines(parts: Sequence[SeasonalAdjustment]) -> go.Figure:
    """Draw the season of one series, or of the two of a pair, on one axis."""
    figure = go.Figure()
    for found, token, dash in zip(parts, ("driver", "response"), DASHES, strict=False):
        season = found.season
        figure.add_scatter(
            x=season.periods.to_timestamp(),
            y=season.values,
            name=found.adjusted.name,
            mode="lines",
            line={"color": colour(token), "width": 1.2, "dash": dash},
            text=[period_label(period) for period in season.periods],
            hovertemplate="%{text}: season %{y:+.2f}<extra></extra>",
        )
    units = dict.fromkeys(found.season.unit or "unit not named" for found in parts)
    dress(
        figure,
        margin={"l": 66, "r": 12, "t": 26 if len(parts) > 1 else 8, "b": 30},
        showlegend=len(parts) > 1,
        legend={"orientation": "h", "x": 0, "y": 1.02, "yanchor": "bottom"},
        xaxis={"showgrid": False},
        yaxis={
            "title": {"text": f"season, {' and '.join(units)}"},
            "zeroline": True,
            "zerolinecolor": colour("ink"),
            "zerolinewidth": 0.7,
        },
    )
    return figure
