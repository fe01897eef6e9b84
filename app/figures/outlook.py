"""Charts of the Outlook page that look ahead: fan, gap, drivers side by side, statements."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from html import escape

import numpy as np
import pandas as pd
import plotly.graph_objects as go

from analytics.series import FloatArray
from app.figures.reading import above, ring, when
from app.figures.theme import colour, dress

TINTS = ("few-2", "few-3", "few-4")  # widest interval to narrowest
DASHES = ("solid", "5px,2px", "dot", "dashdot", "longdash", "2px,4px", "8px,2px,2px,2px", "solid")
TONES = ("driver", "mark", "other", "fit", "late", "early", "middle", "quiet")


@dataclass(frozen=True, eq=False)
class Ahead:
    """A path with its intervals, and the words at the end of each, narrowest level first."""

    periods: pd.PeriodIndex
    centre: FloatArray
    bands: Sequence[tuple[FloatArray, FloatArray]]
    labels: Sequence[str]


def fan_chart(
    history: tuple[pd.PeriodIndex, FloatArray],
    ahead: Ahead,
    others: Mapping[str, FloatArray],
    unit: str,
) -> go.Figure:
    """Draw what was observed, the implied path and its intervals, benchmarks beside it."""
    past, values = history
    figure = go.Figure()
    joined = past[-1:].append(ahead.periods)
    last = values[-1:]
    order = range(len(ahead.bands) - 1, -1, -1)
    for tint, row in zip(TINTS, order, strict=False):
        low, high = (np.concatenate((last, end)) for end in ahead.bands[row])
        known = ~np.isnan(low)
        dates = when(joined)[known]
        figure.add_trace(
            go.Scatter(
                x=np.concatenate((dates, dates[::-1])),
                y=np.concatenate((high[known], low[known][::-1])),
                mode="lines",
                fill="toself",
                fillcolor=colour(tint),
                line={"width": 0},
                opacity=0.55,
                hoverinfo="skip",
                showlegend=False,
                name=f"{ahead.labels[row]} interval",
            )
        )
    figure.add_trace(_line(past, values, "response", "observed"))
    figure.add_trace(
        _line(joined, np.concatenate((last, ahead.centre)), "fit", "implied", width=2.2)
    )
    for place, (name, path) in enumerate(others.items()):
        size = min(path.size, ahead.periods.size)
        figure.add_trace(
            _line(
                joined[: size + 1],
                np.concatenate((last, path[:size])),
                TONES[place],
                name,
                width=1.2,
                dash="dot",
            )
        )
    drawn = np.concatenate([values, ahead.centre, *(end for band in ahead.bands for end in band)])
    apart = 0.055 * float(np.nanmax(drawn) - np.nanmin(drawn))
    place = -np.inf
    for (_, high), label in zip(ahead.bands, ahead.labels, strict=True):
        if not np.isnan(high[-1]):
            place = max(float(high[-1]), place + apart)  # narrow bands: labels one over the other
            figure.add_annotation(
                x=when(ahead.periods)[-1],
                y=place,
                text=escape(label, False),
                showarrow=False,
                xanchor="left",
                xshift=4,
                font={"size": 11},
            )
    _dress(figure, unit, right=max([70, *(7 * len(label) + 10 for label in ahead.labels)]))
    ends = when(past[:1].append(ahead.periods[-1:]))
    figure.update_xaxes(range=[ends[0], ends[1] + 0.004 * (ends[1] - ends[0])])
    return figure


def gap_lines(
    periods: pd.PeriodIndex, observed: FloatArray, expected: FloatArray, gap: FloatArray, unit: str
) -> go.Figure:
    """Draw the response's mean over the window, what the line says for it, and the difference."""
    figure = go.Figure(
        [
            _line(periods, observed, "response", "observed"),
            _line(periods, expected, "fit", "expected by the relation", dash="5px,2px"),
            go.Bar(
                x=when(periods),
                y=gap,
                yaxis="y2",
                marker={"color": colour("mark"), "line": {"width": 0}},
                hovertemplate="%{y:+.2f}<extra>observed less expected</extra>",
                name="observed less expected",
            ),
        ]
    )
    _dress(figure, unit)
    dress(
        figure,
        bargap=0,
        xaxis={"anchor": "y2", "range": [*when(periods[[0, -1]])]},
        yaxis={"domain": [0.4, 1]},
        yaxis2={"domain": [0, 0.32], "title": {"text": "points"}},
    )
    return figure


def driver_paths(
    history: tuple[pd.PeriodIndex, FloatArray],
    periods: pd.PeriodIndex,
    singles: Mapping[str, FloatArray],
    combined: Mapping[str, FloatArray],
    unit: str,
) -> go.Figure:
    """Draw the path of each driver and of their combinations."""
    past, values = history
    last, joined = values[-1:], past[-1:].append(periods)
    figure = go.Figure([_line(past, values, "response", "observed")])
    for place, (name, path) in enumerate(singles.items()):
        figure.add_trace(
            _line(
                joined[: path.size + 1],
                np.concatenate((last, path)),
                TONES[place % len(TONES)],
                name,
                width=1.3,
                dash=DASHES[place % len(DASHES)],
            )
        )
    for name, path in combined.items():
        figure.add_trace(
            _line(
                joined[: path.size + 1],
                np.concatenate((last, path)),
                "ink",
                name,
                width=2.4,
                dash="solid" if name == next(iter(combined)) else "dash",
            )
        )
    _dress(figure, unit)
    return figure


@dataclass(frozen=True, eq=False)
class StatedLine:
    """A statement as it is drawn: its path, one interval, and what came so far."""

    name: str
    periods: pd.PeriodIndex
    centre: FloatArray
    low: FloatArray
    high: FloatArray
    outcome: FloatArray
    inside: FloatArray
    stands: bool


def statement_lines(
    history: tuple[pd.PeriodIndex, FloatArray], stated: Sequence[StatedLine], unit: str
) -> go.Figure:
    """Draw statements over what came: hits as dots, misses as crosses."""
    figure = go.Figure()
    for one in stated:
        known = ~np.isnan(one.low)
        if one.stands and known.any():
            dates = when(one.periods)[known]
            figure.add_trace(
                go.Scatter(
                    x=np.concatenate((dates, dates[::-1])),
                    y=np.concatenate((one.high[known], one.low[known][::-1])),
                    mode="lines",
                    fill="toself",
                    fillcolor=colour("few-2"),
                    line={"width": 0},
                    opacity=0.45,
                    hoverinfo="skip",
                    showlegend=False,
                    name=f"{one.name}, 80 % interval",
                )
            )
    figure.add_trace(_line(*history, "response", "observed"))
    for place, one in enumerate(stated):
        figure.add_trace(
            _line(
                one.periods,
                one.centre,
                "fit" if one.stands else "quiet",
                one.name,
                width=1.8 if one.stands else 1,
                dash=DASHES[place % len(DASHES)],
            )
        )
        for hit, symbol, tone in ((1.0, "circle", "other"), (0.0, "x", "alarm")):
            chosen = one.inside == hit
            if chosen.any():
                figure.add_trace(
                    go.Scatter(
                        x=when(one.periods)[chosen],
                        y=one.outcome[chosen],
                        mode="markers",
                        marker={"size": 7, "symbol": symbol, "color": colour(tone), "line": ring()},
                        hovertemplate="%{y:.2f}"
                        f"<extra>{'inside' if hit else 'outside'} 80 %, {escape(one.name, False)}"
                        "</extra>",
                        showlegend=False,
                        name=f"{one.name}: {'hits' if hit else 'misses'}",
                    )
                )
    _dress(figure, unit)
    return figure


def _line(
    periods: pd.PeriodIndex,
    values: FloatArray,
    tone: str,
    name: str,
    *,
    width: float = 1.6,
    dash: str = "solid",
) -> go.Scatter:
    shown = escape(name, False)
    return go.Scatter(
        x=when(periods),
        y=values,
        mode="lines",
        line={"color": colour(tone), "width": width, "dash": dash},
        hovertemplate=f"%{{y:.2f}}<extra>{shown}</extra>",
        name=shown,
    )


def _dress(figure: go.Figure, unit: str, *, right: int = 16) -> None:
    dress(
        figure,
        margin={"l": 56, "r": right, "t": 40, "b": 34},
        showlegend=True,
        legend=above(),
        hovermode="x unified",
        xaxis={"hoverformat": "%b %Y"},
        yaxis={"title": {"text": escape(unit, False)}},
    )
