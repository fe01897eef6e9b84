"""The part of the Lag page that says what the exploration was worth.

The quick parts are answered when the hand rests. Long work is done in chunks that
assets/evidence.js asks for; when it is done, the same callback answers again from memory.
"""

import json
from typing import Any

from dash import Dash, Input, Output, dcc, html
from plotly.graph_objects import Figure

from app import controls
from app.compute import Bridge, cell_span, noun
from app.figures import evidence as figures
from app.figures import lag_tools as tool_figures
from app.lag.cells import without_episode
from app.lag.evidence import evidence
from app.lag.tools import density_of, peaks_of, two_cells
from app.lag.verdict import verdict
from app.lag.work import WORK
from app.pages import lag_season, lag_tools, lag_words
from app.state import StateError, ViewState
from app.words import as_sentence

FOLDS = {
    "profile": "Which shifts fit as well",
    "plane": "Where intercept and slope may lie",
    "episodes": "Which years carry it",
    "compare": "Two cells side by side",
    "peaks": "Peaks that meet across the shift",
    "responses": "This driver against other responses",
    "opinions": "Second opinions",
    "stability": "The slope through time",
    "season": "The season taken out",
    "method": "How it was searched",
}
_NEEDS = {
    "opinions": ("directions", "opinions"),
    "stability": ("stability",),
    "responses": ("responses",),
}
_NO_CHART = ("peaks", "method")  # their numbers are drawn elsewhere, or there are none


def strip(copy: html.Button) -> html.Div:
    """Return the line of correlation and p-values under the headline; `copy` copies the first."""
    return html.Div(
        [
            html.Div(
                [
                    html.P(id="lag-readout", className="readout", **{"aria-live": "polite"}),
                    copy,
                ],
                className="readout-line",
            ),
            html.Dl(id="lag-strip", className="strip"),
        ],
        className="strip-line",
    )


def verdict_place() -> html.Div:
    """Return where the verdict stands, with the progress of the search."""
    return html.Div(
        [
            html.P(id="lag-verdict", className="verdict", **{"aria-live": "polite"}),
            html.Div(
                [
                    html.Progress(id="lag-progress", value="0", max="1"),
                    html.Span(id="lag-progress-words"),
                    html.Button("Stop", id="lag-cancel", type="button"),
                    html.Button("Search", id="lag-resume", type="button", hidden=True),
                ],
                id="lag-work",
                className="work",
                hidden=True,
            ),
        ],
        className="verdict-place",
    )


def folds(state: ViewState) -> html.Div:
    """Return the sections that fold out below the charts."""
    tools = html.Div(
        [controls.number(state, "surrogates"), controls.number(state, "seed")],
        className="controls",
    )
    inside: dict[str, list[Any]] = {
        name: [] if name in _NO_CHART else [_plot(name)] for name in FOLDS
    }
    inside["peaks"] = [controls.csv_button("peaks")]
    inside["episodes"].append(_plot("without"))
    inside["method"] = [tools]
    return html.Div(
        [
            dcc.Store(id="lag-evidence"),
            dcc.Store(id="lag-adopted"),
            dcc.Store(id="lag-tick", data=0),
            dcc.Store(id="lag-open", data=[]),
            *[
                html.Details(
                    [
                        html.Summary(html.H2(words)),
                        html.Div(id=f"lag-{name}-words", className="fold-words"),
                        *inside[name],
                    ],
                    id=f"fold-{name}",
                    className="fold",
                    **{"data-fold": name},
                )
                for name, words in FOLDS.items()
            ],
        ],
        className="folds",
    )


def register(app: Dash, bridge: Bridge) -> None:
    """Register the callbacks of the evidence on an app."""

    @app.callback(
        Output("lag-strip", "children"),
        Output("lag-verdict", "children"),
        *[Output(f"lag-{name}-words", "children") for name in FOLDS],
        Output("lag-evidence", "data"),
        Input("lag-state", "data"),
        Input("lag-tick", "data"),
        Input("lag-open", "data"),
    )
    def _judge(state: dict[str, Any], _tick: int, opened: list[str]) -> tuple[Any, ...]:
        empty = [[] for _ in FOLDS]
        if not state:
            return [], "", *empty, None
        try:
            return answer(controls.sent_state(state), bridge, tuple(opened or ()))
        except ValueError as error:
            nothing = {"figures": {}, "jobs": [], "support": [], "set": [], "peaks": []}
            return [], as_sentence(str(error)), *empty, {"state": state, **nothing}


def answer(state: ViewState, bridge: Bridge, opened: tuple[str, ...]) -> tuple[Any, ...]:
    """Return strip, verdict, the words of each fold, and charts with the work still to do."""
    pair = bridge.pair(state)
    known = evidence(state, bridge)
    jobs = [] if known.refusal or known.search else ["search"]
    if known.found and known.shift_set is None and not known.set_refusal:
        jobs.append("shift_set")
    results: dict[str, Any] = {}
    refusals: dict[str, str] = {}
    for fold in opened:
        for kind in _NEEDS.get(fold, ()):
            if kind == "responses" and not state.other_responses:
                continue
            try:
                work = WORK[kind](state, bridge)
            except StateError as error:
                refusals[kind] = str(error)
                continue
            results[kind] = bridge.jobs.remembered(work)
            refusals[kind] = "" if results[kind] else bridge.jobs.refusal(work)
            if known.refusal and kind == "directions":
                refusals[kind] = known.refusal
            if results[kind] is None and not refusals[kind]:
                jobs.append(kind)
    start = cell_span(pair, state)[0]
    left_out, refused = None, ""
    try:
        left_out = without_episode(state, bridge)
    except StateError as error:
        refused = str(error)
    used = bridge.prepared(state)
    both, unpinned = None, ""
    try:
        both = two_cells(state, bridge)
    except ValueError as error:
        unpinned = str(error)
    peaks = peaks_of(state, bridge)
    several = results.get("responses")
    charts: dict[str, Figure] = {}  # those that are seen
    if "plane" in opened:
        density = density_of(state, bridge)
        charts["plane"] = figures.parameter_plane(known.inference, pair, density)
    if "episodes" in opened:
        charts["episodes"] = figures.episode_shares(known.influence, pair, start)
        if left_out is not None:
            charts["without"] = figures.scatter_without(
                known.inference, *left_out, pair, state, start
            )
    if "profile" in opened and known.found and known.shift_set is not None:
        charts["profile"] = figures.shift_profile(known.shift_set, pair)
    if results.get("opinions") is not None:
        charts["opinions"] = figures.opinion_profiles(results["opinions"], pair)
    if results.get("stability") is not None:
        charts["stability"] = figures.stability_courses(results["stability"], pair, start)
    if "season" in opened:
        charts |= lag_season.chart(used)
    if "compare" in opened and both is not None:
        charts["compare"] = tool_figures.compare_scatters(*both, pair, noun(pair))
    if several is not None and any(one.best for one in several):
        charts["responses"] = tool_figures.response_profiles(list(several))
    words = {
        "season": lag_season.words(used, state.season),
        "profile": lag_words.profile_words(known, pair, state),
        "plane": lag_words.plane_words(known, pair),
        "episodes": lag_words.episode_words(known, pair, state, refused),
        "compare": lag_tools.compare_words(both, known, pair, unpinned),
        "peaks": lag_tools.peak_words(peaks, pair, state),
        "responses": lag_tools.response_words(
            several, state, bridge, refusals.get("responses", "")
        ),
        "opinions": lag_words.opinion_words(results, refusals, pair),
        "stability": lag_words.stability_words(results, refusals, pair),
        "method": lag_words.method_words(known, pair),
    }
    data = {
        "state": vars(state),
        "figures": {name: json.loads(chart.to_json()) for name, chart in charts.items()},
        "jobs": jobs,
        "peaks": (
            [json.loads(trace.to_json()) for trace in tool_figures.peak_traces(peaks, pair)]
            if peaks is not None
            else []
        ),
        "support": (
            [json.loads(trace.to_json()) for trace in figures.support_traces(known.search)]
            if known.search
            else []
        ),
        "set": (
            [int(s) for s in known.shift_set.shifts] if known.found and known.shift_set else []
        ),
    }
    return (
        lag_words.p_strip(known, state, noun(pair)),
        " ".join(verdict(known, pair, state)),
        *[words[name] for name in FOLDS],
        data,
    )


def _plot(name: str) -> html.Div:
    # Drawn by assets/colours.js when the fold is open: a page of empty charts would load slower.
    return html.Div(
        [
            controls.save_buttons(name),
            html.Div(
                html.Div(id=f"lag-{name}", **{"data-chart": "drawn when shown"}),
                className=f"plot fold-plot {name}",
            ),
        ],
        hidden=True,
        id=f"place-{name}",
        className="place",
    )
