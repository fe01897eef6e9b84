"""Charts of the Scan page: small maps, best shifts, and the averages of the economies.

``layout.meta["key"]`` lists (shape, colour token, words) of what is drawn, as on the Breadth page.
"""

import math
from collections.abc import Sequence
from html import escape

import numpy as np
import plotly.graph_objects as go

from analytics.long_averages import LongAverages
from analytics.surface import LagSurface
from app.figures.theme import colour, diverging, dress

Bin = tuple[float, int, int]  # middle, pairs that hold, other pairs


def surface_maps(
    surfaces: Sequence[LagSurface],
    titles: Sequence[tuple[str, str]],
    best: Sequence[tuple[int, int] | None],
    stamp: str,
) -> go.Figure:
    """Draw a small map of correlations a pair, best cell ringed; `stamp` says which pairs.

    A title is a name and a line under it.
    """
    across = min(6, max(1, math.ceil(math.sqrt(1.5 * len(surfaces)))))
    down = max(1, math.ceil(len(surfaces) / across))
    traces: list[go.Heatmap | go.Scatter] = []
    annotations, layout = [], {}
    for place, surface in enumerate(surfaces):
        row, column = divmod(place, across)
        name = "" if place == 0 else str(place + 1)
        traces.append(
            go.Heatmap(
                x=surface.shifts,
                y=surface.windows,
                z=_hundredths(surface.correlation),
                zmin=-100,
                zmax=100,
                colorscale=diverging(),
                showscale=False,
                hoverinfo="skip",
                xaxis=f"x{name}",
                yaxis=f"y{name}",
            )
        )
        plain = {"showgrid": False, "fixedrange": True, "ticklen": 2, "nticks": 4}
        left, top = column / across, 1 - row / down
        layout[f"xaxis{name}"] = plain | {
            "domain": [left, left + 0.86 / across],
            "anchor": f"y{name}",
            "range": [surface.shifts[0] - 0.5, surface.shifts[-1] + 0.5],
            "showticklabels": place + across >= len(surfaces),
            "title": {"text": "shift (months)"} if place + across >= len(surfaces) else {},
        }
        layout[f"yaxis{name}"] = plain | {
            "domain": [top - 0.68 / down, top],
            "anchor": f"x{name}",
            "range": [surface.windows[0] - 0.5, surface.windows[-1] + 0.5],
            "showticklabels": column == 0,
            "title": {"text": "window (months)"} if column == 0 else {},
        }
        title, under = (escape(text, False) for text in (_cut(titles[place][0]), titles[place][1]))
        annotations.append(
            {
                "text": f"<b>{title}</b><br>{under}",
                "x": left,
                "y": top,
                "xref": "paper",
                "yref": "paper",
                "xanchor": "left",
                "yanchor": "bottom",
                "align": "left",
                "showarrow": False,
                "font": {"size": 10},
            }
        )
        if best[place] is not None:
            window, shift = best[place] or (0, 0)
            traces.append(
                go.Scatter(
                    x=[shift],
                    y=[window],
                    mode="markers",
                    marker={
                        "size": 7,
                        "symbol": "circle-open",
                        "color": colour("ink"),
                        "line": {"width": 1.5},
                    },
                    hoverinfo="skip",
                    showlegend=False,
                    xaxis=f"x{name}",
                    yaxis=f"y{name}",
                )
            )
    size = [max(800, 90 + 185 * across), 210 + 135 * down]
    layout |= {
        "margin": {"l": 40, "r": 8, "t": 40, "b": 40},
        "meta": {"stamp": stamp, "size": size},
        "annotations": annotations,
    }
    return dress(go.Figure(traces), **layout)


def shift_bars(bins: Sequence[Bin], width: int, span: tuple[int, int], unit: str) -> go.Figure:
    """Draw how many pairs have their best shift where, over the shifts that were searched."""
    where = [middle for middle, _, _ in bins]
    key = [
        ("block", "driver", "hold once all pairs are paid for"),
        ("block", "rest", "do not hold"),
    ]
    figure = go.Figure(
        [
            go.Bar(
                x=where,
                y=counts,
                width=width * 0.92,
                marker={"color": colour(token)},
                name=words,
                hovertemplate=f"around %{{x:+d}} {unit}s: %{{y}} that {words}<extra></extra>",
            )
            for (_, token, words), counts in zip(
                key, ([b[1] for b in bins], [b[2] for b in bins]), strict=True
            )
        ]
    )
    dress(
        figure,
        barmode="stack",
        margin={"l": 50, "r": 12, "t": 8, "b": 48},
        xaxis={
            "title": {"text": f"best shift ({unit}s; above 0 the driver leads)"},
            "zeroline": True,
            "zerolinecolor": colour("ink"),
            "zerolinewidth": 0.7,
            "showgrid": False,
            "range": [span[0] - width, span[1] + width],
            "tick0": 0,
            "dtick": {"month": 12, "quarter": 4}.get(unit, 1),
        },
        yaxis={
            "title": {"text": "pairs"},
            "rangemode": "tozero",
            "dtick": max(1, math.ceil(max(held + other for _, held, other in bins) / 6)),
        },
        meta={"key": key},
    )
    return figure


def average_points(
    found: LongAverages, named: Sequence[str], driver: str, response: str
) -> go.Figure:
    """Draw a point an economy, with the line, the ellipse, and the line without one economy."""
    telling = found.names.index(found.most_telling)
    without = found.line_without(telling)
    key = [
        ("", "fit", "least squares" + (" of logarithms" if found.log else "")),
        ("dots", "other", f"without {found.most_telling}"),
        ("dash", "mark", "2-sigma ellipse"),
    ]
    labels = [escape(name, False) for name in found.names]
    figure = go.Figure(
        [
            _line(found.line, "fit", "solid", key[0][2]),
            _line(without, "other", "dot", key[1][2]),
            _line(found.ellipse, "mark", "dash", key[2][2]),
            go.Scatter(
                x=found.driver,
                y=found.response,
                mode="markers",
                marker={"size": 8, "color": colour("driver"), "opacity": 0.85},
                text=labels,
                hovertemplate=(
                    "%{text}<br>driver %{x:.1f}, response %{y:.1f} percent a year<extra></extra>"
                ),
                name="economies",
                cliponaxis=False,
            ),
        ]
    )
    kind = "log" if found.log else "linear"
    for name in named:
        at = found.names.index(name)
        x, y = float(found.driver[at]), float(found.response[at])
        figure.add_annotation(
            x=math.log10(x) if found.log else x,
            y=math.log10(y) if found.log else y,
            text=escape(name, False),
            showarrow=False,
            yshift=12,
            font={"size": 11},
        )
    dress(
        figure,
        margin={"l": 60, "r": 24, "t": 20, "b": 48},
        xaxis={"title": {"text": f"{escape(driver, False)}, percent a year"}, "type": kind},
        yaxis={"title": {"text": f"{escape(response, False)}, percent a year"}, "type": kind},
        meta={"key": key},
    )
    if found.log:
        ticks = [step * 10.0**power for power in range(-2, 7) for step in (1, 2, 5)]
        words = [f"{tick:,g}" if tick < 1000 else f"{tick:,.0f}" for tick in ticks]
        figure.update_xaxes(tickvals=ticks, ticktext=words)
        figure.update_yaxes(tickvals=ticks, ticktext=words)
    return figure


def _cut(name: str, longest: int = 27) -> str:
    return name if len(name) <= longest else f"{name[: longest - 1]}…"


def _line(points: np.ndarray, token: str, dash: str, name: str) -> go.Scatter:
    return go.Scatter(
        x=points[:, 0],
        y=points[:, 1],
        mode="lines",
        line={"color": colour(token), "width": 1.6, "dash": dash},
        hoverinfo="skip",
        name=name,
    )


def _hundredths(correlation: np.ndarray) -> np.ndarray:
    """Return correlations in hundredths, one byte a cell where every cell has one."""
    whole = np.round(100.0 * correlation)
    return whole.astype(np.int8) if np.isfinite(whole).all() else whole.astype(np.float32)
