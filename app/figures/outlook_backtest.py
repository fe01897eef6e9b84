"""Charts of how past outlooks turned out: errors, what the driver adds, coverage, through time."""

import numpy as np
import pandas as pd
import plotly.graph_objects as go

from analytics.backtest_scores import Scores
from analytics.direct import DirectForecasts
from analytics.series import FloatArray
from app.figures.reading import above, when
from app.figures.theme import colour, dress

TONES = {"no change": "mark", "autoregression": "other", "mean so far": "late"}
DASHES = {"no change": "solid", "autoregression": "5px,2px", "mean so far": "dot"}
CLEAR = 0.05


def ratio_lines(scores: Scores, noun: str) -> go.Figure:
    """Draw the relation's errors over each benchmark's by horizon; dots where it is clear."""
    figure = go.Figure()
    for row, name in enumerate(scores.benchmarks):
        ratio = scores.ratio[row]
        figure.add_trace(
            go.Scatter(
                x=scores.ahead,
                y=ratio,
                mode="lines",
                line={"color": colour(TONES[name]), "width": 1.8, "dash": DASHES[name]},
                hovertemplate=f"%{{y:.2f}}<extra>over {name}</extra>",
                name=f"over {name}",
            )
        )
        clear = np.array([test.p_better <= CLEAR for test in scores.dm[row]]) & (ratio < 1.0)
        figure.add_trace(
            go.Scatter(
                x=scores.ahead[clear],
                y=ratio[clear],
                mode="markers",
                marker={"size": 6, "color": colour(TONES[name])},
                hoverinfo="skip",
                showlegend=False,
                name=f"over {name}: one-sided p at most {CLEAR}",
            )
        )
    figure.add_hline(y=1, line={"color": colour("ink"), "width": 1})
    _dress(figure, f"{noun}s ahead", "RMSE, relation over benchmark")
    return figure


def gain_lines(direct: DirectForecasts, added: FloatArray | None, noun: str) -> go.Figure:
    """Draw the share of squared errors that the driver takes away: in sample, in past forecasts."""
    figure = go.Figure(
        go.Scatter(
            x=direct.ahead,
            y=100.0 * direct.driver_gain,
            mode="lines",
            line={"color": colour("driver"), "width": 1.4, "dash": "5px,2px"},
            hovertemplate="%{y:.0f} %<extra>within the sample</extra>",
            name="within the sample (never below 0)",
        )
    )
    if added is not None:
        figure.add_trace(
            go.Scatter(
                x=direct.ahead,
                y=100.0 * added,
                mode="lines",
                line={"color": colour("fit"), "width": 2.2},
                hovertemplate="%{y:.0f} %<extra>in past forecasts</extra>",
                name="in past forecasts",
            )
        )
    figure.add_hline(y=0, line={"color": colour("ink"), "width": 1})
    _dress(figure, f"{noun}s ahead", "squared error taken away, percent")
    return figure


def coverage_lines(scores: Scores, noun: str) -> go.Figure:
    """Draw how often past intervals held, by horizon, beside what they promised."""
    figure = go.Figure()
    tones = ("driver", "fit", "mark")
    for row, level in enumerate(scores.levels):
        tone = colour(tones[row % len(tones)])
        figure.add_hline(y=100.0 * level, line={"color": tone, "width": 1, "dash": "dot"})
        figure.add_trace(
            go.Scatter(
                x=scores.ahead,
                y=100.0 * scores.share[row],
                mode="lines",
                line={
                    "color": tone,
                    "width": 1.8,
                    "dash": ("solid", "5px,2px", "dashdot")[row % 3],
                },
                hovertemplate=f"%{{y:.0f}} %<extra>{100 * level:.0f} % interval</extra>",
                name=f"{100 * level:.0f} % interval",
            )
        )
    _dress(figure, f"{noun}s ahead", "outcomes inside, percent")
    figure.update_yaxes(range=[0, 104])
    return figure


def gain_through_time(periods: pd.PeriodIndex, gain: FloatArray, against: str) -> go.Figure:
    """Draw the cumulative difference of squared errors; it rises where the relation helped."""
    figure = go.Figure(
        go.Scatter(
            x=when(periods),
            y=gain,
            mode="lines",
            line={"color": colour("fit"), "width": 1.8},
            hovertemplate="%{y:.1f}<extra></extra>",
            name=f"squared errors of {against} less those of the relation, summed",
        )
    )
    figure.add_hline(y=0, line={"color": colour("ink"), "width": 1})
    _dress(figure, "", "cumulative, percent²", legend=False)
    figure.update_xaxes(hoverformat="%b %Y")
    return figure


def _dress(figure: go.Figure, across: str, unit: str, *, legend: bool = True) -> None:
    dress(
        figure,
        margin={"l": 60, "r": 16, "t": 40 if legend else 14, "b": 44 if across else 34},
        showlegend=legend,
        legend=above(),
        hovermode="x unified",
        xaxis={"title": {"text": across}} if across else {},
        yaxis={"title": {"text": unit}},
    )
