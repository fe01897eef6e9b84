"""Charts of the Lag page's tools: a pinned cell beside the chosen one, peaks, several responses."""

from html import escape
from typing import Any

import numpy as np
import plotly.graph_objects as go

from analytics.series import Pair, period_label
from app.figures.lag import axis_title, foot, pair_labels
from app.figures.theme import colour, dress
from app.lag.tools import OneCell, OneResponse, Peaks
from app.words import plain, shift_words, signed


def compare_scatters(pinned: OneCell, chosen: OneCell, pair: Pair, unit: str) -> go.Figure:
    """Draw two cells side by side on the same axes, each with its line."""
    figure = go.Figure()
    sides = (("pinned", pinned, "", "driver"), ("chosen", chosen, "2", "fit"))
    ends: dict[str, list[float]] = {"x": [], "y": []}
    for words, one, axis, token in sides:
        cell, state = one.cell, one.state
        labels = pair_labels(pair, one.start, cell.months, state.shift)
        figure.add_trace(
            go.Scatter(
                x=cell.driver,
                y=cell.response,
                text=labels,
                mode="markers",
                marker={"size": 4, "opacity": 0.6, "color": colour("other")},
                hovertemplate="%{text}<br>driver %{x:.2f}, response %{y:.2f}<extra></extra>",
                xaxis=f"x{axis}",
                yaxis=f"y{axis}",
                name=words,
            )
        )
        line = [float(cell.driver.min()), float(cell.driver.max())]
        figure.add_trace(
            go.Scatter(
                x=line,
                y=[cell.intercept + cell.slope * end for end in line],
                mode="lines",
                line={"color": colour(token), "width": 2},
                hoverinfo="skip",
                xaxis=f"x{axis}",
                yaxis=f"y{axis}",
                name=f"{words}, least squares",
            )
        )
        figure.add_annotation(
            text=(
                f"{words}: window {state.window}, shift {shift_words(state.shift, unit)}"
                f"<br>r {signed(cell.correlation)}, slope {plain(cell.slope, 3)}"
            ),
            x=0.0,
            y=1.0,
            xref=f"x{axis} domain",
            yref=f"y{axis} domain",
            xanchor="left",
            yanchor="bottom",
            align="left",
            showarrow=False,
        )
        ends["x"] += line
        ends["y"] += [float(cell.response.min()), float(cell.response.max())]
    spans: dict[str, Any] = {}
    for axis, values in ends.items():
        low, high = min(values), max(values)
        spans[axis] = [low - 0.04 * (high - low), high + 0.04 * (high - low)]
    dress(
        figure,
        margin={"l": 66, "r": 12, "t": 44, "b": foot(pair)},
        xaxis={
            "domain": [0, 0.48],
            "range": spans["x"],
            "title": {"text": axis_title(pair.driver, pinned.state)},
        },
        xaxis2={
            "domain": [0.52, 1],
            "range": spans["x"],
            "anchor": "y2",
            "title": {"text": axis_title(pair.driver, chosen.state)},
        },
        yaxis={
            "range": spans["y"],
            "title": {"text": axis_title(pair.response, pinned.state, lines=2)},
        },
        yaxis2={"range": spans["y"], "anchor": "x2", "showticklabels": False},
    )
    return figure


def peak_traces(peaks: Peaks, pair: Pair) -> list[go.Scatter]:
    """Return traces to lay over the lines through time: peaks, and strokes between matched ones."""
    found = peaks.found
    days = pair.periods.to_timestamp()
    moved = (pair.periods - found.shift).to_timestamp()
    strokes: dict[str, list[Any]] = {"x": [], "y": []}
    for (one, other), (height, meets) in zip(found.pairs, found.height, strict=True):
        strokes["x"] += [days[peaks.first + one], moved[peaks.first + other], None]
        strokes["y"] += [float(height), float(meets), None]
    marks = []
    for side, token, symbol, places, calendar in (
        ("driver", "driver", "triangle-up", 0, days),
        ("response", "response", "triangle-down", 1, moved),
    ):
        at = found.pairs[:, places]
        marks.append(
            go.Scatter(
                x=calendar[peaks.first + at],
                y=found.height[:, places],
                text=[period_label(pair.periods[peaks.first + p]) for p in at],
                mode="markers",
                marker={"size": 8, "symbol": symbol, "color": colour(token)},
                hovertemplate=f"{side} peaks in %{{text}}: %{{y:.2f}}<extra></extra>",
                name=f"matched peaks of the {side}",
            )
        )
    return [
        go.Scatter(
            x=strokes["x"],
            y=strokes["y"],
            mode="lines",
            line={"color": colour("ink"), "width": 1},
            hoverinfo="skip",
            name="joined across the shift",
        ),
        *marks,
    ]


def response_profiles(responses: list[OneResponse]) -> go.Figure:
    """Draw the correlation at every shift of the window, one small chart a response."""
    shown = [r for r in responses if r.surface is not None and r.best is not None]
    across = min(3, max(1, len(shown)))
    down = -(-len(shown) // across) if shown else 1
    figure, axes = go.Figure(), {}
    for place, one in enumerate(shown):
        assert one.surface is not None
        assert one.best is not None
        axis = "" if place == 0 else str(place + 1)
        row, column = divmod(place, across)
        left, top = column / across, 1 - row / down
        shifts = one.surface.shifts
        line = one.surface.correlation[int(np.flatnonzero(one.surface.windows == one.window)[0])]
        window, shift, _ = one.best
        at = one.surface.cell(window, shift)
        figure.add_trace(
            go.Scatter(
                x=shifts,
                y=line,
                mode="lines",
                line={"color": colour("response"), "width": 1.6},
                hovertemplate="shift %{x:+d}: %{y:+.2f}<extra></extra>",
                xaxis=f"x{axis}",
                yaxis=f"y{axis}",
                name=one.name,
            )
        )
        figure.add_trace(
            go.Scatter(
                x=[shift],
                y=[float(one.surface.correlation[at])],
                mode="markers",
                marker={"size": 9, "symbol": "diamond", "color": colour("mark")},
                hovertemplate=f"window {window}, shift %{{x:+d}}: %{{y:+.2f}}<extra></extra>",
                xaxis=f"x{axis}",
                yaxis=f"y{axis}",
                name=f"{one.name}, cell that stands out",
            )
        )
        name = one.name if len(one.name) <= 34 else one.name[:33] + "…"
        figure.add_annotation(
            text=escape(name, False),
            x=0.0,
            y=1.0,
            xref=f"x{axis} domain",
            yref=f"y{axis} domain",
            xanchor="left",
            yanchor="bottom",
            showarrow=False,
            font={"size": 12},
        )
        axes[f"xaxis{axis}"] = {
            "domain": [left + 0.03, left + 1 / across - 0.01],
            "anchor": f"y{axis}",
            "title": {"text": f"shift ({one.unit}s)" if row == down - 1 else ""},
            "nticks": 6,
        }
        axes[f"yaxis{axis}"] = {
            "domain": [top - 1 / down + 0.08, top - 0.06],
            "anchor": f"x{axis}",
            "range": [-1, 1],
            "nticks": 3,
            "zeroline": True,
            "zerolinecolor": colour("ink"),
            "zerolinewidth": 1,
            "title": {"text": "correlation" if column == 0 else ""},
        }
    dress(figure, **axes, margin={"l": 40, "r": 12, "t": 8, "b": 40})
    return figure
