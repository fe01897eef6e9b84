"""The Outlook page: what is implied, how far to trust it, and how earlier statements turned out."""

from dataclasses import asdict, replace
from typing import Any

import pandas as pd
from dash import Dash, html
from plotly.graph_objects import Figure

from analytics.series import period_code
from app import controls
from app.compute import Bridge
from app.figures import outlook as figures
from app.figures import outlook_backtest as tested
from app.outlook.bridge import outlook, waiting_kinds
from app.outlook.inputs import outlook_key, past_views
from app.outlook.page_words import subtitles, view_words
from app.outlook.result import Judged, Outlook
from app.outlook.words import (
    BENCHMARK_WORDS,
    CAUTION,
    held_words,
    rate_words,
    sentence,
    unit_words,
    verdict,
)
from app.pages import plain
from app.pages.as_of import as_of_line
from app.places import software_version
from app.state import ViewState

PATH, TITLE, NAME = "/outlook", "Outlook", "outlook"
PLACES = (
    "notes",
    "fan-words",
    "gap-words",
    "direct-words",
    "backtest-words",
    "coverage-words",
    "through-words",
    "drivers-words",
    "statements-words",
    "supersedes",
)
JOBS = {
    "backtest": "Going through the past, date by date",
    "drivers": "Going through the past with the other drivers",
}


def layout(query: str, bridge: Bridge) -> html.Div:
    """Return the page for an address; refused values are named and replaced by the usual ones."""
    state, refused = ViewState.from_query_or_default(query)
    named = {part.split("=")[0] for part in query.lstrip("?").split("&")}
    opening = bridge.in_view(state).opening_state()
    if not named & {"driver", "response", "window", "shift"}:
        state = replace(state, window=opening.window, shift=opening.shift)
    for side in {"driver", "response"} - named:
        state = ViewState(**{**asdict(state), side: getattr(opening, side)})
    names = list(bridge.in_view(state).series)
    return plain.frame(
        NAME,
        state,
        [
            controls.select(state, "driver", names),
            controls.select(state, "response", names),
            controls.number(state, "window"),
            controls.number(state, "shift"),
            controls.select(state, "target"),
            controls.select(state, "growth"),
            controls.text(state, "last", placeholder="newest"),
        ],
        [
            as_of_line(state),
            html.Div(id="outlook-notes"),
            html.Div(_views(state), className="board"),
        ],
        CAUTION,
        refused,
    )


def _views(state: ViewState) -> list[html.Section]:
    def view(chart: str, words: str, *tools: Any, wide: bool = False) -> html.Section:
        return plain.view(NAME, chart, words, wide=wide, tools=tools)

    return [
        view("fan", "What is implied", controls.select(state, "recent"), wide=True),
        view(
            "backtest",
            "Past forecasts against benchmarks",
            controls.select(state, "scheme"),
            controls.select(state, "cells"),
        ),
        view(
            "through",
            "When did it help",
            controls.select(state, "ahead"),
            controls.select(state, "against"),
        ),
        view("coverage", "Did the intervals hold"),
        view("direct", "What the driver adds"),
        view("gap", "Expected against observed", wide=True),
        view(
            "drivers",
            "Several drivers",
            controls.text(state, "others", placeholder="names parted by |"),
            wide=True,
        ),
        _statements(state),
    ]


def _statements(state: ViewState) -> html.Section:
    section = plain.view(NAME, "statements", "Statements", wide=True)
    section.children = [
        *section.children,
        html.Div(
            [
                html.H3("Keep a statement"),
                html.P(
                    "It keeps this view, its path and intervals for every rate, and your words, as"
                    " of today. It can never be altered, only superseded.",
                    className="quiet",
                ),
                html.Label("Your words", htmlFor="statement-words"),
                html.Textarea(id="statement-words", rows=3, maxLength=4000),
                html.Div(
                    [
                        html.Div(id="outlook-supersedes"),
                        html.Button(
                            "Keep statement",
                            type="button",
                            **{
                                "data-keep": "say",
                                "data-fields": "words:statement-words"
                                " supersedes:statement-supersedes",
                                "data-said": "statement-said",
                            },
                        ),
                    ],
                    className="controls keep-form",
                ),
                html.Div(id="statement-said", className="said", role="status", tabIndex="-1"),
            ],
            className="say",
        ),
    ]
    return section


def register(app: Dash, bridge: Bridge) -> None:
    """Register the callbacks of this page on an app."""
    plain.register(app, bridge, NAME, answer, PLACES)


def answer(state: ViewState, bridge: Bridge) -> plain.Answer:
    """Return the words and charts of the page for a state.

    Raises
    ------
    ValueError
        There are no two series that can be paired.
    """
    known = outlook(state, bridge)
    kinds = waiting_kinds(known, bridge)
    return plain.Answer(
        state=known.state,
        sentence=sentence(known),
        verdict=" ".join(verdict(known)),
        source=_source(known),
        stem=f"{known.state.driver} {known.state.response} {period_code(known.found.pair.origin)}",
        charts=_kept_charts(known, bridge),
        subtitles=subtitles(known),
        words=view_words(known),
        jobs={kind: JOBS[kind] for kind in kinds},
    )


def _kept_charts(known: Outlook, bridge: Bridge) -> dict[str, Figure | str]:
    """Return the charts; those that do not depend on statements are drawn once and kept."""
    there = "".join("x" if part else "-" for part in (known.scores, known.lines))
    names = ("target", "scheme", "cells", "windows", "shifts", "ahead", "against", "others")
    key = outlook_key(f"outlook-charts-{there}", known.state, bridge, (*names, "recent"))
    drawn = bridge.memory.once(
        f"{key}:{past_views(known.found, bridge).key}",
        lambda: {name: chart.to_json() for name, chart in charts(known).items()},
    )
    stated = statement_chart(known)
    return {**drawn, "statements": stated} if stated is not None else drawn


def charts(known: Outlook) -> dict[str, Figure]:
    """Return the chart of each view that can be shown, without the statements."""
    found, state = known.found, known.state
    noun, drawn = found.noun, {}
    rate = f"{rate_words(found, state.target)}, {unit_words(found, state.target)}"
    response = found.pair.response
    past = _recent(known)
    if known.path is not None and known.fan is not None:
        bands = [known.fan.band(level) for level in known.levels]
        others = {}
        if known.backtest is not None:
            done = known.backtest
            others[BENCHMARK_WORDS[state.against]] = done.forecasts[done.row(state.against), -1]
        drawn["fan"] = figures.fan_chart(
            past,
            figures.Ahead(
                known.periods,
                known.fan.centre,
                bands,
                [held_words(known, row) for row in range(len(known.levels))],
            ),
            others,
            rate,
        )
    if known.gap is not None:
        drawn["gap"] = figures.gap_lines(
            response.periods[known.gap.place],
            known.gap.observed,
            known.gap.expected,
            known.gap.gap,
            unit_words(found, "window").partition(" (")[0],
        )
    if known.direct is not None:
        drawn["direct"] = tested.gain_lines(known.direct, known.added_share, noun)
    if known.scores is not None:
        drawn["backtest"] = tested.ratio_lines(known.scores, noun)
        drawn["coverage"] = tested.coverage_lines(known.scores, noun)
    if known.gain is not None and known.gain[0].size:
        drawn["through"] = tested.gain_through_time(*known.gain, state.against)
    if known.lines:
        drawn["drivers"] = figures.driver_paths(
            past,
            found.pair.ahead(known.lines[0].path.size),
            {line.name: line.path for line in known.lines if line.window is not None},
            {line.name: line.path for line in known.lines if line.window is None},
            rate,
        )
    return drawn


def statement_chart(known: Outlook) -> Figure | None:
    """Return the chart of the statements about the response, or None where there is none."""
    shown = [
        one
        for one in known.judged
        if one.said.response == known.state.response
        and one.score is not None
        and one.said.frequency == known.found.pair.response.frequency
    ]
    if not shown:
        return None
    response, year = known.found.pair.response, known.found.year
    start = min(one.said.start for one in shown) - 2 * year
    place = max(0, start.ordinal - response.first.ordinal)
    rate = f"{rate_words(known.found, known.state.target)}"
    return figures.statement_lines(
        (response.periods[place:], known.history[place:]),
        [_stated(one, known) for one in shown],
        f"{rate}, {unit_words(known.found, known.state.target)}",
    )


def _stated(one: Judged, known: Outlook) -> figures.StatedLine:
    said, score = one.said, one.score
    assert score is not None
    fan = said.paths[known.state.target]
    low, high = fan.band(0.8)
    row = score.levels.index(0.8) if 0.8 in score.levels else 0
    return figures.StatedLine(
        name=f"statement {said.id}",
        periods=pd.period_range(said.start + 1, periods=fan.centre.size),
        centre=fan.centre,
        low=low,
        high=high,
        outcome=score.outcome,
        inside=score.inside[row],
        stands=said.id not in known.kept.successor,
    )


def _recent(known: Outlook) -> Any:
    """Return the part of the history that the fan chart shows."""
    periods, values = known.found.pair.response.periods, known.history
    seen = values == values
    first = int(seen.argmax())
    if known.state.recent != "all":
        first = max(first, values.size - int(known.state.recent) * known.found.year)
    return periods[first:], values[first:]


def _source(known: Outlook) -> str:
    sources = dict.fromkeys(one.source or one.name for one in known.found.loaded)
    return f"Source: {'; '.join(sources)}. Pricewake {software_version()}."
