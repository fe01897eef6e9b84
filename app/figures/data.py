"""Charts of the Data page: revisions, and the small line beside each series."""

from urllib.parse import quote

import numpy as np
import plotly.graph_objects as go

from analytics.revisions import Revisions
from analytics.series import FloatArray, period_label
from app.figures.theme import colour, dress

WIDE, TALL = 120, 28  # of the small line, in its own units
STRETCHES = 60  # of a long series, in the small line


def sparkline(values: FloatArray) -> str:
    """Return a small line as the address of an SVG picture, broken where a value is missing.

    The page uses it as a mask, so that the line takes the colour of the theme. Of a long series
    the lowest and the highest value of each of 60 stretches are drawn, so that no jump is lost.
    """
    finite = values[np.isfinite(values)]
    low, high = float(finite.min()), float(finite.max())
    half, middle = high / 2 - low / 2 or 1.0, high / 2 + low / 2
    heights = TALL / 2 - (values - middle) / half * (TALL / 2 - 2)
    places = _kept(values)
    across = places / max(1, values.size - 1) * (WIDE - 4) + 2
    parts, pen = [], "M"
    for x, y in zip(across, heights[places], strict=True):
        if np.isnan(y):
            pen = "M"
            continue
        parts.append(f"{pen}{x:.1f} {y:.1f}")
        pen = "L"
    path = "".join(parts) + ("h.01" if len(parts) == 1 else "")
    svg = (
        f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {WIDE} {TALL}"'
        f' width="{WIDE}" height="{TALL}"><path d="{path}" fill="none" stroke="#000"'
        ' stroke-width="1.4" stroke-linejoin="round" stroke-linecap="round"/></svg>'
    )
    return "data:image/svg+xml," + quote(svg, safe="/:=' ,")


def _kept(values: FloatArray) -> np.ndarray:
    """Places of the values that are drawn, in order."""
    if values.size <= 2 * STRETCHES:
        return np.arange(values.size)
    size, longer = divmod(values.size, STRETCHES)
    edge = longer * (size + 1)  # the first stretches are one value longer
    kept = [np.array([0, values.size - 1])]
    for start, stretches in (
        (0, values[:edge].reshape(longer, size + 1)),
        (edge, values[edge:].reshape(STRETCHES - longer, size)),
    ):
        gone = np.isnan(stretches)
        begins = start + stretches.shape[1] * np.arange(stretches.shape[0])
        seen = ~gone.all(axis=1)
        kept += [
            (begins + np.where(gone, np.inf, stretches).argmin(axis=1))[seen],
            (begins + np.where(gone, -np.inf, stretches).argmax(axis=1))[seen],
            (begins + gone.argmax(axis=1))[gone.any(axis=1)],
        ]
    return np.unique(np.concatenate(kept))


def revisions_chart(result: Revisions, start: int, unit: str) -> go.Figure:
    """Draw first prints against the latest values, and under them what was added since."""
    shown = slice(start, None)
    when = result.periods[shown].to_timestamp()
    labels = [period_label(period) for period in result.periods[shown]]
    printed = np.where(result.first_print, result.first, np.nan)[shown]
    change = np.where(result.held > 1, result.revision, np.nan)[shown]
    figure = go.Figure(
        [
            go.Scatter(
                x=when,
                y=result.latest[shown],
                name="latest",
                mode="lines",
                line={"color": colour("driver"), "width": 1.6},
                text=labels,
                hovertemplate="%{text}: latest %{y:.4g}<extra></extra>",
            ),
            go.Scatter(
                x=when,
                y=printed,
                name="first print",
                mode="markers",
                marker={
                    "color": colour("response"),
                    "size": 6,
                    "symbol": "circle-open",
                    "line": {"width": 1.5},
                },
                text=labels,
                hovertemplate="%{text}: first print %{y:.4g}<extra></extra>",
            ),
            go.Bar(
                x=when,
                y=change,
                name="revision",
                yaxis="y2",
                marker={"color": colour("fit"), "line": {"width": 0}},
                text=labels,
                textposition="none",
                hovertemplate="%{text}: revision %{y:+.4g}<extra></extra>",
            ),
        ]
    )
    dress(
        figure,
        margin={"l": 66, "r": 12, "t": 26, "b": 30},
        showlegend=True,
        legend={"orientation": "h", "x": 0, "y": 1.02, "yanchor": "bottom"},
        bargap=0.25,
        xaxis={"anchor": "y2", "showgrid": False},
        yaxis={"domain": [0.4, 1], "title": {"text": unit}},
        yaxis2={
            "domain": [0, 0.3],
            "title": {"text": "revision"},
            "zeroline": True,
            "zerolinecolor": colour("ink"),
            "zerolinewidth": 0.7,
        },
    )
    return figure
