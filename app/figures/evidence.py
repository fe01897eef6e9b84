"""Charts of what the exploration was worth: shift set, parameter plane, episodes, opinions."""

from html import escape

import numpy as np
import plotly.graph_objects as go

from analytics.error_density import ErrorDensity
from analytics.influence import CellWithout, Episode, InfluenceResult
from analytics.opinions import SecondOpinions
from analytics.robust import CellInference
from analytics.search import SearchResult
from analytics.series import Pair, period_label
from analytics.shiftset import ShiftSet
from analytics.stability import Stability
from app.compute import noun
from app.figures.lag import axis_title, rate_unit
from app.figures.lag_slices import density_surface
from app.figures.theme import colour, dress
from app.state import ViewState


def shift_profile(chosen: ShiftSet, pair: Pair) -> go.Figure:
    """Draw the correlation at every shift of one window, the shift set marked on it."""
    kept = np.isin(chosen.candidates, chosen.shifts)
    near = np.isin(chosen.candidates, chosen.preview)
    text = [f"p as the true shift {p:.3f}" for p in chosen.p_by_shift]
    figure = go.Figure(
        [
            go.Scatter(
                x=chosen.candidates,
                y=chosen.correlation,
                mode="lines",
                line={"color": colour("ink"), "width": 1.2},
                hoverinfo="skip",
                name="correlation",
            ),
            go.Scatter(
                x=chosen.candidates[near],
                y=chosen.correlation[near],
                mode="markers",
                marker={"size": 10, "symbol": "circle-open", "color": colour("mark")},
                hoverinfo="skip",
                name="quick preview of the set",
            ),
            go.Scatter(
                x=chosen.candidates[kept],
                y=chosen.correlation[kept],
                text=[t for t, k in zip(text, kept, strict=True) if k],
                mode="markers",
                marker={"size": 6, "color": colour("fit")},
                hovertemplate="shift %{x:+d}: correlation %{y:+.2f}<br>%{text}<extra></extra>",
                name=f"{100 * chosen.level:.0f} % shift set",
            ),
        ]
    )
    dress(
        figure,
        margin={"l": 60, "r": 12, "t": 34, "b": 48},
        showlegend=True,
        legend=_above(),
        xaxis={"title": {"text": f"shift ({noun(pair)}s)"}},
        yaxis={"title": {"text": f"correlation, window {chosen.window}"}},
    )
    return figure


def parameter_plane(
    inference: CellInference, pair: Pair, density: ErrorDensity | None = None
) -> go.Figure:
    """Draw where intercept and slope may lie together, robust and naive, and the zero slope.

    `density` lies below as a surface: the darker, the likelier an error of that size.
    """
    plane, unit = inference.plane, escape(rate_unit(pair.response), False)
    figure = go.Figure(
        [
            _outline(
                plane.robust, "fit", "solid", f"{100 * plane.level:.0f} % region, effective months"
            ),
            _outline(plane.naive, "mark", "dash", f"{100 * plane.level:.0f} % region, naive"),
            go.Scatter(
                x=[inference.intercept],
                y=[inference.slope],
                mode="markers",
                marker={"size": 8, "color": colour("ink"), "symbol": "cross"},
                hovertemplate="intercept %{x:.3f}, slope %{y:.3f}<extra></extra>",
                name="estimate",
            ),
            *([] if density is None else [density_surface(density)]),  # plotly draws it below
        ]
    )
    figure.add_hline(
        y=0,
        line={"color": colour("ink"), "width": 1, "dash": "dot"},
        annotation={"text": "slope 0: no relation", "font": {"size": 11}},
        annotation_position="bottom right",
    )
    dress(
        figure,
        margin={"l": 60, "r": 12, "t": 34, "b": 48},
        showlegend=True,
        legend=_above(),
        xaxis={"title": {"text": f"intercept ({unit})"}},
        yaxis={"title": {"text": "slope (response per unit of driver)"}},
    )
    return figure


def episode_shares(influence: InfluenceResult, pair: Pair, start: int) -> go.Figure:
    """Draw each episode's share of the covariance over its months; `start` as in the view."""
    days = pair.periods.to_timestamp()
    figure = go.Figure()
    for high, token, words in (
        (True, "response", "driver high"),
        (False, "driver", "driver low"),
    ):
        chosen = [e for e in influence.episodes if e.high is high]
        firsts = [days[start + e.first_month] for e in chosen]
        lasts = [days[start + e.stop_month - 1] for e in chosen]
        figure.add_trace(
            go.Bar(
                x=firsts,
                y=[100 * e.share for e in chosen],
                width=[(b - a).days * 86_400_000 for a, b in zip(firsts, lasts, strict=True)],
                offset=0,
                marker={
                    "color": colour(token),
                    "opacity": 0.8,
                    "pattern": {"shape": "" if high else "/"},
                },
                customdata=[[_span(e, pair, start), 100 * e.change] for e in chosen],
                hovertemplate=(
                    "%{customdata[0]}: %{y:.0f} % of the covariance"
                    "<br>slope without it %{customdata[1]:+.0f} %<extra></extra>"
                ),
                name=words,
            )
        )
    dress(
        figure,
        margin={"l": 60, "r": 12, "t": 34, "b": 30},
        showlegend=True,
        legend=_above(),
        barmode="overlay",
        yaxis={"title": {"text": "share of the covariance (%)"}},
    )
    return figure


def scatter_without(
    cell: CellInference,
    episode: Episode,
    rest: CellWithout,
    pair: Pair,
    state: ViewState,
    start: int,
) -> go.Figure:
    """Draw a cell with the pairs of one episode set apart, and the line with and without them.

    Pairs and lines are those without seasonal means, as the share and the change of slope are.
    """
    low, high = float(rest.driver.min()), float(rest.driver.max())
    ends = [low, high]
    figure = go.Figure(
        [
            go.Scatter(
                x=rest.driver[rest.kept],
                y=rest.response[rest.kept],
                mode="markers",
                marker={"size": 5, "color": colour("other"), "opacity": 0.7},
                hoverinfo="skip",
                name="kept",
            ),
            go.Scatter(
                x=rest.driver[~rest.kept],
                y=rest.response[~rest.kept],
                mode="markers",
                marker={"size": 6, "symbol": "x-thin-open", "color": colour("quiet")},
                hoverinfo="skip",
                name=f"left out: {_span(episode, pair, start)}",
            ),
            go.Scatter(
                x=ends,
                y=[cell.intercept + cell.slope * end for end in ends],
                mode="lines",
                line={"color": colour("fit"), "width": 1.5, "dash": "dash"},
                hoverinfo="skip",
                name=f"all, slope {cell.slope:.3f}",
            ),
            go.Scatter(
                x=ends,
                y=[rest.intercept + rest.slope * end for end in ends],
                mode="lines",
                line={"color": colour("fit"), "width": 2.5},
                hoverinfo="skip",
                name=f"without, slope {rest.slope:.3f}",
            ),
        ]
    )
    dress(
        figure,
        margin={"l": 66, "r": 12, "t": 50, "b": 48},
        showlegend=True,
        legend=_above(),
        xaxis={"title": {"text": axis_title(pair.driver, state)}},
        yaxis={"title": {"text": axis_title(pair.response, state, lines=2)}},
    )
    return figure


def opinion_profiles(opinions: SecondOpinions, pair: Pair) -> go.Figure:
    """Draw the lag profile of each method with its band, one row each, on one axis of shifts."""
    rows = [
        (name, shifts, estimate, low, high, token)
        for name, shifts, estimate, low, high, token in _profiles(opinions)
    ]
    figure, axes = go.Figure(), {}
    for place, (name, shifts, estimate, low, high, token) in enumerate(rows):
        axis = "" if place == 0 else str(place + 1)
        ends = _bands(place, len(rows))
        figure.add_trace(
            go.Scatter(
                x=np.concatenate((shifts, shifts[::-1])),
                y=np.concatenate((high, low[::-1])),
                fill="toself",
                fillcolor=colour(token),
                opacity=0.22,
                line={"width": 0},
                hoverinfo="skip",
                yaxis=f"y{axis}",
                name=f"{name}, band",
            )
        )
        figure.add_trace(
            go.Scatter(
                x=shifts,
                y=estimate,
                mode="lines",
                line={"color": colour(token), "width": 1.8},
                hovertemplate="%{x} " + noun(pair) + "s: %{y:.3f}<extra>" + name + "</extra>",
                yaxis=f"y{axis}",
                name=name,
            )
        )
        axes[f"yaxis{axis}"] = {
            "domain": ends,
            "title": {"text": name.replace(" ", "<br>", 1), "font": {"size": 11}},
            "zeroline": True,
            "zerolinecolor": colour("ink"),
            "zerolinewidth": 1,
            "nticks": 4,
        }
    dress(
        figure,
        **axes,
        margin={"l": 74, "r": 12, "t": 8, "b": 44},
        xaxis={
            "title": {"text": f"{noun(pair)}s after the driver"},
            "anchor": "free",
            "position": 0,
        },
    )
    return figure


def stability_courses(stable: Stability, pair: Pair, start: int) -> go.Figure:
    """Draw the slope over rolling samples with the band that a constant relation would keep."""
    days = pair.periods.to_timestamp()[start + stable.last_month]
    course = stable.rolling_slope
    figure = go.Figure(
        [
            go.Scatter(
                x=[*days, *days[::-1]],
                y=np.concatenate((course.high, course.low[::-1])),
                fill="toself",
                fillcolor=colour("quiet"),
                opacity=0.2,
                line={"width": 0},
                hoverinfo="skip",
                name=f"{100 * stable.level:.0f} % of samples if the relation were constant",
            ),
            go.Scatter(
                x=days,
                y=course.estimate,
                mode="lines",
                line={"color": colour("fit"), "width": 1.8},
                hovertemplate="%{x|%b %Y}: %{y:.2f}<extra></extra>",
                name=f"slope over {stable.span} {noun(pair)}s up to here",
            ),
            go.Scatter(
                x=days,
                y=stable.growing_slope.estimate,
                mode="lines",
                line={"color": colour("other"), "width": 1.4, "dash": "dash"},
                hovertemplate="%{x|%b %Y}: %{y:.2f}<extra></extra>",
                name="slope over everything up to here",
            ),
        ]
    )
    dress(
        figure,
        margin={"l": 60, "r": 12, "t": 34, "b": 30},
        showlegend=True,
        legend=_above(),
        yaxis={"title": {"text": "slope"}},
    )
    return figure


def support_traces(found: SearchResult) -> list[go.Figure]:
    """Return traces to lay over the map: unsupported cells paler, and the 5 % line."""
    weak = np.where(found.p_cell <= 0.05, np.nan, 1.0)
    paper = colour("paper")
    return [
        go.Heatmap(
            x=found.shifts,
            y=found.windows,
            z=weak,
            colorscale=[[0, paper], [1, paper]],
            opacity=0.45,
            showscale=False,
            hoverinfo="skip",
            name="not supported by the search",
        ),
        go.Contour(
            x=found.shifts,
            y=found.windows,
            z=found.p_cell,
            contours={"start": 0.05, "end": 0.05, "size": 1, "coloring": "none"},
            line={"color": colour("ink"), "width": 1.5},
            showscale=False,
            hoverinfo="skip",
            name="search-adjusted p of 5 %",
        ),
    ]


def _profiles(
    opinions: SecondOpinions,
) -> list[tuple[str, np.ndarray, np.ndarray, np.ndarray, np.ndarray, str]]:
    found = []
    white = opinions.prewhitened
    if white is not None:
        bound = np.full(white.averaged.shape, white.averaged_bound)
        found.append(
            ("prewhitened correlation", white.shifts, white.averaged, -bound, bound, "mark")
        )
    for name, result, token in (
        ("distributed lag", opinions.distributed, "fit"),
        ("local projection", opinions.projected, "other"),
    ):
        if result is not None:
            part = result.averaged
            found.append((name, part.shifts, part.estimate, part.low, part.high, token))
    return found


def _bands(place: int, rows: int) -> list[float]:
    height = 1.0 / rows
    return [1.0 - (place + 1) * height + 0.04, 1.0 - place * height]


def _outline(points: np.ndarray, token: str, dash: str, name: str) -> go.Scatter:
    return go.Scatter(
        x=points[:, 0],
        y=points[:, 1],
        mode="lines",
        line={"color": colour(token), "width": 1.8, "dash": dash},
        hoverinfo="skip",
        name=name,
    )


def _span(episode: Episode, pair: Pair, start: int) -> str:
    first = period_label(pair.periods[start + episode.first_month])
    return f"{first} to {period_label(pair.periods[start + episode.stop_month - 1])}"


def _above() -> dict[str, object]:
    return {"orientation": "h", "x": 0, "y": 1, "yanchor": "bottom", "font": {"size": 11}}
