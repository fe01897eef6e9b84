"""Charts of the Breadth page: contributions, strip, core measures, diffusion, weights.

``layout.meta["key"]`` lists (shape, colour token, words) of what is drawn; the page shows the key
above the chart, and a saved chart has it as its legend.
"""

from html import escape

import numpy as np
import pandas as pd
import plotly.graph_objects as go

from analytics.series import period_label
from app.figures.theme import colour, diverging, dress, scale_title
from app.words import signed

PARTS = tuple(f"part-{number}" for number in range(1, 8))
DASHES = ("solid", "solid", "dash", "dot")
LONGEST = 24  # letters of a name on an axis or in a key
MOST_LABELS = 45  # components that the strip names on its axis
RATES_SHOWN = 95  # percentile of absolute rates at which the colours of the strip end


def contribution_bars(names: list[str], points: np.ndarray, unit: str) -> go.Figure:
    """Draw a bar a component for one print, in the order given, the first on top."""
    shown = [
        f"{_label(name)}  <b>{signed(value)}</b>\N{NO-BREAK SPACE}"
        for name, value in zip(names, points, strict=True)
    ]
    figure = go.Figure(
        go.Bar(
            x=points,
            y=[escape(name, False) for name in names],
            orientation="h",
            marker={"color": [colour("high-2") if p >= 0 else colour("low-2") for p in points]},
            hovertemplate="%{y}: %{x:+.3f} points<extra></extra>",
        )
    )
    dress(
        figure,
        margin={"l": _room(names) + 56, "r": 12, "t": 8, "b": 44},
        bargap=0.3,
        xaxis={
            "title": {"text": unit},
            "zeroline": True,
            "zerolinecolor": colour("ink"),
            "zerolinewidth": 1,
            "nticks": 5,
            "tickangle": 0,
        },
        yaxis={
            "type": "category",
            "tickvals": [escape(name, False) for name in names],
            "ticktext": shown,
            "autorange": "reversed",
            "showgrid": False,
            "ticks": "",
        },
    )
    return figure


def contribution_history(
    periods: pd.PeriodIndex, parts: dict[str, np.ndarray], rate: np.ndarray, total: str, unit: str
) -> go.Figure:
    """Draw contributions stacked through time, and the rate they add up to.

    `parts` is in the order of the stack; its last entry is the rest.
    """
    when = periods.to_timestamp()
    labels = np.array([period_label(period) for period in periods])
    days = (periods + 1).to_timestamp() - when
    widths = np.asarray(days.days) * 86_400_000.0
    traces, key = [], []
    for place, (name, values) in enumerate(parts.items()):
        token = _part(place, len(parts))
        key.append(("block", token, name))
        traces.append(
            go.Bar(
                x=when,
                y=values,
                width=widths,
                offset=0,
                text=labels,
                textposition="none",
                name=_label(name),
                marker={"color": colour(token), "line": {"width": 0}},
                hovertemplate=f"%{{text}}: {escape(name, False)} %{{y:+.2f}}<extra></extra>",
            )
        )
    traces.append(
        go.Scatter(
            x=when + days / 2,  # the middle of the bars
            y=rate,
            text=labels,
            mode="lines",
            line={"color": colour("ink"), "width": 1.8},
            name=_label(total),
            hovertemplate="%{text}: rate %{y:+.2f}<extra></extra>",
        )
    )
    return dress(
        go.Figure(traces),
        margin={"l": 56, "r": 12, "t": 8, "b": 28},
        barmode="relative",
        meta={"key": [*key, ("line", "ink", total)]},
        yaxis={"title": {"text": unit}, "zeroline": True, "zerolinecolor": colour("ink")},
    )


def component_strip(
    periods: pd.PeriodIndex,
    names: list[str],
    labels: list[str],
    rates: np.ndarray,
    ranks: np.ndarray,
    *,
    by_rank: bool,
    over: str,
) -> go.Figure:
    """Draw a row a component and a column a period, coloured by rank or by rate.

    `rates` and `ranks` have shape (periods, components); `labels` are the names on the axis.
    """
    values, other = (ranks, rates) if by_rank else (rates, ranks)
    known = np.abs(rates[~np.isnan(rates)])
    top = 50.0 if by_rank else float(np.percentile(known, RATES_SHOWN)) if known.size else 1.0
    top = top or 1.0
    middle = 50.0 if by_rank else 0.0
    hover = (
        f"rank %{{z:.0f}} of its own history, {over} rate %{{customdata:.2f}} %"
        if by_rank
        else f"{over} rate %{{z:.2f}} %, rank %{{customdata:.0f}} of its own history"
    )
    few = len(names) <= MOST_LABELS
    shown = [_label(name) for name in labels]
    figure = go.Figure(
        go.Heatmap(
            x=periods.to_timestamp(),
            y=[escape(name, False) for name in names],
            z=values.T.astype(np.float32),
            customdata=other.T.astype(np.float32),
            zmin=middle - top,
            zmax=middle + top,
            colorscale=diverging(),
            xgap=0,
            ygap=1 if few else 0,
            colorbar={
                "thickness": 8,
                "outlinewidth": 0,
                "xpad": 4,
                "nticks": 6,
                "title": scale_title("rank, 0 to 100" if by_rank else f"{over} rate, percent"),
            },
            hovertemplate="%{x|%b %Y}<br>%{y}: " + hover + "<extra></extra>",
        )
    )
    dress(
        figure,
        margin={"l": _room(shown, 5.8) if few else 56, "r": 52, "t": 8, "b": 28},
        xaxis={
            "showgrid": False,
            "tickangle": 0,
            "tickfont": {"size": 10},  # beside the names a narrow screen has little room
        },
        yaxis={
            "autorange": "reversed",
            "showgrid": False,
            "ticks": "",
            "type": "category",
            "tickvals": [escape(name, False) for name in names],
            "ticktext": shown,
            "tickfont": {"size": 11},
            "showticklabels": few,
            **({} if few else {"title": {"text": f"{len(names)} components, largest on top"}}),
        },
    )
    return figure


def core_lines(
    periods: pd.PeriodIndex, measures: dict[str, np.ndarray], trend: np.ndarray | None, over: str
) -> go.Figure:
    """Draw core measures beside the rate of all items, which comes first in `measures`."""
    when = periods.to_timestamp()
    labels = np.array([period_label(period) for period in periods])
    tokens = ("response", "fit", "other", "mark", "low-2")
    traces, key = [], []
    if trend is not None:
        key.append(("broad", "rule", "centred trend of all items"))
        traces.append(
            go.Scatter(
                x=when,
                y=trend,
                mode="lines",
                line={"color": colour("rule"), "width": 6},
                name="centred trend of all items",
                hoverinfo="skip",
            )
        )
    for place, (name, values) in enumerate(measures.items()):
        shape = "line" if place < 2 else "dash" if place == 2 else "dots"
        key.append((shape, tokens[place % len(tokens)], name))
        traces.append(
            go.Scatter(
                x=when,
                y=values,
                text=labels,
                mode="lines",
                name=_label(name),
                line={
                    "color": colour(tokens[place % len(tokens)]),
                    "width": 2.2 if place == 0 else 1.6,
                    "dash": DASHES[place % len(DASHES)],
                },
                hovertemplate=f"%{{text}}: {escape(name, False)} %{{y:.2f}} %<extra></extra>",
            )
        )
    return dress(
        go.Figure(traces),
        margin={"l": 56, "r": 12, "t": 8, "b": 28},
        meta={"key": key},
        yaxis={"title": {"text": f"{over} rate (%)"}},
    )


def diffusion_lines(periods: pd.PeriodIndex, lines: dict[str, np.ndarray]) -> go.Figure:
    """Draw shares of components that rise; 50 is where rises and falls balance."""
    when = periods.to_timestamp()
    labels = np.array([period_label(period) for period in periods])
    tokens = ("ink", "fit", "mark", "other")
    figure = go.Figure(
        [
            go.Scatter(
                x=when,
                y=values,
                text=labels,
                mode="lines",
                name=_label(name),
                line={
                    "color": colour(tokens[place % len(tokens)]),
                    "width": 1.6,
                    "dash": ("solid", "dash")[place % 2],
                },
                hovertemplate=f"%{{text}}: {escape(name, False)} %{{y:.0f}}<extra></extra>",
            )
            for place, (name, values) in enumerate(lines.items())
        ]
    )
    dress(
        figure,
        margin={"l": 56, "r": 12, "t": 8, "b": 28},
        meta={
            "key": [
                (("line", "dash")[place % 2], tokens[place % len(tokens)], name)
                for place, name in enumerate(lines)
            ]
        },
        yaxis={"title": {"text": "share (0 to 100)"}, "range": [-2, 102]},
        shapes=[
            {
                "type": "line",
                "xref": "paper",
                "x0": 0,
                "x1": 1,
                "y0": 50,
                "y1": 50,
                "line": {"color": colour("ink"), "width": 0.7, "dash": "dot"},
            }
        ],
    )
    return figure


def weight_areas(periods: pd.PeriodIndex, parts: dict[str, np.ndarray]) -> go.Figure:
    """Draw effective weights through time, stacked to 100 percent; the last part is the rest."""
    when = periods.to_timestamp()
    labels = np.array([period_label(period) for period in periods])
    traces, key = [], []
    for place, (name, values) in enumerate(parts.items()):
        token = _part(place, len(parts))
        key.append(("block", token, name))
        traces.append(
            go.Scatter(
                x=when,
                y=100.0 * values,
                text=labels,
                mode="lines",
                stackgroup="one",
                line={"color": colour("paper"), "width": 0.6},
                fillcolor=colour(token),
                name=_label(name),
                hovertemplate=f"%{{text}}: {escape(name, False)} %{{y:.2f}} %<extra></extra>",
            )
        )
    return dress(
        go.Figure(traces),
        margin={"l": 56, "r": 12, "t": 8, "b": 28},
        meta={"key": key},
        yaxis={"title": {"text": "weight (%)"}, "range": [0, 100]},
    )


def _label(name: str) -> str:
    return escape(name if len(name) <= LONGEST else name[: LONGEST - 1].rstrip() + "…", False)


def _room(labels: list[str], letter: float = 6.4) -> int:
    return 20 + int(letter * min(LONGEST, max(map(len, labels), default=8)))


def _part(place: int, count: int) -> str:
    """Colour of a part of a stack; the last of several is the rest."""
    return "rest" if 0 < place == count - 1 else PARTS[place % len(PARTS)]
