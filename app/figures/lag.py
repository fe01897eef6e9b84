"""Charts of the Lag page.

The order of the traces is a contract with assets/page-lag.js, which puts the numbers of another
cell into the same traces while a slider moves.
"""

from html import escape

import numpy as np
import pandas as pd
import plotly.graph_objects as go

from analytics.cell import LagCell, SliceMeans
from analytics.series import PERIOD_NOUN, Pair, Series, period_code, period_label
from analytics.slices import Counts, SlicePath
from analytics.surface import LagSurface
from app.compute import Overlay, noun
from app.figures.lag_slices import count_traces, side_axes, slice_traces
from app.figures.theme import colour, diverging, dress, scale_title, sequential, time_scale
from app.state import ViewState

SCATTER_TRACES = (
    "points",
    "line",
    "ellipse",
    "driver_slices",
    "response_slices",
    "in_band",
    "path",
    "driver_counts",
    "response_counts",
    "squares",
)
ONE_LINE = 20  # letters of a name that fit beside window and unit on a narrow screen
OVERLAY_TRACES = ("driver", "response")
P_MAPS = {"p_cell": "per-cell p", "p_naive": "naive p", "p_hac": "HAC p"}


def surface_heatmap(
    surface: LagSurface, pair: Pair, state: ViewState, p: np.ndarray | None = None
) -> go.Figure:
    """Draw the map of all cells; the page draws the crosshair over it.

    `p` holds the p-values of the map where the state asks for one of them, shape (W, S).
    """
    unit = noun(pair)
    where = f"window %{{y}}, shift %{{x:+d}} {unit}s<br>"
    if p is None:
        values = surface.correlation if state.quantity == "correlation" else surface.slope
        top = 1.0 if state.quantity == "correlation" else float(np.nanmax(np.abs(values)))
        scale = {"zmin": -top, "zmax": top, "colorscale": diverging()}
        bar = {"title": scale_title(state.quantity)}
        hover = f"{where}{state.quantity} %{{z:+.2f}}<br>%{{customdata}} {unit}s"
        custom = surface.pairs
    else:
        values, custom = -np.log10(np.maximum(p, 1e-6)), p
        scale = {"zmin": 0.0, "zmax": 6.0, "colorscale": sequential()}
        bar = {
            "title": scale_title(P_MAPS[state.quantity]),
            "tickvals": [0, 1, -np.log10(0.05), 2, 3, 4, 5, 6],
            "ticktext": ["1", ".1", ".05", ".01", ".001", "1e-4", "1e-5", "≤ 1e-6"],
        }
        hover = f"{where}{P_MAPS[state.quantity]} %{{customdata:.3f}}"
    figure = go.Figure(
        go.Heatmap(
            x=surface.shifts,
            y=surface.windows,
            z=values,
            customdata=custom,
            **scale,
            colorbar={"thickness": 10, "len": 1.0, "outlinewidth": 0, "xpad": 4, **bar},
            hovertemplate=hover + "<extra></extra>",
        )
    )
    step = {"monthly": 12, "quarterly": 4, "annual": 1}[pair.driver.frequency]
    axis = {"showgrid": False, "ticklen": 11, "tick0": 0, "dtick": step, "fixedrange": True}
    dress(
        figure,
        margin={"l": 66, "r": 70, "t": 8, "b": 56},
        xaxis={
            **axis,
            "tickangle": 0,
            "range": [surface.shifts[0] - 0.5, surface.shifts[-1] + 0.5],
            "title": {"text": f"shift ({unit}s; above 0 the driver leads)"},
        },
        yaxis={
            **axis,
            "range": [surface.windows[0] - 0.5, surface.windows[-1] + 0.5],
            "title": {"text": f"window ({unit}s averaged)"},
        },
    )
    if surface.shifts[0] < 0 < surface.shifts[-1]:
        figure.add_vline(x=0, line={"color": colour("ink"), "width": 0.7, "dash": "dot"})
    return figure


def cell_scatter(
    cell: LagCell,
    pair: Pair,
    state: ViewState,
    start: int,
    path: SlicePath | None = None,
    counts: Counts | None = None,
) -> go.Figure:
    """Draw the pairs of one cell with line, 2-sigma ellipse and slice means.

    `start` is the place in the pair's calendar of ``cell.start``; `path` and `counts` are those of
    the cell where the state asks for them.
    """
    months = pair.periods[start + cell.months - cell.start]
    ends = cell.driver.min(), cell.driver.max()
    figure = go.Figure(
        [
            go.Scatter(
                x=cell.driver,
                y=cell.response,
                mode="markers",
                marker={
                    "size": 5,
                    "opacity": 0.75,
                    "color": decimal_years(months),
                    "colorscale": time_scale(),
                    "cmin": decimal_years(pair.periods)[0],
                    "cmax": decimal_years(pair.periods)[-1],
                    "colorbar": {
                        "thickness": 8,
                        "len": 0.6,
                        "outlinewidth": 0,
                        "title": scale_title("driver read in"),
                        "tickformat": "d",
                        "nticks": 6,
                    },
                },
                text=pair_labels(pair, start - cell.start, cell.months, state.shift),
                hovertemplate="%{text}<br>driver %{x:.2f}, response %{y:.2f}<extra></extra>",
                visible=state.points != "counts",
                name="months",
            ),
            go.Scatter(
                x=ends,
                y=[cell.intercept + cell.slope * end for end in ends],
                mode="lines",
                line={"color": colour("fit"), "width": 2},
                hoverinfo="skip",
                name="least squares",
            ),
            go.Scatter(
                x=cell.ellipse[:, 0],
                y=cell.ellipse[:, 1],
                mode="lines",
                line={"color": colour("mark"), "width": 1.2, "dash": "dash"},
                hoverinfo="skip",
                name="2-sigma ellipse",
            ),
            _slice_trace(cell.driver_slices, across=True),
            _slice_trace(cell.response_slices, across=False),
            *slice_traces(cell, state, path),
            *count_traces(counts, noun(pair), squares_shown=state.points == "counts"),
        ]
    )
    dress(figure, margin={"l": 66, "r": 70, "t": 8, "b": foot(pair)}, **side_axes(state))
    dress(
        figure,
        xaxis={"title": {"text": axis_title(pair.driver, state)}},
        yaxis={"title": {"text": axis_title(pair.response, state, lines=2)}},
    )
    return figure


def overlay_lines(
    overlay: Overlay, pair: Pair, state: ViewState, left_out: list[tuple[int, int]] | None = None
) -> go.Figure:
    """Draw both smoothed series on one time axis, the response moved back by the shift.

    `left_out` are the stretches of the pair's calendar that no pair reads.
    """
    months = [period_code(period) for period in overlay.periods]
    when = overlay.periods.to_timestamp()
    figure = go.Figure(
        [
            go.Scatter(
                x=when,
                y=overlay.driver,
                text=months,
                mode="lines",
                line={"color": colour("driver"), "width": 1.8},
                hovertemplate="%{text}: %{y:.2f}<extra>driver</extra>",
                name="driver",
            ),
            go.Scatter(
                x=when,
                y=overlay.response,
                text=months,
                mode="lines",
                line={"color": colour("response"), "width": 1.8, "dash": "5px,2px"},
                hovertemplate="%{text}: %{y:.2f}<extra>response, moved</extra>",
                name="response",
            ),
        ]
    )
    dress(
        figure,
        margin={"l": 56, "r": 12, "t": 8, "b": 28},
        xaxis={"hoverformat": "%b %Y"},
        yaxis={"title": {"text": shared_unit(pair)}},
        hovermode="x unified",
        dragmode="select",
        selectdirection="h",
        newselection={"line": {"color": colour("ink"), "width": 1}},
    )
    for first, stop in left_out or []:
        figure.add_vrect(
            x0=pair.periods[first].start_time,
            x1=pair.periods[stop - 1].end_time,
            fillcolor=colour("quiet"),
            opacity=0.18,
            line_width=0,
            label={"text": "left out", "textposition": "top center", "font": {"size": 11}},
        )
    return figure


def decimal_years(periods: pd.PeriodIndex) -> np.ndarray:
    """Return the middle of each period as a year with decimals, for colours."""
    per_year = {"M": 12, "Q": 4, "Y": 1}[periods.freqstr[0]]
    return np.asarray((periods.asfreq("M", how="start").asi8 / 12 + 1970) + 0.5 / per_year)


def pair_labels(pair: Pair, first: int, places: np.ndarray, shift: int) -> list[str]:
    """Name the two months of each point: driver's, then response's.

    `first` is the place in the pair's calendar that `places` are counted from.
    """
    months = pair.periods[first + places]
    return [f"{period_label(m)} → {period_label(m + shift)}" for m in months]


def rate_unit(series: Series) -> str:
    """Return the unit of a growth rate or rate, percent if the source names none."""
    return series.unit or "percent"


def shared_unit(pair: Pair) -> str:
    """Return the unit of both sides where they agree, else percent."""
    units = {rate_unit(pair.driver), rate_unit(pair.response)}
    return units.pop() if len(units) == 1 else "percent"


def foot(pair: Pair) -> int:
    """Return the room below a chart whose horizontal axis is the driver's, in pixels."""
    return 64 if len(pair.driver.name) > ONE_LINE else 48


def axis_title(series: Series, state: ViewState, *, lines: int = 1) -> str:
    """Return the axis title: name, window and unit, on one line or two."""
    name = series.name if len(series.name) <= 32 else series.name[:30] + "…"
    lines = 2 if len(name) > ONE_LINE else lines
    smoothed = "" if state.window == 1 else f"{state.window}-{PERIOD_NOUN[series.frequency]} mean, "
    parted = ", " if lines == 1 else "<br>"
    return f"{escape(name, False)}{parted}{smoothed}{escape(rate_unit(series), False)}"


def _slice_trace(slices: SliceMeans, *, across: bool) -> go.Scatter:
    name = "mean response in slices of the driver" if across else "mean driver in slices"
    return go.Scatter(
        x=slices.centre if across else slices.mean,
        y=slices.mean if across else slices.centre,
        mode="lines+markers",
        connectgaps=True,
        line={"color": colour("response" if across else "driver"), "width": 1},
        marker={
            "size": 9,
            "symbol": "diamond-open" if across else "square-open",
            "color": colour("response" if across else "driver"),
            "line": {"width": 2},
        },
        customdata=slices.count,
        hovertemplate=(
            ("mean response %{y:.2f}" if across else "mean driver %{x:.2f}")
            + " over %{customdata} points<extra></extra>"
        ),
        name=name,
    )
