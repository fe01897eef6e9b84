"""Words and tables of the evidence on the Lag page; every number in them is a result's."""

from typing import Any

from dash import html

from analytics.series import Pair, period_label
from app.compute import cell_span, noun
from app.lag.cells import episode_code
from app.lag.evidence import Directions, Evidence
from app.lag.verdict import effective_words, fragility
from app.state import ViewState
from app.words import (
    as_sentence,
    counted,
    p_words,
    percent,
    plain,
    runs_words,
    shift_words,
    signed,
    slug,
)

MOST_EPISODES = 8


def p_strip(known: Evidence, state: ViewState, unit: str) -> list[html.Div]:
    """Return the three p-values and what the months are worth, for the line under the headline."""
    found = known.search
    whole = p_words(found.p) if found else "not searched"
    # Without the months left out, where there are some: the cell is then known by `rest`.
    judged = known.rest or known.inference
    worth = effective_words(known.n, judged.effective_months, unit)
    return [
        _figure(
            "naive p",
            p_words(known.naive_p),
            "As if the overlapping months of this cell were independent. They are not.",
            known.naive_p,
        ),
        _figure(
            "per-cell p",
            p_words(judged.p),
            f"{worth}; as if this cell had been the only one looked at.",
            judged.p,
        ),
        _figure(
            "search-adjusted p",
            whole,
            "For the best cell of the whole map, the search paid for; two-sided."
            + (f" One-sided {p_words(found.p_one_sided)}." if found else "")
            + (f" Another seed moves p by about {_moved(found.p_error)}." if found else ""),
            float(found.p) if found else None,
        ),
        html.Div(
            [
                html.Dt("effective months", className="hidden-label"),
                html.Dd(
                    _explained(
                        worth, "What overlapping, smoothed months are worth (Bartlett 1946)."
                    )
                ),
            ],
            className="strip-item worth",
        ),
    ]


def _moved(error: float) -> str:
    """Write a Monte Carlo standard error of p: ``.009``, or that it is too small to matter."""
    return "less than .001" if error < 0.0005 else f"{error:.3f}".lstrip("0")


def _figure(name: str, value: str, meaning: str, digits: float | None) -> html.Div:
    copy = (
        []
        if digits is None
        else [
            html.Button(
                type="button",
                className="copy",
                title=f"Copy {name} with all digits",
                **{
                    "data-copy": repr(float(digits)),
                    "data-copied": name,
                    "aria-label": f"Copy {name}",
                },
            )
        ]
    )
    return html.Div(
        [html.Dt(_explained(name, meaning)), html.Dd([value, *copy])], className="strip-item"
    )


def _explained(words: str, meaning: str) -> list[Any]:
    """Return words that explain themselves on hover, focus and touch: assets/help.js."""
    place = f"meaning-{slug(words)}"
    return [
        html.Button(
            words,
            type="button",
            className="term",
            **{"data-help": place, "aria-describedby": place},
        ),
        html.Span(meaning, id=place, className="hidden-label"),
    ]


def profile_words(known: Evidence, pair: Pair, state: ViewState) -> list[Any]:
    """Say what the chart of shifts shows, or why it shows nothing."""
    if known.refusal:
        return [html.P(f"There is no search here: {known.refusal}.")]
    if known.search is None:
        return [html.P("This is shown once the search is done.")]
    if not known.found:
        return [
            html.P(
                "A set of shifts means something only where the search holds at 5 %. It does not"
                f" here (p {p_words(known.search.p)}), so none is shown."
            )
        ]
    if known.set_refusal:
        return [html.P(f"There is no set here: {known.set_refusal}.")]
    if known.shift_set is None:
        return [html.P("Being worked out.")]
    return [
        html.P(
            f"Filled points: shifts that a simulated test at window {state.window} does not"
            f" reject ({100 * known.shift_set.level:.0f} %, {known.shift_set.draws} simulated"
            " responses a shift). Rings: the quick closed-form preview. The window is taken as"
            " chosen beforehand; having looked at many is not paid for here."
        )
    ]


def plane_words(known: Evidence, pair: Pair) -> list[Any]:
    """Say slope and correlation with their intervals."""
    inference, unit = known.inference, noun(pair)
    low, high = inference.slope_interval
    return [
        html.P(
            f"Slope {plain(inference.slope, 3)}, {100 * inference.level:.0f} % interval"
            f" {plain(low, 3)} to {plain(high, 3)}; correlation"
            f" {signed(inference.correlation)} ({signed(inference.correlation_interval.low)} to"
            f" {signed(inference.correlation_interval.high)}). "
            f"{effective_words(inference.n, inference.effective_months, unit).capitalize()}."
            " Seasonal means are taken out first."
        )
    ]


def episode_words(known: Evidence, pair: Pair, state: ViewState, refused: str) -> list[Any]:
    """Say what the chosen cell rests on, with the table of episodes."""
    influence, start = known.influence, cell_span(pair, state)[0]
    ranked = sorted(influence.episodes, key=lambda e: -max(abs(e.share), e.weight))
    rows = []
    for episode in ranked[:MOST_EPISODES]:
        code = episode_code(episode, pair, state)
        first = period_label(pair.periods[start + episode.first_month])
        last = period_label(pair.periods[start + episode.stop_month - 1])
        chosen = state.without == code
        rows.append(
            html.Tr(
                [
                    html.Td(
                        html.Button(
                            f"{first} to {last}",
                            type="button",
                            className="episode",
                            **{
                                "data-without": "" if chosen else code,
                                "aria-pressed": str(chosen).lower(),
                            },
                        )
                    ),
                    html.Td("high" if episode.high else "low"),
                    html.Td(percent(episode.share)),
                    html.Td("too few left" if episode.too_few_left else percent(episode.change)),
                    html.Td(p_words(episode.p_without)),
                ]
            )
        )
    head = ("Episode of the driver", "Driver", "Share", "Slope without it", "Per-cell p without it")
    return [
        html.P(fragility(known, pair, state)),
        *([html.P(as_sentence(refused), className="message")] if refused else []),
        html.Table(
            [
                html.Thead(html.Tr([html.Th(text, scope="col") for text in head])),
                html.Tbody(rows),
            ],
            className="table",
        ),
        html.P(
            f"The {min(MOST_EPISODES, len(ranked))} of {counted(len(ranked), 'episode')} that"
            " matter most. Choose one to see the cell without it.",
            className="quiet",
        ),
    ]


def opinion_words(results: dict[str, Any], refusals: dict[str, str], pair: Pair) -> list[Any]:
    """Put the answers of other methods, samples and directions side by side."""
    unit = noun(pair)
    opinions, directions = results.get("opinions"), results.get("directions")
    if refusals.get("opinions"):
        return [html.P(f"Other methods cannot be asked here: {refusals['opinions']}.")]
    if opinions is None:
        return [html.P("Being worked out.")]
    rows = [
        (
            o.method,
            shift_words(o.shift, unit),
            f"{plain(o.estimate)} ({plain(o.low)} to {plain(o.high)})",
            "yes" if o.clear else "no",
        )
        for o in opinions.opinions
    ]
    samples = dict(opinions.variants)
    if opinions.halves is not None:
        samples |= {"first half": opinions.halves.first, "second half": opinions.halves.second}
    rows += [
        (
            name,
            shift_words(best.best_shift, unit),
            f"chosen cell r {signed(best.correlation)}, slope {plain(best.slope)}",
            f"p {p_words(best.p)}",
        )
        for name, best in samples.items()
    ]
    parts: list[Any] = [
        html.P(
            "Other ways to ask for the lag. They are put side by side and not averaged: where they"
            " disagree, the lag depends on how it is asked for."
        ),
        html.Table(
            [
                html.Thead(
                    html.Tr(
                        [
                            html.Th(text, scope="col")
                            for text in ("Method", "Strongest at", "Estimate", "Clear of zero")
                        ]
                    )
                ),
                html.Tbody([html.Tr([html.Td(text) for text in row]) for row in rows]),
            ],
            className="table",
        ),
    ]
    parts += [
        html.P(f"{name}: {why}.", className="quiet") for name, why in opinions.missing.items()
    ]
    if isinstance(directions, Directions):
        forward, backward = directions.forward, directions.backward
        parts.append(
            html.P(
                "Direction, both searched as strictly over shifts 1 to"
                f" {forward.shifts[-1]}: driver first, search-adjusted p {p_words(forward.p)}"
                f" (best at {shift_words(forward.best_shift, unit)}); response first,"
                f" p {p_words(backward.p)} (best at {shift_words(backward.best_shift, unit)})."
            )
        )
    return parts


def stability_words(results: dict[str, Any], refusals: dict[str, str], pair: Pair) -> list[Any]:
    """Say how far a slope would stray by chance alone."""
    stable = results.get("stability")
    if refusals.get("stability"):
        return [html.P(f"The slope cannot be followed here: {refusals['stability']}.")]
    if stable is None:
        return [html.P("Being worked out.")]
    return [
        html.P(
            f"If the relation had been the same throughout, a slope over {stable.span}"
            f" {noun(pair)}s would stray this far somewhere with probability"
            f" {p_words(stable.rolling_slope.p_constant)}."
        )
    ]


def method_words(known: Evidence, pair: Pair) -> list[Any]:
    """Say what the search was held against, and over which map."""
    found, unit = known.search, noun(pair)
    if found is None:
        return [html.P("This is shown once the search is done.")]
    dropped = (
        f" The {counted(found.months_dropped, f'oldest {unit}')} were left out, so that whole years"
        " are searched."
        if found.months_dropped
        else ""
    )
    return [
        html.P(found.method),
        html.P(
            f"Searched: windows {found.windows[0]} to {found.windows[-1]}, shifts"
            f" {runs_words([int(found.shifts[0])])} to {runs_words([int(found.shifts[-1])])}"
            f" {unit}s, each cell with all {unit}s it has; {found.months_used} {unit}s,"
            f" {found.surrogates} surrogates, seed {found.seed}.{dropped}"
        ),
        html.P(
            f"Two-sided p {p_words(found.p)}; one-sided, for a positive relation,"
            f" {p_words(found.p_one_sided)}. Largest correlation of the map:"
            f" {signed(found.largest_correlation)} at window {found.largest_window} and shift"
            f" {shift_words(found.largest_shift, unit)}; wide windows at far shifts have few"
            f" independent {unit}s and often own it by chance, so the search weighs each cell by"
            " what unrelated drivers reach there."
        ),
    ]
