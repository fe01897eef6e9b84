"""Charts of the Reading page through time: rates, base effects, path, rank, episodes."""

from collections.abc import Sequence
from html import escape

import numpy as np
import pandas as pd
import plotly.graph_objects as go

from analytics.base_effect import BaseEffects, DropOuts
from analytics.carry_over import Path
from analytics.high_inflation import Run
from analytics.series import Series, period_code, period_label
from app.figures.theme import colour, dress

YEAR = {"monthly": "12-month", "quarterly": "four-quarter", "annual": "yearly"}


def rate_lines(yearly: Series, quarter: Series | None) -> go.Figure:
    """Draw the yearly rate through time, the 3-month rate behind it, the print marked."""
    traces = []
    if quarter is not None:
        traces.append(
            go.Scatter(
                x=when(quarter.periods),
                y=quarter.values,
                mode="lines",
                line={"color": colour("driver"), "width": 0.8},
                opacity=0.7,
                hovertemplate="%{y:.1f}<extra>3 months, annualised</extra>",
                name="3-month rate, annualised",
            )
        )
    words = "rate" if quarter is None else f"{YEAR[yearly.frequency]} rate"
    traces += [
        _line(yearly, "response", words, "%{y:.1f}"),
        _mark(yearly.periods[-1:], yearly.values[-1:], "the print"),
    ]
    figure = go.Figure(traces)
    _dress(
        figure,
        "percent" if quarter is not None else _unit(yearly),
        legend=True,
        span=yearly.periods,
        hovermode="x unified",
    )
    return figure


def factor_line(factor: Series) -> go.Figure:
    """Draw the level as a multiple of its first value, on a log scale."""
    figure = go.Figure(
        [
            _line(factor, "response", "multiple", "%{y:.4g} times"),
            _mark(factor.periods[-1:], factor.values[-1:], "the print"),
        ]
    )
    _dress(
        figure,
        f"times the level of {period_label(factor.periods[0])}, log scale",
        span=factor.periods,
    )
    ticks, words = _log_ticks(float(np.nanmin(factor.values)), float(np.nanmax(factor.values)))
    figure.update_yaxes(type="log", tickvals=ticks, ticktext=words)
    return figure


def base_bars(base: BaseEffects, drops: DropOuts | None, noun: str) -> go.Figure:
    """Draw what moved the yearly rate in each period, and what is to drop out next."""
    figure = go.Figure(
        [
            go.Bar(
                x=when(base.periods),
                y=base.new,
                customdata=base.rate_new,
                marker={"color": colour("response")},
                hovertemplate=f"%{{y:+.2f}} points (rate %{{customdata:.2f}} %)"
                f"<extra>new {noun}</extra>",
                name=f"new {noun}",
            ),
            go.Bar(
                x=when(base.periods),
                y=base.base,
                customdata=base.rate_dropped,
                marker={
                    "color": colour("paper"),
                    "line": {"color": colour("driver"), "width": 1.2},
                    "pattern": {"shape": "/", "size": 5, "fgcolor": colour("driver")},
                },
                hovertemplate=f"%{{y:+.2f}} points (rate %{{customdata:.2f}} %)"
                f"<extra>{noun} that dropped out</extra>",
                name=f"{noun} that dropped out",
            ),
            go.Scatter(
                x=when(base.periods),
                y=base.change,
                mode="lines+markers",
                line={"color": colour("ink"), "width": 1},
                marker={"size": 5, "color": colour("ink")},
                hovertemplate="%{y:+.2f} points<extra>change in the yearly rate</extra>",
                name="change in the yearly rate",
            ),
        ]
    )
    if drops is not None:
        figure.add_trace(
            go.Bar(
                x=when(drops.periods),
                y=drops.pull,
                customdata=np.stack([drops.rate, drops.usual], axis=1),
                marker={"color": colour("mark")},
                hovertemplate="%{customdata[0]:.2f} % drops out, usual %{customdata[1]:.2f} %:"
                " pull %{y:+.2f} points<extra>to come</extra>",
                name=f"to come, if the new {noun} is a usual one",
            )
        )
        _today(figure, base.periods[-1], drops.periods[0])
    bars = {"barmode": "relative", "bargap": 0.25, "hovermode": "x unified"}
    _dress(figure, "percentage points", legend=True, **bars)
    return figure


def path_lines(yearly: Series | None, path: Path, periods_per_year: int) -> go.Figure:
    """Draw the yearly rate of the last two years and the path if every period brings the same."""
    traces = []
    if yearly is not None:
        recent = slice(-2 * periods_per_year, None)
        traces = [
            go.Scatter(
                x=when(yearly.periods[recent]),
                y=yearly.values[recent],
                mode="lines",
                line={"color": colour("response"), "width": 2},
                hovertemplate="%{y:.2f} %<extra>observed</extra>",
                name="observed",
            )
        ]
        join = (yearly.periods[-1:].append(path.periods), np.append(yearly.values[-1], path.yearly))
    else:
        join = (path.periods, path.yearly)
    traces.append(
        go.Scatter(
            x=when(join[0]),
            y=join[1],
            mode="lines",
            line={"color": colour("mark"), "width": 2, "dash": "dash"},
            hovertemplate="%{y:.2f} %<extra>if</extra>",
            name=f"if every coming period brings {path.rate:g} percent",
        )
    )
    figure = go.Figure(traces)
    _dress(figure, "yearly rate, percent", legend=True, hovermode="x unified")
    return figure


def rank_line(through_time: Series) -> go.Figure:
    """Draw the rank of each reading among those that were there when it came out."""
    figure = go.Figure(
        [
            _line(through_time, "response", "rank then", "rank %{y:.0f}", width=0.9),
            _mark(through_time.periods[-1:], through_time.values[-1:], "the print"),
        ]
    )
    _dress(figure, "percentile rank as it read then", span=through_time.periods)
    figure.update_yaxes(range=[-3, 104], tickvals=[0, 25, 50, 75, 100])
    return figure


def episode_bands(yearly: Series, mark: float, runs: Sequence[Run]) -> go.Figure:
    """Draw the yearly rate with its episodes as hatched bands, each with its peak."""
    figure = go.Figure()
    finite = yearly.values[~np.isnan(yearly.values)]
    top, low = float(finite.max()), min(0.0, float(finite.min()))
    for run in runs:
        first, stop = when(pd.PeriodIndex([run.first, run.last + 1]))
        figure.add_trace(
            go.Scatter(
                x=[first, first, stop, stop],
                y=[low, top, top, low],
                mode="lines",
                fill="toself",
                line={"width": 0},
                fillpattern={
                    "shape": "/",
                    "size": 6,
                    "solidity": 0.18,
                    "fgcolor": colour("mark"),
                    "bgcolor": colour("paper"),
                },
                hoverinfo="skip",
                showlegend=False,
                name=f"{period_code(run.first)}:{period_code(run.last)}",
            )
        )
    figure.add_trace(_line(yearly, "response", "yearly rate", "%{y:.1f} %"))
    if runs:
        figure.add_trace(
            go.Scatter(
                x=when(pd.PeriodIndex([run.peak_period for run in runs])),
                y=[run.peak for run in runs],
                text=[f"{run.peak:.1f}" for run in runs],
                mode="markers+text",
                textposition="top center",
                marker={"size": 6, "color": colour("mark")},
                hoverinfo="skip",
                name="peak",
            )
        )
    figure.add_hline(y=mark, line={"color": colour("ink"), "width": 1, "dash": "dot"})
    figure.add_hline(y=0, line={"color": colour("rule"), "width": 1})
    _dress(figure, f"{YEAR[yearly.frequency]} rate, percent", span=yearly.periods)
    figure.update_yaxes(range=[low - 0.04 * (top - low), top + 0.14 * (top - low)])
    return figure


def when(periods: pd.PeriodIndex) -> pd.DatetimeIndex:
    """Return the first day of each period, which plotly draws on a calendar axis."""
    return periods.to_timestamp()


def _line(rate: Series, tone: str, name: str, hover: str, width: float = 1.6) -> go.Scatter:
    return go.Scatter(
        x=when(rate.periods),
        y=rate.values,
        mode="lines",
        line={"color": colour(tone), "width": width},
        hovertemplate=f"{hover}<extra>{name}</extra>",
        name=name,
    )


def _mark(periods: pd.PeriodIndex, values: np.ndarray, name: str) -> go.Scatter:
    return go.Scatter(
        x=when(periods),
        y=values,
        mode="markers",
        marker={"size": 9, "color": colour("mark"), "line": ring()},
        hoverinfo="skip",
        name=name,
    )


def ring() -> dict[str, object]:
    """Return the rim that sets the print's mark apart from lines."""
    return {"color": colour("paper"), "width": 1.5}


def _dress(
    figure: go.Figure,
    unit: str,
    *,
    legend: bool = False,
    span: pd.PeriodIndex | None = None,
    **layout: object,
) -> None:
    along: dict[str, object] = {"hoverformat": "%b %Y"}
    if span is not None:  # markers at the end would have plotly add years of white
        ends = when(span[[0, -1]])
        along["range"] = [ends[0], ends[1] + 0.012 * (ends[1] - ends[0])]
    dress(
        figure,
        margin={"l": 56, "r": 16, "t": 40 if legend else 14, "b": 34},
        showlegend=legend,
        legend=above(),
        xaxis=along,
        yaxis={"title": {"text": unit}},
        **layout,
    )


def above() -> dict[str, object]:
    """Return where a legend stands above a chart."""
    return {"orientation": "h", "x": 0, "y": 1.0, "yanchor": "bottom", "font": {"size": 11}}


def _today(figure: go.Figure, last: pd.Period, coming: pd.Period) -> None:
    """Draw the line between what is known and what is to come."""
    ends = when(pd.PeriodIndex([last, coming]))
    middle = ends[0] + (ends[1] - ends[0]) / 2
    figure.add_shape(
        type="line",
        x0=middle,
        x1=middle,
        xref="x",
        y0=0,
        y1=1,
        yref="y domain",
        line={"color": colour("ink"), "width": 1, "dash": "dot"},
    )


def _unit(rate: Series) -> str:
    return escape(rate.unit or "percent", False)


def _log_ticks(low: float, high: float) -> tuple[list[float], list[str]]:
    """Return round multiples over the range, at most about ten."""
    tens = range(int(np.floor(np.log10(low))), int(np.ceil(np.log10(high))) + 1)
    steps = (1, 2, 5) if len(tens) <= 4 else (1,)
    stride = max(1, len(tens) // 10)
    ticks = [step * 10.0**ten for ten in list(tens)[::stride] for step in steps]
    return ticks, [f"× {tick:g}" if tick < 1e6 else f"× {tick:.0e}" for tick in ticks]
