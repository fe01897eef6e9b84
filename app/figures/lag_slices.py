"""What the scatter of a cell shows on demand: the band, its path, and counts of months.

All traces are always there, empty and unseen where the state does not ask for them, since
assets/lag-scatter.js fills the same traces while the hand moves.
"""

from typing import Any

import numpy as np
import plotly.graph_objects as go

from analytics.cell import LagCell
from analytics.error_density import ErrorDensity
from analytics.slices import Counts, SlicePath
from app.figures.theme import colour, scale_title, sequential
from app.state import ViewState

MARGIN = 0.86  # where the counts at the sides begin, in parts of the plot


def slice_traces(cell: LagCell, state: ViewState, path: SlicePath | None) -> list[go.Scatter]:
    """Return the pairs in the band set apart, and the path that the mean draws as it sweeps."""
    across = state.band != "response"
    held = np.zeros(cell.n, dtype=bool)
    x: Any = []
    y: Any = []
    count: Any = []
    if path is not None:
        along = cell.driver if across else cell.response
        low, high = path.low[state.band_place], path.high[state.band_place]
        held = (along >= low) & (along <= high)
        x, y = (path.centre, path.mean) if across else (path.mean, path.centre)
        count = path.count
    return [
        go.Scatter(
            x=cell.driver[held],
            y=cell.response[held],
            mode="markers",
            marker={"size": 7, "color": colour("mark"), "line": {"width": 1, "color": "#20242C"}},
            hoverinfo="skip",
            visible=path is not None,
            name="in the slice",
        ),
        go.Scatter(
            x=x,
            y=y,
            customdata=count,
            mode="lines",
            line={"color": colour("ink"), "width": 2},
            hovertemplate=(
                ("mean response %{y:.2f}" if across else "mean driver %{x:.2f}")
                + " over %{customdata} points<extra></extra>"
            ),
            visible=path is not None,
            name="mean of the slice as it sweeps",
        ),
    ]


def count_traces(counts: Counts | None, unit: str, *, squares_shown: bool) -> list[Any]:
    """Return bars at both sides, and squares coloured by the number of months in them."""
    shown = counts is not None
    bars = {
        "marker": {"color": colour("quiet"), "line": {"width": 0}},
        "visible": shown,
        "opacity": 0.8,
    }
    driver, wide, number = _bins(counts.driver_edges, counts.driver) if counts else ([], None, [])
    response, tall, other = (
        _bins(counts.response_edges, counts.response) if counts else ([], None, [])
    )
    squares = [] if counts is None else np.where(counts.both > 0, counts.both, np.nan)
    return [
        go.Bar(
            x=driver,
            y=number,
            width=wide,
            yaxis="y2",
            hovertemplate=f"driver near %{{x:.2f}}: %{{y}} {unit}s<extra></extra>",
            name="counts of the driver",
            **bars,
        ),
        go.Bar(
            x=other,
            y=response,
            width=tall,
            orientation="h",
            xaxis="x2",
            hovertemplate=f"response near %{{y:.2f}}: %{{x}} {unit}s<extra></extra>",
            name="counts of the response",
            **bars,
        ),
        go.Heatmap(
            x=driver,
            y=response,
            z=squares,
            colorscale=[[place / 4, hue] for place, (_, hue) in enumerate(sequential()[1:])],
            zmin=1,
            showscale=False,
            visible=shown and squares_shown,
            hovertemplate=f"%{{z}} {unit}s<extra></extra>",
            name="counts in squares",
        ),
    ]


def side_axes(state: ViewState) -> dict[str, Any]:
    """Return the axes of the scatter: all of the plot, or with room for counts at the sides."""
    sides = state.points != "points"
    bare = {"showgrid": False, "showticklabels": False, "ticks": "", "fixedrange": True}
    whole = [0.0, MARGIN if sides else 1.0]
    rest = [MARGIN + 0.02, 1.0]
    return {
        "xaxis": {"domain": whole},
        "yaxis": {"domain": whole},
        "xaxis2": {**bare, "domain": rest, "anchor": "y", "visible": sides},
        "yaxis2": {**bare, "domain": rest, "anchor": "x", "visible": sides},
        "bargap": 0,
        "plot_bgcolor": "rgba(0,0,0,0)",  # the side axes would cover the points
    }


def density_surface(density: ErrorDensity) -> go.Contour:
    """Return the joint density of intercept and slope, over its highest, as a surface."""
    top = float(density.density.max())
    return go.Contour(
        x=density.intercept,
        y=density.slope,
        z=density.density / top,
        colorscale=[
            [0.0, colour("paper")],  # where there is next to nothing it has no edge
            *([place / 3, hue] for place, (_, hue) in enumerate(sequential()[1:4], 1)),
        ],
        contours={"start": 0.1, "end": 0.9, "size": 0.1},
        line={"width": 0.4, "color": colour("rule")},
        colorbar={
            "thickness": 8,
            "len": 0.7,
            "outlinewidth": 0,
            "title": scale_title("density over its highest"),
        },
        hovertemplate="intercept %{x:.3f}, slope %{y:.3f}: %{z:.2f} of the highest<extra></extra>",
        name="density of the error",
        showlegend=False,
    )


def _bins(edges: np.ndarray, counts: np.ndarray) -> tuple[np.ndarray, float, np.ndarray]:
    return (edges[:-1] + edges[1:]) / 2, float(edges[1] - edges[0]), counts
