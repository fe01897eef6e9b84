"""The Reading page: how unusual the print is, what moved it, and what is carried over."""

from dataclasses import replace
from typing import Any

from dash import Dash, html
from plotly.graph_objects import Figure

from analytics.series import period_code
from app import controls
from app.compute import Bridge
from app.figures import reading as figures
from app.figures import reading_shape as shapes
from app.kept_rules import rules_in_force
from app.outlook.statements import kept_statements, stated_bounds
from app.pages import plain
from app.pages.as_of import as_of_line
from app.pages.rules import rule_list, rules_fold
from app.places import software_version
from app.reading import page_words as reading_page_words
from app.reading.bridge import CORE, chosen_series, reading, reading_key
from app.reading.result import Reading
from app.reading.words import CAUTION, sentence, set_off, verdict
from app.state import ViewState

PATH, TITLE, NAME = "/reading", "Reading", "reading"
PLACES = (
    "as-of",
    "alerts",
    "rules",
    "summary",
    "rates-words",
    "base-words",
    "whatif-words",
    "rank-words",
    "history-words",
    "distribution-words",
    "quantiles-words",
    "episodes-words",
)
SCREEN_ONLY = ("rules",)  # a form; what the rules found stands in the alerts


def layout(query: str, bridge: Bridge) -> html.Div:
    """Return the page for an address; refused values are named and replaced by the usual ones."""
    state, refused = ViewState.from_query_or_default(query)
    shown, names = state, list(bridge.in_view(state).series)
    if not state.series and names:
        shown = replace(state, series=chosen_series(state, bridge).name)
    return plain.frame(
        NAME,
        state,
        [
            controls.select(shown, "series", names),
            controls.text(state, "newest", placeholder="newest"),
            controls.select(state, "formula"),
            controls.select(state, "measure"),
            controls.select(state, "season"),
        ],
        [
            html.Div(id="reading-as-of"),
            html.Div(id="reading-alerts", className="alerts"),
            html.Div(id="reading-summary", className="summary"),
            html.Div(_views(state), className="board"),
            rules_fold(),
        ],
        CAUTION,
        refused,
    )


def _views(state: ViewState) -> list[html.Section]:
    def view(chart: str, words: str, *tools: Any, wide: bool = False) -> html.Section:
        return plain.view(NAME, chart, words, wide=wide, tools=tools)

    return [
        view(
            "rates",
            "Through time",
            controls.select(state, "timeline"),
            controls.text(state, "since", placeholder="the first"),
            wide=True,
        ),
        view("base", "Base effects"),
        view(
            "whatif",
            "What if",
            controls.slider(state, "coming", -1, 3, step=0.05),
        ),
        view(
            "rank",
            "Rank",
            controls.select(state, "among"),
            controls.select(state, "rank_kind"),
            controls.number(state, "rank_window"),
        ),
        view("history", "Rank through time"),
        view(
            "distribution",
            "Distribution",
            controls.select(state, "family"),
            controls.text(state, "split", placeholder="the middle"),
        ),
        view("quantiles", "Observed against fitted"),
        view(
            "episodes",
            "Episodes of high inflation",
            controls.select(state, "beyond"),
            controls.number(state, "rank_level", 0.5),
            controls.number(state, "level", 0.1),
            controls.number(state, "shortest"),
            controls.number(state, "gap"),
            wide=True,
        ),
    ]


def register(app: Dash, bridge: Bridge) -> None:
    """Register the callbacks of this page on an app."""
    plain.register(app, bridge, NAME, answer, PLACES)


def answer(state: ViewState, bridge: Bridge) -> plain.Answer:
    """Return the words and charts of the page for a state.

    Raises
    ------
    ValueError
        No such series, or it has no value up to the print.
    """
    known = reading(state, bridge)
    rules, refused = rules_in_force(bridge.workspace.store)
    kept = kept_statements(bridge.workspace.statement_store)
    name, last = known.series.name, known.series.last
    found = set_off(known, rules, stated_bounds(kept, name, last, state.formula))
    waiting = known.fits and known.goodness is None and "test" not in known.refused
    said = sentence(known)
    return plain.Answer(
        state=state,
        sentence=said,
        verdict=" ".join(verdict(known)),
        source=_source(known),
        stem=f"{known.series.name} {period_code(known.series.last)}",
        charts=_kept_charts(known, bridge),
        subtitles=reading_page_words.subtitles(known),
        words={
            "as-of": as_of_line(state),
            "alerts": reading_page_words.alert_list(known, found),
            "rules": rule_list(rules, [alert.rule for alert in found], refused),
            "summary": reading_page_words.rate_table(known),
            **reading_page_words.view_words(known),
        },
        jobs={"goodness": "Testing the fit against drawn samples"} if waiting else {},
    )


def _kept_charts(known: Reading, bridge: Bridge) -> dict[str, Figure | str]:
    """Return the charts; all but the one that the slider moves are drawn once and kept."""
    steady = replace(known, path=None)
    drawn = bridge.memory.once(
        reading_key("charts", known.state, known.loaded, (*CORE, "family", "timeline")),
        lambda: {name: chart.to_json() for name, chart in charts(steady).items()},
    )
    if known.path is None:
        return drawn
    return {**drawn, "whatif": figures.path_lines(known.yearly, known.path, known.year)}


def charts(known: Reading) -> dict[str, Figure]:
    """Return the chart of each view that the print has."""
    state, drawn = known.state, {}
    unit = reading_page_words.measured_words(known)
    if state.timeline == "factor" and known.factor is not None:
        drawn["rates"] = figures.factor_line(known.factor)
    elif known.yearly is not None:
        drawn["rates"] = figures.rate_lines(known.yearly, known.quarter)
    if known.base is not None:
        drawn["base"] = figures.base_bars(known.base, known.drops, known.noun)
    if known.path is not None:
        drawn["whatif"] = figures.path_lines(known.yearly, known.path, known.year)
    if known.standing is not None:
        drawn["rank"] = shapes.standing_steps(known.standing, unit)
    if known.through_time is not None:
        drawn["history"] = figures.rank_line(known.through_time)
    if known.fits and known.sample is not None and known.standing is not None:
        drawn["distribution"] = shapes.density_curves(
            known.sample, known.fits, known.kernel, state.family, known.print_value, unit
        )
        drawn["quantiles"] = shapes.quantile_points(known.standing, known.fits[state.family], unit)
    if known.yearly is not None and known.mark is not None:
        drawn["episodes"] = figures.episode_bands(known.yearly, known.mark, known.runs)
    return drawn


def _source(known: Reading) -> str:
    used = known.short or known.loaded
    source = used.source or used.name
    return f"Source: {source}. Pricewake {software_version()}."
