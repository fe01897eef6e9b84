"""The Breadth page: is the print broad or a few items, and what did each of them give."""

from typing import Any

from dash import Dash, html

from app import controls
from app.breadth.bridge import Breadth, breadth
from app.breadth.core import short_name
from app.breadth.exports import stem
from app.breadth.table import bars, parts, strip_order
from app.breadth.totals import totals
from app.breadth.words import (
    adding_up,
    over_words,
    print_words,
    sentence,
    trim_words,
    verdict,
)
from app.compute import Bridge
from app.figures import breadth as figures
from app.pages import plain
from app.pages.as_of import as_of_line
from app.pages.breadth_tables import component_table, tracking_table
from app.places import software_version
from app.state import ViewState

PATH, TITLE = "/breadth", "Breadth"
NAME = "breadth"
CAUTION = (
    "Contributions are arithmetic on weights and prices: they say where the rate came from, not "
    "why. A core measure is a summary of past prices and no forecast; not investment or policy "
    "advice. Official statistics and your desk's own qualified judgement come first."
)
PLACES = (
    "as-of",
    "notes",
    "contributions-words",
    "history-words",
    "strip-words",
    "core-words",
    "diffusion-words",
    "weights-words",
    "table",
    "tracking",
)


def answer(state: ViewState, bridge: Bridge) -> plain.Answer:
    """Return words and charts for a state.

    Raises
    ------
    ValueError
        One sentence that says why there is nothing to show.
    """
    shown = breadth(state, bridge)
    drawn, over = shown.drawn, over_words(shown)
    when = shown.periods[drawn]
    unit = "percentage points"
    total = shown.total.name if shown.total else "All items, chained"
    found = shown.weighted
    order = strip_order(shown)
    charts = {
        "strip": figures.component_strip(
            when,
            [shown.names[i] for i in order],
            [short_name(shown.names[i]) for i in order],
            shown.rates[drawn][:, order],
            shown.ranks[drawn.start - shown.start :][:, order],
            by_rank=shown.state.strip == "rank",
            over=over,
        ),
    }
    lines = {"every component the same": shown.diffusion[drawn]}
    faster = f"faster than {shown.state.pace} % a year"
    if found is None:
        lines[faster] = shown.above[drawn]
    else:
        lines |= {
            "by weight": found.diffusion[drawn],
            faster: shown.above[drawn],
            f"{faster}, by weight": found.above[drawn],
        }
        trend = found.tracking.trend[drawn.start - shown.start :]
        charts |= {
            "contributions": figures.contribution_bars(*bars(shown)[:2], unit),
            "history": figures.contribution_history(
                when, parts(shown, found.points), shown.rate[drawn], total, unit
            ),
            "core": figures.core_lines(
                when,
                {name: values[drawn] for name, values in found.measures.items()},
                trend if shown.span > 1 else None,
                over,
            ),
            "weights": figures.weight_areas(when, parts(shown, found.effective)),
        }
    charts["diffusion"] = figures.diffusion_lines(when, lines)
    said = _words(shown)
    for name, chart in charts.items():
        key = (chart.layout.meta or {}).get("key")
        if key:
            said[f"{name}-words"] = [said.get(f"{name}-words", ""), plain.key_list(key)]
    words = said | {
        "as-of": as_of_line(state),
        "notes": _notes(shown),
        "table": component_table(shown),
        "tracking": tracking_table(shown),
    }
    return plain.Answer(
        shown.state,
        sentence(shown),
        verdict(shown),
        _source(shown),
        stem(shown),
        charts,
        {
            "contributions": f"Contributions to the {over} rate of {print_words(shown)}",
            "history": f"Contributions to the {over} rate",
            "strip": "Rank of each component in its own history"
            if shown.state.strip == "rank"
            else f"{over[0].upper()}{over[1:]} rate of each component",
            "core": "Core measures and the rate of all items",
            "diffusion": "Share of components that rise, unchanged ones as half",
            "weights": "Effective weights, at each period's own prices",
        },
        words,
    )


def layout(query: str, bridge: Bridge) -> html.Div:
    """Return the page for an address; refused values are named and replaced by the usual ones."""
    state, refused = ViewState.from_query_or_default(query)
    in_view = bridge.in_view(state)
    table = in_view.weights
    names = table.names if table is not None else ()
    loaded = [series.name for series in totals(in_view, names)]
    return plain.frame(
        NAME,
        state,
        [
            controls.select(state, "aggregate", ["", *loaded], empty="the one that fits"),
            controls.select(state, "span"),
            controls.text(state, "newest", placeholder="newest"),
            controls.number(state, "years"),
        ],
        [
            html.Div(id=f"{NAME}-as-of"),
            html.Div(id=f"{NAME}-notes"),
            html.Div(
                [
                    plain.view(NAME, "contributions", "What each component gave"),
                    plain.view(NAME, "history", "Contributions through time"),
                    plain.view(
                        NAME,
                        "strip",
                        "Every component, month by month",
                        wide=True,
                        tools=[controls.select(state, "strip")],
                    ),
                    plain.view(
                        NAME,
                        "core",
                        "Core measures",
                        tools=[controls.select(state, "core"), controls.text(state, "trim")],
                    ),
                    plain.view(
                        NAME, "diffusion", "How many rise", tools=[controls.text(state, "pace")]
                    ),
                    html.Section(
                        [_head("table", "Components"), html.Div(id=f"{NAME}-table")],
                        className="view wide",
                    ),
                    plain.view(
                        NAME,
                        "weights",
                        "Effective weights",
                        tools=[controls.number(state, "link"), controls.select(state, "valued")],
                    ),
                    html.Section(
                        [
                            _head("tracking", "How near each measure came to the trend"),
                            html.Div(id=f"{NAME}-tracking"),
                        ],
                        className="view",
                    ),
                ],
                className=f"board breadth-board {'many' if len(names) > 45 else 'few'}",
            ),
        ],
        CAUTION,
        refused,
    )


def register(app: Dash, bridge: Bridge) -> None:
    """Register the callback of this page on an app."""
    plain.register(app, bridge, NAME, answer, PLACES)


def _words(shown: Breadth) -> dict[str, Any]:
    over = over_words(shown)
    ranked = f"Colours: rank of the {over} rate in the component's own history, 0 to 100."
    rates = f"Colours: {over} rate in percent."
    coloured = {"strip-words": ranked if shown.state.strip == "rank" else rates}
    if shown.weighted is None:
        refused = html.P(f"Nothing here: {shown.refusal}.", className="quiet")
        lacking = ("contributions-words", "history-words", "core-words", "weights-words")
        return coloured | dict.fromkeys(lacking, refused)
    out = [short_name(n) for n, left in zip(shown.names, shown.left_out, strict=True) if left]
    without = (
        f" Left out: {', '.join(out[:8])}{' and more' if len(out) > 8 else ''}; choose others in"
        " the table."
        if out
        else " Choose components to leave out in the table."
    )
    return coloured | {
        "contributions-words": f"{bars(shown)[2]} {adding_up(shown)}".strip(),
        "history-words": "The bars add up to the line, to rounding.",
        "core-words": f"The trimmed mean cuts {trim_words(shown)} of the weight.{without}",
        "diffusion-words": "Above 50 more components rise than fall.",
        "weights-words": "Shares of the basket at each period's own prices; new weights come in "
        "at the links.",
    }


def _notes(shown: Breadth) -> list[Any]:
    found: list[Any] = [html.Li(note) for note in shown.notes]
    if shown.refusal:
        offer: list[Any] = [f"{shown.refusal[0].upper()}{shown.refusal[1:]}. "]
        if "must sum to" in shown.refusal:
            offer.append(
                html.Button(
                    "Scale them to their total",
                    type="button",
                    **{"data-set": "scale", "data-value": "yes"},
                )
            )
        found.insert(0, html.Li(offer))
    return [html.Ul(found, className="notes")] if found else []


def _head(view: str, words: str) -> html.Div:
    link = html.A("Save CSV", id=f"csv-{view}", className="button", **{"data-csv": view})
    return html.Div([html.H2(words), html.Div([link], className="save")], className="view-head")


def _source(shown: Breadth) -> str:
    sources = dict.fromkeys(
        one.source or one.name
        for one in (*([shown.total] if shown.total else []), *shown.prices.values())
    )
    listed = list(sources)
    more = f" and {len(listed) - 3} more" if len(listed) > 3 else ""
    return (
        f"Source: {'; '.join(listed[:3])}{more}. Weights: {shown.weights_source}."
        f" Pricewake {software_version()}."
    )
